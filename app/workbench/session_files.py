"""The session's file: opened, saved, known again next time, and never left behind without a question."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QSettings, QStandardPaths
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QFileDialog, QMenu, QMessageBox

from app.files.quoting import quote
from app.files.table_error import TableError
from app.files.write_error import WriteError
from app.session.document_reader import DocumentError
from app.session.state import State
from app.session_file import SUFFIX, opened, save

if TYPE_CHECKING:
    from app.journal import Found
    from app.workbench.window import Window

_FILTER = f"Sessions (*{SUFFIX});;All files (*)"
_MOST_RECENT = 8


def settings() -> QSettings:
    """What the window remembers from run to run: its layout, and the files it had."""
    home = QStandardPaths.writableLocation(QStandardPaths.StandardLocation.AppConfigLocation)
    return QSettings(str(Path(home) / "window.ini"), QSettings.Format.IniFormat)


class SessionFiles(QObject):
    """Knows the file of the session and whether it is up to date."""

    def __init__(self, window: Window) -> None:
        super().__init__(window)
        self._window = window
        self._session = window.session
        self._clean: State = window.session.state
        self.path: Path | None = None
        self.asks = False  # whether to ask before changes are left behind; tests do without
        self.recent = QMenu("Open &recent", window)
        self.recent.aboutToShow.connect(self._fill_recent)

    # ------------------------------------------------------------ up to date or not

    @property
    def unsaved(self) -> bool:
        """Whether there are changes that no file holds."""
        state = self._session.state
        return state.cells is not self._clean.cells or state.choices != self._clean.choices

    def mark_clean(self) -> None:
        """Take the session as it is for one that needs no saving."""
        self._clean = self._session.state
        self.show_title()

    def show_title(self) -> None:
        """Cell, file and program in the window's title, with a mark where changes are unsaved."""
        cell = self._session.state.cell
        names = [cell.name if cell is not None else "", self.path.stem if self.path is not None else "", "Gapledger"]
        title = " – ".join(name for name in names if name)
        if self._window.windowTitle() != f"{title}[*]":
            self._window.setWindowTitle(f"{title}[*]")
        if self._window.isWindowModified() != self.unsaved:
            self._window.setWindowModified(self.unsaved)

    def may_leave(self) -> bool:
        """Whether the session may be left: it is saved, the user lets the changes go, or nobody asks."""
        if not self.asks or not self.unsaved:
            return True
        buttons = QMessageBox.StandardButton
        name = quote(self.path.name) if self.path is not None else "this session"
        answer = QMessageBox.question(
            self._window,
            "Unsaved changes",
            f"Save the changes to {name} first?",
            buttons.Save | buttons.Discard | buttons.Cancel,
            buttons.Save,
        )
        if answer == buttons.Save:
            return self.save()
        return bool(answer == buttons.Discard)

    # ------------------------------------------------------------ saving

    def save(self) -> bool:
        """Save to the session's file, or ask for one; whether it was saved."""
        return self.save_as() if self.path is None else self.save_to(self.path)

    def save_as(self) -> bool:
        """Ask for a file and save there; whether it was saved."""
        start = str(self.path) if self.path is not None else f"session{SUFFIX}"
        name, _ = QFileDialog.getSaveFileName(self._window, "Save the session", start, _FILTER)
        if not name:
            return False
        path = Path(name)
        return self.save_to(path if path.suffix else path.with_name(path.name + SUFFIX))

    def save_to(self, path: Path) -> bool:
        """Save to a file and tell how it went; whether it was saved."""
        state = self._session.state
        try:
            save(path, state)
        except WriteError as fault:
            self._window.notices.say(str(fault), lasting=True)
            return False
        self.path, self._clean = path, state
        self._remember(path)
        self.show_title()
        self._window.notices.say(f"Saved as {path}.")
        return True

    # ------------------------------------------------------------ opening

    def open_data(self, data: bytes, path: Path) -> None:
        """Show the session of a file in the place of the present one.

        Raises
        ------
        TableError
            Where it cannot be read; nothing has changed then.
        """
        try:
            state = opened(data, path.name)
        except DocumentError as fault:
            raise TableError(f"{path.name}: {fault}") from fault
        if not self.may_leave():
            return
        self._session.start_with(state)
        self.path = path
        self.mark_clean()
        self._remember(path)
        count = len(state.cells)
        self._window.notices.say(f"{count} cell{'' if count == 1 else 's'} opened from {path.name}.")

    def take_back(self, found: Found) -> None:
        """Show work that an earlier run left behind; it counts as unsaved."""
        self._session.start_with(found.state)
        self.path = found.file
        self._clean = State()
        self.show_title()
        self._window.notices.say(f"Taken back as of {found.when:%H:%M:%S}. Save it to keep it.", lasting=True)

    def _remember(self, path: Path) -> None:
        kept = settings()
        mine = str(path.resolve())
        kept.setValue("recent", [mine, *(each for each in self._recent() if each != mine)][:_MOST_RECENT])

    @staticmethod
    def _recent() -> list[str]:
        found = settings().value("recent", [])
        return [each for each in (found if isinstance(found, list) else [found]) if isinstance(each, str)]

    def _fill_recent(self) -> None:
        self.recent.clear()
        for name in self._recent():
            action = QAction(name.replace("&", "&&"), self.recent)
            action.triggered.connect(lambda _=False, name=name: self._window.intake.open_file(Path(name)))
            self.recent.addAction(action)
        if self.recent.isEmpty():
            self.recent.addAction("No session yet").setEnabled(False)
