"""From the bytes of a measurement to its lines."""

from __future__ import annotations

import codecs

from app.files.quoting import quote
from app.files.table_error import TableError
from app.files.table_text import decode

MAX_BYTES = 32_000_000
MAX_LINES = 500_000
MAX_LINE_LENGTH = 50_000

_MARKS = (codecs.BOM_UTF8, codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE, codecs.BOM_UTF32_LE, codecs.BOM_UTF32_BE)
_WORKBOOKS = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")
_LOOKED_AT = 4096
_MOSTLY = 0.7


def lines_of(data: bytes, source: str) -> tuple[list[str], str]:
    """Decode and part into lines; say in which encoding.

    Beside the encodings of `decode`, UTF-16 without a byte order mark is understood.

    Raises
    ------
    TableError
        Where the bytes are no text, or too many, or in lines too long or too many.
    """
    if len(data) > MAX_BYTES:
        raise TableError(
            f"{quote(source)} has {len(data) / 1e6:.0f} MB and no more than {MAX_BYTES / 1e6:.0f} MB are read: "
            "take out what is not the measurement."
        )
    if data.startswith(_WORKBOOKS):
        raise TableError(f"{quote(source)} is a workbook or archive, not text: save its sheet as CSV text.")
    text, encoding = _decoded(data, source)
    text = text.replace("\ufeff", "").replace("\r\r\n", "\n").replace("\r\n", "\n").replace("\r", "\n")
    if text.count("\n") > MAX_LINES:
        raise TableError(
            f"{quote(source)} has more than {MAX_LINES} lines: take out those from line {MAX_LINES + 1} on."
        )
    lines = text.split("\n")
    if max(map(len, lines)) > MAX_LINE_LENGTH:
        number = next(number for number, line in enumerate(lines, 1) if len(line) > MAX_LINE_LENGTH)
        raise TableError(
            f"Line {number} of {quote(source)} has more than {MAX_LINE_LENGTH} characters: "
            "a line for each row was expected."
        )
    return lines, encoding


def _decoded(data: bytes, source: str) -> tuple[str, str]:
    plain = data.rstrip(b"\x1a")  # the end mark of files from old instrument computers
    if not plain.strip():
        raise TableError(f"{quote(source)} is empty: a table of numbers was expected from line 1 on.")
    for encoding, mark in (("utf-16-le", codecs.BOM_UTF16_LE), ("utf-16-be", codecs.BOM_UTF16_BE)):
        if not plain.startswith(_MARKS) and _looks_like(plain, encoding):
            return decode(mark + plain, source)[0], encoding
    return decode(plain, source)


def _looks_like(data: bytes, encoding: str) -> bool:
    """Say whether the upper bytes of most pairs are zero, as they are where text in UTF-16 is mostly digits."""
    pairs = data[: _LOOKED_AT - _LOOKED_AT % 2]
    upper, lower = (pairs[1::2], pairs[::2]) if encoding == "utf-16-le" else (pairs[::2], pairs[1::2])
    return len(upper) > 1 and upper.count(0) > _MOSTLY * len(upper) and lower.count(0) == 0
