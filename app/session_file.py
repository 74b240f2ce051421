"""Sessions on the disk: saved whole or not at all, the version before kept beside, and opened without trust."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from app.files.quoting import quote
from app.files.writer import encode, write_file
from app.session.document import from_text, to_text
from app.session.document_reader import DocumentError
from app.session.state import CellEntry, Choices, State
from app.version import version

SUFFIX = ".gapledger"
_BACKUP = ".previous"
_LARGEST = 512 << 20  # bytes


def save(path: Path, state: State) -> None:
    """Save a session; what stood there before is kept as `<name>.previous`.

    Raises
    ------
    WriteError
        Where it, or the copy of what stood there, could not be saved; then the earlier file is unchanged.
    """
    data = encode(path, to_text(state, version()))
    earlier = _earlier(path)
    if earlier is not None and earlier != data:
        write_file(backup_of(path), earlier)
    write_file(path, data)


def backup_of(path: Path) -> Path:
    """Where the version before the last one is kept."""
    return path.with_name(path.name + _BACKUP)


def _earlier(path: Path) -> bytes | None:
    """What a session file holds now; None where there is none, or where it cannot be read anyway."""
    try:
        return path.read_bytes() if path.is_file() and path.stat().st_size <= _LARGEST else None
    except OSError:
        return None


def is_session(data: bytes) -> bool:
    """Whether a file looks like a session, good or not."""
    head = data[:4096].lstrip(b"\xef\xbb\xbf \t\r\n")
    return head.startswith(b"{") and b"gapledger session" in head


def opened(data: bytes, source: str) -> State:
    """The session that a file holds.

    Raises
    ------
    DocumentError
        With a sentence: what is wrong with it.
    """
    if len(data) > _LARGEST:
        raise DocumentError(f"{quote(source)} is too large to be a session.")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        raise DocumentError(
            f"{quote(source)} is damaged: at byte {fault.start} it is no UTF-8 text. The version before it is kept as "
            f"{quote(source + _BACKUP)}."
        ) from fault
    return from_text(text)


def session_of_cell(cell: CellEntry, choices: Choices, line: str = "") -> str:
    """The session of one cell as text, for a picture of it to carry."""
    return to_text(State((replace(cell, ident=1),), 1, line, choices, 2), version())
