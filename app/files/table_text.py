"""From the bytes of a table to its text."""

import codecs
import re

from app.files.quoting import quote, visible
from app.files.table_error import TableError

_CONTROL = re.compile(r"[\x00-\x08\x0b\x0e-\x1f\x7f]")
_AS_TEXT = "save it as CSV text in UTF-8"


def decode(data: bytes, source: str) -> tuple[str, str]:
    """Decode a table's bytes, and say in which encoding.

    A byte order mark decides for UTF-8 or UTF-16. Without one the bytes are UTF-8, or Windows Western
    (cp1252) where they cannot be UTF-8.

    Raises
    ------
    TableError
        Where the bytes are no text: zero bytes or other control characters, or bytes no such encoding has.
    """
    if data.startswith((codecs.BOM_UTF32_LE, codecs.BOM_UTF32_BE)):
        raise TableError(f"{quote(source)} is text in UTF-32, which is not read: {_AS_TEXT}.")
    if data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        return _checked(_strict(data, "utf-16", source), source), "utf-16"
    if b"\0" in data:
        line = data.count(b"\n", 0, data.index(b"\0")) + 1
        raise TableError(f"{quote(source)} is not text, line {line} holds a zero byte: {_AS_TEXT}.")
    if data.startswith(codecs.BOM_UTF8):
        return _checked(_strict(data, "utf-8-sig", source), source), "utf-8-sig"
    try:
        return _checked(data.decode("utf-8"), source), "utf-8"
    except UnicodeDecodeError as fault:
        # Where earlier characters beyond ASCII were good UTF-8, the file is damaged, not of another kind.
        if not data[: fault.start].isascii():
            raise _damaged(fault, "UTF-8", source) from fault
    return _checked(_strict(data, "cp1252", source), source), "cp1252"


_KNOWN_AS = {"utf-16": "UTF-16", "utf-8-sig": "UTF-8", "cp1252": "Windows Western"}


def _strict(data: bytes, encoding: str, source: str) -> str:
    try:
        return data.decode(encoding)
    except UnicodeDecodeError as fault:
        raise _damaged(fault, _KNOWN_AS[encoding], source) from fault


def _damaged(fault: UnicodeDecodeError, encoding: str, source: str) -> TableError:
    line = fault.object.count(b"\n", 0, fault.start) + 1
    return TableError(f"Line {line} of {quote(source)} has bytes that are no {encoding} text: {_AS_TEXT} once more.")


def _checked(text: str, source: str) -> str:
    control = _CONTROL.search(text)
    if control is None:
        return text
    line = text.count("\n", 0, control.start()) + 1
    raise TableError(
        f"{quote(source)} is not text, line {line} holds the control character {visible(control[0])}: {_AS_TEXT}."
    )
