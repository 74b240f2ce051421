"""Texts inside PNG pictures (iTXt chunks): put in, and read back without trust.

The form is that of the PNG specification, third edition (W3C, 2025), sections 5 and 11.3.3.4.
"""

from __future__ import annotations

import struct
import zlib
from collections.abc import Iterator, Mapping

_SIGNATURE = b"\x89PNG\r\n\x1a\n"
_MOST_CHUNKS = 100_000


class PngError(ValueError):
    """A file that is no PNG picture, or a damaged one; the message is one sentence."""


def is_png(data: bytes) -> bool:
    """Whether bytes start as a PNG picture does."""
    return data.startswith(_SIGNATURE)


def with_texts(png: bytes, texts: Mapping[str, str]) -> bytes:
    """A picture with texts put before its end.

    Parameters
    ----------
    png : bytes
        A whole PNG picture.
    texts : mapping of str to str
        By keyword: 1 to 79 characters of printable ASCII.

    Raises
    ------
    PngError
        Where the bytes are no PNG picture.
    """
    ends = [start for kind, start, _ in _chunks(png) if kind == b"IEND"]
    if not ends:
        raise PngError("This is no whole PNG picture.")
    at = ends[-1] - 8
    added = b"".join(_itxt(keyword, text) for keyword, text in texts.items())
    return png[:at] + added + png[at:]


def texts_in(png: bytes, largest: int) -> dict[str, str]:
    """The iTXt texts of a picture, by keyword; those that are damaged or larger than `largest` bytes are left out.

    Raises
    ------
    PngError
        Where the bytes are no PNG picture.
    """
    found = {}
    for kind, start, length in _chunks(png):
        if kind != b"iTXt":
            continue
        content = png[start : start + length]
        (checksum,) = struct.unpack(">I", png[start + length : start + length + 4])
        if zlib.crc32(b"iTXt" + content) != checksum:
            continue
        read = _read_itxt(content, largest)
        if read is not None:
            found[read[0]] = read[1]
    return found


def _chunks(png: bytes) -> Iterator[tuple[bytes, int, int]]:
    """Kind, start of the content, and length of each chunk that is whole."""
    if not is_png(png):
        raise PngError("This is no PNG picture.")
    at = len(_SIGNATURE)
    for _ in range(_MOST_CHUNKS):
        if at + 12 > len(png):
            return
        length, kind = struct.unpack(">I4s", png[at : at + 8])
        if at + 12 + length > len(png):
            return
        yield kind, at + 8, length
        if kind == b"IEND":
            return
        at += 12 + length


def _itxt(keyword: str, text: str) -> bytes:
    content = keyword.encode("ascii") + b"\0\1\0\0\0" + zlib.compress(text.encode("utf-8"), 9)
    return struct.pack(">I", len(content)) + b"iTXt" + content + struct.pack(">I", zlib.crc32(b"iTXt" + content))


def _read_itxt(content: bytes, largest: int) -> tuple[str, str] | None:
    keyword, mark, rest = content.partition(b"\0")
    if not mark or len(rest) < 2:
        return None
    compressed, method = rest[0], rest[1]
    _, first, rest = rest[2:].partition(b"\0")  # language
    _, second, body = rest.partition(b"\0")  # keyword in that language
    if not first or not second or compressed not in (0, 1) or (compressed and method):
        return None
    try:
        if compressed:
            unpacker = zlib.decompressobj()
            body = unpacker.decompress(body, largest + 1)
            if not unpacker.eof:
                return None
        return (keyword.decode("latin-1"), body.decode("utf-8")) if len(body) <= largest else None
    except (zlib.error, UnicodeDecodeError):
        return None
