"""What comes in by a file, a drop or the clipboard: sessions, tables of cells, measured curves, pictures."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QStandardPaths
from PySide6.QtGui import QGuiApplication

from app.cell_columns import KNOWN
from app.cell_curves import merged, names_curves
from app.cells import shelf_of
from app.files.png_text import PngError, is_png, texts_in
from app.files.table_error import TableError
from app.files.tables import load_bytes, read_table
from app.session.commands import AddCells
from app.session.document import from_text
from app.session.document_reader import DocumentError
from app.session.state import CellEntry
from app.session_file import is_session
from app.workbench.curve_loader import Arrived, CurveLoader, Wanted

if TYPE_CHECKING:
    from app.files.measured import MeasuredText, Reading, ReadingMemory
    from app.workbench.import_panel import ImportPanel
    from app.workbench.window import Window

_HEAD = 16384  # bytes that are enough to tell a table of cells from a file of curves
_LARGEST_CARRIED = 64 << 20  # bytes of a session in a picture
_WORTH_TELLING = 5  # fewer cells than this have their curves before one has read how many are to come


class Intake(QObject):
    """Takes what the user brings to the window, and tells how it went."""

    def __init__(self, window: Window) -> None:
        super().__init__(window)
        self._window = window
        self._session = window.session
        self._import: ImportPanel | None = None
        self._loader: CurveLoader | None = None
        self._wanted: list[Wanted] = []  # cells whose curve files are yet to be read
        self._to_come = 0
        self._going = 0  # cells since the last time that all were read
        self._doubts: list[str] = []  # about curve files that have been read
        self._waiting: list[tuple[MeasuredText, Reading]] = []
        self._memory: ReadingMemory | None = None  # how files of a shape were read the last time

    def _say(self, sentence: str, *, lasting: bool = False) -> None:
        self._window.notices.say(sentence, lasting=lasting)

    def close(self) -> None:
        """Close the preview, and leave out the curve files that are not yet read."""
        if self._import is not None:
            self._import.close()
        if self._loader is not None:
            self._loader.stop()

    def open_file(self, path: Path) -> None:
        """Open a session, put the cells of a table on the shelf, or measured curves into the cell on show."""
        try:
            data = load_bytes(path)
            if is_session(data):
                self._window.files.open_data(data, path)
            elif is_png(data):
                self._take_picture(data, path.name)
            else:
                self._take_data(data, path.name, path.parent)
        except TableError as fault:
            self._say(str(fault), lasting=True)

    def _take_picture(self, data: bytes, source: str) -> None:
        """Put the cell that a picture of ours carries on the shelf."""
        from app.figures.export import SESSION_KEYWORD

        try:
            text = texts_in(data, _LARGEST_CARRIED).get(SESSION_KEYWORD)
            state = None if text is None else from_text(text)
        except (PngError, DocumentError) as fault:
            raise TableError(f"{source}: {fault}") from fault
        if state is None or not state.cells:
            raise TableError(
                f"{source} carries no cell: it is no picture of this program's, or a program in between left out what "
                "was in it beside the picture."
            )
        self._session.do(AddCells(state.cells, "cell of a picture"))
        names = ", ".join(cell.name for cell in state.cells)
        other = state.choices != self._session.state.choices
        how = f" The picture was made with shares by {state.choices.attribution}, faces {state.choices.faces}."
        self._say(f"{names} taken from {source}.{how if other else ''}", lasting=other)

    def paste(self) -> None:
        """Take cells or measured curves from the clipboard, as a spreadsheet puts them there."""
        text = QGuiApplication.clipboard().text()
        if not text.strip():
            self._say("The clipboard holds no text: copy the cells of a spreadsheet, with their headings, first.")
            return
        try:
            self._take_data(text.encode("utf-8", "replace"), "clipboard", Path())
        except TableError as fault:
            self._say(str(fault), lasting=True)

    def _take_data(self, data: bytes, source: str, folder: Path) -> None:
        """Take a table of cells or measured curves; TableError where it is neither."""
        if _holds_cells(data, source):
            self._take_cells(data, source, folder)
        else:
            self._take_curves(data, source)

    @property
    def memory(self) -> ReadingMemory:
        """How files of each shape were read the last time."""
        if self._memory is None:
            from app.files.measured import ReadingMemory

            home = QStandardPaths.writableLocation(QStandardPaths.StandardLocation.AppConfigLocation)
            self._memory = ReadingMemory(Path(home) / "readings.json" if home else None)
        return self._memory

    def _take_curves(self, data: bytes, source: str) -> None:
        """Show what was understood of a file of curves; it is taken from there."""
        from app.files.measured import guess, read_measured, remembered, shape_key

        text = read_measured(data, source)
        choice = self.memory.recall(shape_key(text))
        if forgotten := self.memory.fault():
            self._say(forgotten, lasting=True)
        self._waiting.append((text, guess(text) if choice is None else remembered(text, choice)))
        if self._import is None or not self._import.isVisible():
            self._preview_next()

    def _preview_next(self) -> None:
        """Bring up the next file that waits to be looked at."""
        from app.workbench.import_panel import ImportPanel

        if self._import is None:
            self._import = ImportPanel(self._window.theme, self._window)
            self._import.taken.connect(self._take_shown)
            self._import.rejected.connect(self._preview_next)
        if self._waiting:
            self._import.show_file(*self._waiting.pop(0))

    def _take_shown(self) -> None:
        """Give the cell on show the curves of the file that was looked at."""
        from app.files.measured import shape_key
        from app.session.curve_import import taken

        panel = self._import
        if panel is None or panel.text is None or panel.reading is None:
            return
        unkept = self.memory.keep(shape_key(panel.text), panel.reading)
        source = panel.text.source
        cell = self._session.state.cell or CellEntry(0, Path(source).stem)
        try:
            command, sentences = taken(panel.chosen_first(), cell, source)
        except TableError as fault:
            self._say(str(fault), lasting=True)
        else:
            if self._session.state.cell is None:
                self._session.do(AddCells((cell,)))
                command = replace(command, ident=self._session.state.cells[-1].ident)
            self._session.do(command)
            self._say(f"{source}: {' '.join((*sentences, *([unkept] if unkept else [])))}", lasting=True)
        self._preview_next()

    def _take_cells(self, data: bytes, source: str, folder: Path) -> None:
        shelf = shelf_of(read_table(data, source), source)
        count = len(shelf.entries)
        if count:
            first = self._session.state.next_ident
            self._session.do(AddCells(shelf.entries, "opening of a table"))
            cells = {cell.ident: cell for cell in self._session.state.cells}
            wanted = [
                Wanted(cells[first + at], row, line, folder)
                for at, (row, line) in enumerate(zip(shelf.rows, shelf.lines, strict=True))
                if names_curves(row)
            ]
            self._wanted += wanted
            if wanted:  # the curves will have their own notice, over that of the table
                self._doubts += shelf.left_out
        sentence = f"{count} cell{'' if count == 1 else 's'} taken from {source}."
        if shelf.left_out:
            sentence = f"{sentence} Left out: {_some(shelf.left_out)}"
        self._say(sentence, lasting=bool(shelf.left_out))
        if self._window.complete:
            self.load_curves()

    def leave_curves(self) -> None:
        """Do without the curve files that tables opened so far have named."""
        self._wanted.clear()

    def load_curves(self) -> None:
        """Read the curve files that tables opened so far have named, beside the window."""
        wanted, self._wanted = self._wanted, []
        if not wanted:
            return
        if self._loader is None:
            self._loader = CurveLoader(self)
            self._loader.arrived.connect(self._take_arrived)
            self._loader.finished.connect(self._tell_arrived)
        self._to_come += len(wanted)
        self._going += len(wanted)
        self._loader.load(wanted)

    def _take_arrived(self, arrived: Arrived) -> None:
        self._to_come -= 1
        self._doubts += arrived.sentences
        clean = not self._window.files.unsaved
        self._session.amend(arrived.before.ident, lambda now: merged(now, arrived.before, arrived.after))
        if clean:  # what was asked for with the table is no change of the user's
            self._window.files.mark_clean()
        if self._to_come >= _WORTH_TELLING:
            self._say(f"Reading curves: {self._to_come} cells to come.")

    def _tell_arrived(self) -> None:
        if self._to_come:
            return
        doubts, self._doubts = self._doubts, []
        going, self._going = self._going, 0
        if doubts:
            self._say(f"Curves read. Please check: {_some(doubts)}", lasting=True)
        elif going > _WORTH_TELLING:
            self._say(f"The curves of {going} cells have been read.")


def _some(sentences: Sequence[str]) -> str:
    """The first three of some sentences, and how many more there are."""
    more = f" (and {len(sentences) - 3} more)" if len(sentences) > 3 else ""
    return f"{' '.join(sentences[:3])}{more}"


def _holds_cells(data: bytes, source: str) -> bool:
    """Whether a file is a table of cells, good or not: it names at least one of their columns.

    The first lines tell it; only where they make no table is the whole file looked at.
    """
    for part in (_first_lines(data), data):
        try:
            return bool(KNOWN & set(read_table(part, source).columns))
        except TableError:
            continue
    return False


def _first_lines(data: bytes) -> bytes:
    """Whole lines from the start of a file, in an encoding of one byte or of two."""
    if len(data) <= _HEAD:
        return data
    end = data.rfind(b"\n", 0, _HEAD) + 1
    return data[: end + 1 if end % 2 and b"\0" in data[:_HEAD] else end]
