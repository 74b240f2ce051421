"""How files of each shape were read the last time, kept from one run of the program to the next."""

from __future__ import annotations

import json
from pathlib import Path

from app.files.measured.reading import Reading, reading_from_json, reading_to_json
from app.files.write_error import WriteError
from app.files.writer import write_text

_MOST = 200  # shapes; the oldest are forgotten
_LONGEST = 4_000_000  # bytes of a file that may be ours


class ReadingMemory:
    """Remembers readings by the shape of the file.

    Parameters
    ----------
    path : Path or None
        Where they are kept; None keeps them for this run alone.
    """

    def __init__(self, path: Path | None) -> None:
        self._path = path
        self._known: dict[str, str] | None = None
        self._fault = ""

    def recall(self, shape: str) -> Reading | None:
        """The last choice for files of a shape, or None."""
        text = self._readings().get(shape)
        if text is None:
            return None
        try:
            return reading_from_json(text)
        except ValueError:  # from another version, or tampered with: as if it had never been
            return None

    def fault(self) -> str:
        """Sentence about a file that is not understood, the first time it is asked for; else an empty text."""
        self._readings()
        fault, self._fault = self._fault, ""
        return fault

    def keep(self, shape: str, reading: Reading) -> str:
        """Remember a choice; a sentence where it could not be written down for the next run."""
        known, text = self._readings(), reading_to_json(reading)
        if known.get(shape) == text:
            return ""
        known.pop(shape, None)
        known[shape] = text  # the newest stands last
        for old in list(known)[:-_MOST]:
            del known[old]
        if self._path is None:
            return ""
        try:
            self._path.parent.mkdir(parents=True, exist_ok=True)
            write_text(self._path, json.dumps({"version": 1, "readings": known}, ensure_ascii=False, indent=1))
        except (OSError, WriteError) as fault:
            return f"How this file was read is remembered for this run only: {fault}"
        return ""

    def _readings(self) -> dict[str, str]:
        if self._known is None:
            found = {} if self._path is None else _read(self._path)
            if found is None:
                self._fault = f"How files were read before is forgotten: {self._path} cannot be read."
            self._known = found or {}
        return self._known


def _read(path: Path) -> dict[str, str] | None:
    """What a file remembers; nothing where it is missing, None where it is no such file."""
    try:
        if not path.exists():
            return {}
        if path.stat().st_size > _LONGEST:
            return None
        kept = json.loads(path.read_text(encoding="utf-8"))
        if kept["version"] != 1:
            return None
        return {str(shape): text for shape, text in kept["readings"].items() if isinstance(text, str)}
    except (OSError, ValueError, KeyError, TypeError, AttributeError, RecursionError):
        return None
