"""Mutilated measurements: curves or one sentence, within two seconds, never anything else."""

from __future__ import annotations

import random
import time
from collections import Counter
from collections.abc import Iterable
from pathlib import Path

import numpy as np
import pytest

from app.files.measured import (
    JvSweep,
    apply,
    guess,
    read_measured,
    reading_from_json,
    reading_to_json,
    remembered,
    shape_key,
)
from app.files.table_error import TableError

DATA = Path(__file__).parents[2] / "data" / "measured"
ORIGINALS = [path.read_bytes() for path in sorted(DATA.iterdir())]
_SNIPPETS = [
    b"", b"NaN", b"inf", b"-inf", b"1e308", b"-1e308", b"1e-308", b"1e999", b"-0", b"0", b"-1", b"1,5", b"1.234,5",
    b"1,234", b"1.234", b"1e", b'"', b'""', b"'", b"\0", b"\xff", b"\xef\xbb\xbf", b"\r", b"\n", b"\r\n", b"\t", b";",
    b",", b" ", b"   ", b"#", b"# ", b"%", b"//", b"\x1a", b"\x0c", b":", b"=", b"(", b")", b"[", b"/", b"_", b"1_000",
    b"V", b"mV", b"mA/cm2", b"Area: 1e400 cm2", b"Area = x", b"Area (mm2): 3 x 3", b"dark", b"light", b"reverse",
    b"Wavelength (nm)", b"EQE", b"Jsc\tVoc", b"sep=,", b"sep=;\n", b"x" * 300, b"9" * 400, b"1 " * 200, b"((((" * 50,
    b"1;" * 300, b"," * 300, b"\n1\t2" * 40, "½".encode(), "٣".encode(), "−1".encode(), "字".encode(), "×10".encode(),
    "²".encode(), "µ".encode("cp1252"),
]  # fmt: skip


def mutilated(seed: int) -> bytes:
    """One of the files with some bytes, cells or lines exchanged, lost, doubled or taken from another file."""
    chance = random.Random(seed)
    data = chance.choice(ORIGINALS)
    for _ in range(chance.choice([1, 1, 2, 3, 6, 20])):
        kind = chance.randrange(8)
        at = chance.randrange(len(data) + 1)
        if kind == 0:
            data = data[:at] + bytes([chance.randrange(256)]) + data[at + 1 :]
        elif kind in (1, 2):
            data = data[:at] + chance.choice(_SNIPPETS) + data[at + chance.choice([0, 0, 1, 5]) :]
        elif kind == 3:
            data = data[:at] if chance.random() < 0.3 else data[:at] + data[at + chance.randrange(20) :]
        elif kind == 4:
            other = chance.choice(ORIGINALS).split(b"\n")
            lines = data.split(b"\n")
            lines.insert(chance.randrange(len(lines) + 1), chance.choice(other))
            data = b"\n".join(lines)
        elif kind == 5:
            one, another = chance.choice([(b"\t", b";"), (b".", b","), (b",", b"."), (b" ", b"\t"), (b"\n", b"\r")])
            data = data.replace(one, another)
        elif kind == 6:
            lines = data.split(b"\n")
            chance.shuffle(lines)
            data = b"\n".join(lines)
        else:
            data += chance.choice(ORIGINALS)
    if chance.random() < 0.03:
        data = data.decode("utf-8", "replace").encode(chance.choice(["utf-16", "utf-16-le", "utf-16-be"]))
    return data


def run_of(seeds: Iterable[int]) -> Counter[str]:
    """Read them all; what became of them."""
    seen: Counter[str] = Counter()
    choice = None
    for seed in seeds:
        data = mutilated(seed)
        start = time.perf_counter()
        try:
            text = read_measured(data, "cell.txt")
            assert len(shape_key(text)) == 32
            reading = guess(text)
            if choice is not None:
                taken = remembered(text, choice)
                assert reading_from_json(reading_to_json(taken)) == taken, seed
            choice = reading if reading.traces else choice
            curves = apply(text, reading)
        except TableError as refusal:
            told = str(refusal)
            assert told.endswith("."), (seed, told)
            assert told.count("\n") == 0, (seed, told)
            seen["refused"] += 1
        else:
            assert curves, seed
            for curve in curves:
                assert curve.label, seed
                if isinstance(curve, JvSweep):
                    assert len(curve.voltage) == len(curve.current) >= 3, seed
                    assert np.isfinite(curve.voltage).all(), seed
                    assert np.isfinite(curve.current).all(), seed
            seen[reading.kind] += 1
        assert time.perf_counter() - start < 2, seed
    return seen


def test_mutilated_files() -> None:
    """500 files, where a warning is an error too."""
    assert set(run_of(range(500))) == {"refused", "jv", "eqe", "spectrum", "intensity"}


@pytest.mark.slow
def test_many_mutilated_files() -> None:
    """50 000 files."""
    assert set(run_of(range(1000, 51000))) == {"refused", "jv", "eqe", "spectrum", "intensity"}
