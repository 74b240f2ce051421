"""Readings are remembered from run to run, within bounds, and a broken memory does no harm."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from app.files.measured import ReadingMemory, guess, read_measured, shape_key

_ROWS = b"".join(b"%.2f\t%.3f\n" % (v / 50, 20 - v / 10) for v in range(60))
_TEXT = read_measured(b"Voltage (V)\tCurrent density (mA/cm2)\n" + _ROWS, "a.txt")
_READING = guess(_TEXT)


def test_the_next_run_knows(tmp_path: Path) -> None:
    path = tmp_path / "deep" / "readings.json"
    assert ReadingMemory(path).recall(shape_key(_TEXT)) is None
    assert ReadingMemory(path).fault() == ""
    assert ReadingMemory(path).keep(shape_key(_TEXT), _READING) == ""
    assert ReadingMemory(path).recall(shape_key(_TEXT)) == _READING
    other = replace(_READING, decimal=",")
    ReadingMemory(path).keep(shape_key(_TEXT), other)
    assert ReadingMemory(path).recall(shape_key(_TEXT)) == other


def test_without_a_place_it_lasts_for_the_run() -> None:
    memory = ReadingMemory(None)
    assert memory.keep("shape", _READING) == ""
    assert memory.recall("shape") == _READING


def test_the_oldest_are_forgotten(tmp_path: Path) -> None:
    path = tmp_path / "readings.json"
    memory = ReadingMemory(path)
    for k in range(230):
        memory.keep(f"shape {k}", _READING)
    again = ReadingMemory(path)
    assert again.recall("shape 29") is None
    assert again.recall("shape 30") == _READING
    assert again.recall("shape 229") == _READING


@pytest.mark.parametrize(
    "content",
    [b"", b"{", b"[]", b"null", b'{"version": 2, "readings": {"s": "x"}}', b'{"version": 1, "readings": {"s": "x"}}',
     b'{"version": 1, "readings": {"s": 3}}', b'{"version": 1}', b"\xff\xfe\x00", b"[" * 100_000],
)  # fmt: skip
def test_a_broken_memory_is_as_none(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "readings.json"
    path.write_bytes(content)
    memory = ReadingMemory(path)
    assert memory.recall("s") is None
    usable = content.startswith(b'{"version": 1, "readings"')  # a file of ours, if with a reading that is none
    assert memory.fault() == ("" if usable else f"How files were read before is forgotten: {path} cannot be read.")
    assert memory.fault() == ""
    assert memory.keep("s", _READING) == ""
    assert ReadingMemory(path).recall("s") == _READING
    assert json.loads(path.read_text(encoding="utf-8"))["version"] == 1


def test_a_place_that_cannot_be_written_is_told(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("in the way")
    memory = ReadingMemory(tmp_path / "file" / "readings.json")
    assert "this run only" in memory.keep("s", _READING)
    assert memory.recall("s") == _READING
