"""What an unsaved session looked like a moment ago, kept on the disk for the case that the program is killed."""

from __future__ import annotations

import contextlib
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from app.files.writer import write_text
from app.session.document import to_text
from app.session.document_reader import DocumentError
from app.session.state import State
from app.session_file import opened
from app.version import version

SUFFIX = ".journal"
_HEAD = "gapledger journal"


@dataclass(frozen=True)
class Found:
    """A journal that was left behind.

    Parameters
    ----------
    path : Path
        Where it lies.
    state : State
        The session in it.
    file : Path or None
        The file to which the session belongs; None where it was never saved.
    when : datetime
        When it was written, local time.
    """

    path: Path
    state: State
    file: Path | None
    when: datetime


def write_journal(path: Path, state: State, file: Path | None) -> None:
    """Keep a session that belongs to a file, or to none yet.

    Raises
    ------
    WriteError
        Where it could not be written.
    """
    name = "" if file is None else str(file).replace("\n", " ")
    write_text(path, f"{_HEAD}\n{name}\n{to_text(state, version())}")


def read_journal(path: Path) -> Found | None:
    """What a journal holds; None where it cannot be read."""
    try:
        data = path.read_bytes()
        when = datetime.fromtimestamp(path.stat().st_mtime)
        head, name, text = data.split(b"\n", 2)
        if head.decode("utf-8") != _HEAD:
            return None
        state = opened(text, path.name)
        file = Path(name.decode("utf-8")) if name else None
    except (OSError, ValueError, DocumentError):
        return None
    return Found(path, state, file, when)


def drop_journal(path: Path) -> None:
    """Take a journal away, if it is there."""
    with contextlib.suppress(OSError):
        path.unlink(missing_ok=True)
