"""Texts in PNG pictures: written so that other programs read them, and read without trust."""

from __future__ import annotations

import random
import struct
import zlib

import pytest

from app.files.png_text import PngError, is_png, texts_in, with_texts


def _chunk(kind: bytes, content: bytes) -> bytes:
    return struct.pack(">I", len(content)) + kind + content + struct.pack(">I", zlib.crc32(kind + content))


def _picture(*more: bytes) -> bytes:
    """One black point."""
    head = _chunk(b"IHDR", struct.pack(">IIBBBBB", 1, 1, 8, 2, 0, 0, 0))
    data = _chunk(b"IDAT", zlib.compress(b"\0\0\0\0"))
    return b"\x89PNG\r\n\x1a\n" + head + data + b"".join(more) + _chunk(b"IEND", b"")


TEXTS = {"Title": "η & Ω − 19.4 %", "Software": "Gapledger", "Gapledger session": '{"a": "' + "x" * 100_000 + '"}'}
PICTURE = with_texts(_picture(), TEXTS)


def test_what_was_put_in_is_read_back() -> None:
    assert is_png(PICTURE)
    assert texts_in(PICTURE, 1 << 20) == TEXTS
    assert texts_in(_picture(), 1 << 20) == {}
    assert len(PICTURE) < 2000  # compressed


def test_uncompressed_texts_of_others_are_read_too() -> None:
    others = _picture(_chunk(b"iTXt", b"Title\0\0\0de\0Titel\0" + "Größe".encode()))
    assert texts_in(others, 1000) == {"Title": "Größe"}


def test_what_is_too_large_or_damaged_is_left_out() -> None:
    assert set(texts_in(PICTURE, 1000)) == {"Title", "Software"}
    bomb = _picture(_chunk(b"iTXt", b"k\0\1\0\0\0" + zlib.compress(b"\0" * 50_000_000)))
    assert texts_in(bomb, 1 << 20) == {}
    for content in (b"", b"k", b"k\0", b"k\0\1\0", b"k\0\1\0\0\0nonsense", b"k\0\2\0\0\0x", b"k\0\0\0\0\0\xff"):
        assert texts_in(_picture(_chunk(b"iTXt", content)), 1000) == {}
    flipped = bytearray(PICTURE)
    flipped[PICTURE.index(b"Gapledger session") + 25] ^= 1
    assert set(texts_in(bytes(flipped), 1 << 20)) == {"Title", "Software"}


def test_no_picture_is_told() -> None:
    for data in (b"", b"\x89PN", b"GIF89a", b"{}"):
        assert not is_png(data)
        with pytest.raises(PngError):
            texts_in(data, 10)
    with pytest.raises(PngError, match="no whole PNG"):
        with_texts(PICTURE[:-3], TEXTS)


def _fuzz(count: int, seed: int) -> int:
    read = 0
    for k in range(count):
        chance = random.Random(f"{seed} {k}")
        data = bytearray(PICTURE)
        for _ in range(chance.choice([1, 2, 8, 40])):
            kind, at = chance.randrange(3), chance.randrange(len(data))
            if kind == 0:
                data[at] = chance.randrange(256)
            elif kind == 1:
                del data[at : at + chance.randrange(1, 50)]
            else:
                data[at:at] = chance.randbytes(chance.randrange(1, 20))
            if len(data) < 10:
                break
        try:
            read += len(texts_in(bytes(data), 1 << 20))
        except PngError:
            continue
    return read


def test_mutated_pictures() -> None:
    assert _fuzz(500, 1) > 0


@pytest.mark.slow
def test_many_mutated_pictures() -> None:
    print(f"texts read from 30000 mutated pictures: {_fuzz(30_000, 2)}")
