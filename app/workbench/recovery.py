"""Keeps a journal of unsaved work, and offers at the start what an earlier run had to leave behind."""

from __future__ import annotations

import uuid
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QLockFile, QObject, QRunnable, QStandardPaths, QThreadPool, QTimer, Signal
from PySide6.QtWidgets import QMessageBox

from app.files.quoting import quote
from app.files.write_error import WriteError
from app.journal import SUFFIX, Found, drop_journal, read_journal, write_journal
from app.session.state import State

if TYPE_CHECKING:
    from app.workbench.window import Window

BEHIND_MS = 3000  #: So much work may be missing after a crash, and the time that writing takes.


def journal_folder() -> Path:
    """Where journals are kept."""
    return Path(QStandardPaths.writableLocation(QStandardPaths.StandardLocation.AppLocalDataLocation)) / "journals"


class _Writing(QRunnable):
    def __init__(self, recovery: Recovery, path: Path, state: State, file: Path | None) -> None:
        super().__init__()
        self._recovery, self._job = recovery, (path, state, file)

    def run(self) -> None:
        try:
            write_journal(*self._job)
        except WriteError as fault:
            self._recovery.failed.emit(str(fault))


class Recovery(QObject):
    """The journal of one window. It exists as long as there are changes that no file holds.

    Signals
    -------
    failed : str
        The journal could not be written.
    """

    failed = Signal(str)

    def __init__(self, window: Window, folder: Path) -> None:
        super().__init__(window)
        self._window = window
        self._folder = folder
        self._path = folder / f"{uuid.uuid4().hex}{SUFFIX}"
        self._lock: QLockFile | None = None
        self._told = False
        self._pool = QThreadPool(self)
        self._pool.setMaxThreadCount(1)
        self._due = QTimer(self, singleShot=True, interval=BEHIND_MS)
        self._due.timeout.connect(self.write)
        self.failed.connect(self._tell)
        window.session.listen(self._changed)

    def _changed(self) -> None:
        if not self._due.isActive():
            self._due.start()

    def write(self) -> None:
        """Bring the journal up to date: with the session as it is, or away where all is saved."""
        files = self._window.files
        if not files.unsaved:
            self._pool.waitForDone()
            drop_journal(self._path)
            return
        if self._lock is None and not self._begin():
            return
        self._pool.start(_Writing(self, self._path, self._window.session.state, files.path))

    def _begin(self) -> bool:
        try:
            self._folder.mkdir(parents=True, exist_ok=True)
        except OSError as fault:
            self._tell(f"the folder {self._folder} cannot be made ({fault.strerror})")
            return False
        self._lock = _locked(self._path)
        return self._lock is not None

    def _tell(self, sentence: str) -> None:
        """Say once that there is no journal: work goes on without."""
        if not self._told:
            self._told = True
            self._window.notices.say(f"Unsaved work is not kept for the case of a crash: {sentence}", lasting=True)

    def end(self) -> None:
        """The window closes in good order: nothing is left behind."""
        self._due.stop()
        self._pool.waitForDone()
        drop_journal(self._path)
        if self._lock is not None:
            self._lock.unlock()
            self._lock = None

    # ------------------------------------------------------------ offering

    def offer(self) -> None:
        """Offer what earlier runs had to leave behind, the newest first."""
        for found, lock in self._left_behind():
            answer = self._ask(found)
            if answer == QMessageBox.StandardButton.Open:
                self._window.files.take_back(found)
                self.write()
                self._pool.waitForDone()
            if answer != QMessageBox.StandardButton.Cancel:
                drop_journal(found.path)
            lock.unlock()
            if answer != QMessageBox.StandardButton.Discard:
                return  # what lies there still is offered the next time

    def _left_behind(self) -> Iterator[tuple[Found, QLockFile]]:
        try:
            paths = sorted(self._folder.glob(f"*{SUFFIX}"), key=lambda path: path.stat().st_mtime, reverse=True)
        except OSError:
            return
        for path in paths:
            lock = None if path == self._path else _locked(path)
            if lock is None:
                continue  # of a window that is open
            found = read_journal(path)
            if found is None:
                lock.unlock()
                continue
            yield found, lock

    def _ask(self, found: Found) -> QMessageBox.StandardButton:
        count = len(found.state.cells)
        names = ", ".join(quote(cell.name) for cell in found.state.cells[:3]) + (" …" if count > 3 else "")
        what = "a session that was never saved" if found.file is None else quote(found.file.name)
        buttons = QMessageBox.StandardButton
        box = QMessageBox(
            QMessageBox.Icon.Question,
            "Unsaved work",
            f"The program ended without saving {what}.\n{count} cell{'' if count == 1 else 's'} ({names}) as of "
            f"{found.when:%d %B %Y, %H:%M:%S} can be taken back.",
            buttons.Open | buttons.Discard | buttons.Cancel,
            self._window,
        )
        box.button(buttons.Open).setText("&Take it back")
        box.button(buttons.Discard).setText("&Delete it")
        box.button(buttons.Cancel).setText("Ask me &later")
        box.exec()
        return box.standardButton(box.clickedButton())


def _locked(path: Path) -> QLockFile | None:
    """The lock of a journal, held; None where another program holds it."""
    lock = QLockFile(f"{path}.lock")
    lock.setStaleLockTime(0)  # only its process can give it up, or its death
    return lock if lock.tryLock(0) else None
