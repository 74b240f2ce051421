"""Starting the window."""

from __future__ import annotations

import sys
from collections.abc import Sequence
from importlib.resources import files
from pathlib import Path

from PySide6.QtWidgets import QApplication

from app.figures.fonts import families
from app.session.commands import AddCells
from app.session.session import Session
from app.session.state import CellEntry, State
from app.workbench.recovery import journal_folder
from app.workbench.window import Window


def demo_path() -> Path:
    """The table of the invented demo cells."""
    return Path(str(files("resources") / "demo_cells.csv"))


def first_state(empty: bool) -> State:
    """The state to start with: one empty cell, or an empty shelf that is about to be filled."""
    return State() if empty else AddCells((CellEntry(0, "Cell 1"),)).apply(State())


def application(arguments: Sequence[str]) -> QApplication:
    """The Qt application, made once."""
    existing = QApplication.instance()
    if isinstance(existing, QApplication):
        families()
        return existing
    app = QApplication(["gapledger", *arguments])
    app.setApplicationName("Gapledger")
    app.setStyle("Fusion")
    families()  # fonts that come in later would change the type under texts that are already measured
    return app


def make_window(arguments: Sequence[str]) -> Window:
    """A window on the demo cells (argument "demo"), on tables of cells, or on an empty cell."""
    session = Session(first_state(empty=bool(arguments)))
    window = Window(session)
    for argument in arguments:
        window.intake.open_file(demo_path() if argument == "demo" else Path(argument))
    if "demo" in arguments:
        window.notices.say("Demo: these cells, and the group that made them, are invented.")
    if arguments and window.files.path is None:
        session.start_here()
    window.files.mark_clean()
    window.refresh()
    return window


def open_window(arguments: Sequence[str]) -> int:
    """Open the window and work until it is closed; the exit status."""
    sys.setswitchinterval(0.0005)  # a worker in small numpy calls would else starve the screen for as long as it runs
    app = application(arguments)
    window = make_window(arguments)
    window.faults.install()
    window.files.asks = True
    window.restore_layout()
    window.keep_journal(journal_folder())
    window.show()
    status = app.exec()
    window.faults.remove()
    return status
