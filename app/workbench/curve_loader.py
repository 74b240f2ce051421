"""Reads the curve files that a table of cells names, beside the window and after it has shown itself."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import QObject, QRunnable, QThreadPool, Signal

from app.cell_curves import with_curves
from app.session.state import CellEntry


@dataclass(frozen=True)
class Wanted:
    """A cell whose row names curve files.

    Parameters
    ----------
    entry : CellEntry
        As it is on the shelf.
    row : mapping of str to str
        Text of its row by column name.
    line : int
        Line in the table.
    folder : Path
        Folder that the names of the files start from.
    """

    entry: CellEntry
    row: Mapping[str, str]
    line: int
    folder: Path


@dataclass(frozen=True)
class Arrived:
    """A cell with the curves of its files, and what is to be said of them."""

    before: CellEntry
    after: CellEntry
    sentences: tuple[str, ...]


class _Work(QRunnable):
    def __init__(self, loader: CurveLoader, wanted: Sequence[Wanted]) -> None:
        super().__init__()
        self._loader = loader
        self._wanted = wanted

    def run(self) -> None:
        for one in self._wanted:
            if self._loader.stopping:
                return
            after, faults, doubts = with_curves(one.entry, one.row, one.folder)
            told = tuple(f"Line {one.line}: {sentence}" for _, sentence in (*faults, *doubts))
            self._loader.arrived.emit(Arrived(one.entry, after, told))
        self._loader.finished.emit()


class CurveLoader(QObject):
    """Works through cells one after the other in a thread of its own.

    Signals
    -------
    arrived : Arrived
        A cell has its curves.
    finished
        All that were asked for in one go have been read.
    """

    arrived = Signal(object)
    finished = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.stopping = False
        self._pool = QThreadPool(self)
        self._pool.setMaxThreadCount(1)

    def load(self, wanted: Sequence[Wanted]) -> None:
        """Read the files of these cells."""
        self._pool.start(_Work(self, wanted))

    def wait(self) -> None:
        """Wait until nothing is left to read."""
        self._pool.waitForDone()

    def stop(self) -> None:
        """Leave out what has not been begun, and wait for the rest."""
        self.stopping = True
        self._pool.waitForDone()
