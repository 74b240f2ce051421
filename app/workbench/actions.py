"""What the menus and the tool bar do."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject
from PySide6.QtGui import QAction, QGuiApplication, QKeySequence
from PySide6.QtWidgets import QComboBox, QFileDialog, QLabel, QMenu, QToolBar

from app.cells import cell_table
from app.figures.charts import waterfall_of
from app.files.file_names import safe_stem
from app.files.write_error import WriteError
from app.files.writer import write_text
from app.ledger_rows import ledger_csv, ledger_tsv
from app.session.commands import AddCells, RemoveCell, SetChoices, SetFigures
from app.session.outcome import Outcome
from app.session.state import CellEntry, Choices, Value
from app.workbench.number_field import ignore_wheel

if TYPE_CHECKING:
    from app.session.curves import Source
    from app.workbench.export_panel import ExportPanel
    from app.workbench.faults import FaultPanel
    from app.workbench.help_panel import HelpPanel
    from app.workbench.stacks_panel import StacksPanel
    from app.workbench.window import Window


class Actions(QObject):
    """Makes the menus and the tool bar of a window and carries out what they offer."""

    def __init__(self, window: Window) -> None:
        super().__init__(window)
        self._window = window
        self._session = window.session
        self._export: ExportPanel | None = None
        self._help: HelpPanel | None = None
        self._stacks: StacksPanel | None = None
        self._messages: FaultPanel | None = None
        self._needs_picture: list[QAction] = []
        self._needs_cell: list[QAction] = []
        self._fill_menus()
        self._fill_bar()

    # ------------------------------------------------------------ making

    def _action(
        self,
        text: str,
        slot: Callable[[], object],
        keys: str | QKeySequence.StandardKey | None = None,
        needs: list[QAction] | None = None,
    ) -> QAction:
        action = QAction(text, self)
        action.triggered.connect(lambda: slot())
        if keys is not None:
            action.setShortcut(QKeySequence(keys))
        if needs is not None:
            needs.append(action)
        return action

    def _menu(self, title: str, actions: tuple[QAction | None, ...]) -> QMenu:
        menu = self._window.menuBar().addMenu(title)
        for action in actions:
            if action is None:
                menu.addSeparator()
            else:
                menu.addAction(action)
        return menu

    def _fill_menus(self) -> None:
        standard = QKeySequence.StandardKey
        session, picture, cell = self._session, self._needs_picture, self._needs_cell
        self.new = self._action("&New cell", self._new, standard.New)
        self.duplicate = self._action("&Duplicate cell", self._duplicate, "Ctrl+D", cell)
        self.remove = self._action("&Remove cell", self._remove, "Ctrl+Backspace", cell)
        self.undo = self._action("Undo", session.undo, standard.Undo)
        self.redo = self._action("Redo", session.redo)
        self.redo.setShortcuts([QKeySequence("Ctrl+Y"), QKeySequence("Ctrl+Shift+Z")])  # both habits, on every desktop
        self.copy_chart = self._action("&Copy waterfall as picture", self._copy_chart, "Ctrl+Shift+C", picture)
        self.copy_table = self._action("Copy ledger as &table", self._copy_table, "Ctrl+Shift+T", picture)
        self.export = self._action("&Export a picture…", self.show_export, "Ctrl+E", picture)
        self.paste_ = self._action("&Paste cells or measured curves", self._window.intake.paste, standard.Paste)
        open_ = self._action("&Open session, cells or curves…", self._ask_open, standard.Open)
        inflection = self._action("Gap from the EQE's &inflection", lambda: self._take_gap("inflection"), None, cell)
        mean = self._action("Gap from the EQE's edge &mean", lambda: self._take_gap("edge mean"), None, cell)
        other = self._action("Figures from the next s&weep", self._take_next_sweep, None, cell)
        self.stacks = self._action("Partial &stacks…", self.show_stacks, None, cell)
        files = self._window.files
        self.save = self._action("&Save session", files.save, standard.Save)
        save_as = self._action("Save session &as…", files.save_as, "Ctrl+Shift+S")
        save_shelf = self._action("Save the shelf as a &table…", self._ask_save_shelf, None, cell)
        save_ledger = self._action("Save the &ledger as CSV…", self._ask_save_ledger, None, picture)
        quit_ = self._action("&Quit", self._window.close, standard.Quit)
        following = self._action("Ne&xt cell", lambda: self._walk(1), "Ctrl+PgDown", cell)
        previous = self._action("&Previous cell", lambda: self._walk(-1), "Ctrl+PgUp", cell)
        help_ = self._action("&Cautions, conventions and keys", self.show_help, standard.HelpContents)
        menu = self._menu("&File", (open_, self.save, save_as, None, self.export, save_ledger, save_shelf, None, quit_))
        menu.insertMenu(self.save, files.recent)
        self._menu("&Edit", (self.undo, self.redo, None, self.copy_chart, self.copy_table, self.paste_))
        known = (inflection, mean, other, self.stacks)
        self._menu("&Cell", (self.new, self.duplicate, self.remove, None, *known, None, previous, following))
        messages = self._action("&Messages of this run…", self.show_messages)
        self._menu("&Help", (help_, messages))

    def _fill_bar(self) -> None:
        bar = QToolBar("Tools")
        bar.setObjectName("tools")
        bar.setMovable(False)
        for action in (self.new, self.duplicate, None, self.undo, self.redo, None, self.copy_chart, self.export):
            if action is None:
                bar.addSeparator()
            else:
                bar.addAction(action)
        self.new.setIconText("New cell")
        self.duplicate.setIconText("Duplicate")
        self.copy_chart.setIconText("Copy picture")
        self.export.setIconText("Export…")
        bar.addSeparator()
        self.attribution = QComboBox()
        self.attribution.addItem("log-mean", "log-mean")
        self.attribution.addItem("ladder", "ladder")
        self.attribution.setToolTip(
            "How the missing power is shared among current, voltage and fill factor.\nlog-mean: free of any order. "
            "ladder: current first, then voltage, then fill factor."
        )
        self.faces = QComboBox()
        self.faces.addItem("front face only", 1)
        self.faces.addItem("both faces", 2)
        self.faces.setToolTip("Where the limit emits: one face with an ideal rear mirror; both faces cost 18 mV.")
        for text, box in (("  Shares by ", self.attribution), ("  Limit emits from ", self.faces)):
            label = QLabel(text)
            label.setBuddy(box)
            box.setAccessibleName(text.strip())
            box.activated.connect(self._choose)
            ignore_wheel(box)
            bar.addWidget(label)
            bar.addWidget(box)
        self._window.addToolBar(bar)

    # ------------------------------------------------------------ showing

    def show_state(self, outcome: Outcome) -> None:
        """Name and enable the actions as the session stands."""
        session = self._session
        for action, word, name in ((self.undo, "Undo", session.undo_name), (self.redo, "Redo", session.redo_name)):
            action.setText(f"{word} {name}".strip())
            action.setIconText(word)
            action.setEnabled(bool(name))
        usable = outcome.picture is not None and not outcome.stale
        for action in self._needs_picture:
            action.setEnabled(usable)
        for action in self._needs_cell:
            action.setEnabled(outcome.appraisal is not None)
        choices = session.state.choices
        for box, value in ((self.attribution, choices.attribution), (self.faces, choices.faces)):
            if box.currentData() != value:
                box.setCurrentIndex(box.findData(value))
        if self._export is not None and self._export.isVisible():
            self._export.refresh()
        if self._stacks is not None and self._stacks.isVisible():
            self._stacks.refresh(outcome)

    def close_panels(self) -> None:
        """Close the windows beside the main one."""
        for panel in (self._export, self._help, self._stacks, self._messages):
            if panel is not None:
                panel.close()

    # ------------------------------------------------------------ doing

    def _say(self, sentence: str, *, lasting: bool = False) -> None:
        self._window.notices.say(sentence, lasting=lasting)

    def _choose(self) -> None:
        choices = Choices(attribution=self.attribution.currentData(), faces=self.faces.currentData())
        self._session.do(SetChoices(choices))

    def _new(self) -> None:
        number = self._session.state.next_ident
        self._session.do(AddCells((CellEntry(0, f"Cell {number}"),)))
        self._window.inputs.fields["gap"].entry.setFocus()

    def _duplicate(self) -> None:
        cell = self._session.state.cell
        if cell is not None:
            self._session.do(AddCells((replace(cell, name=f"{cell.name} (copy)"),), "duplicate of a cell"))

    def _remove(self) -> None:
        cell = self._session.state.cell
        if cell is not None:
            self._session.do(RemoveCell(cell.ident))

    def _walk(self, step: int) -> None:
        state = self._session.state
        if state.picked is not None:
            at = state.position(state.picked) + step
            if 0 <= at < len(state.cells):
                self._session.pick(state.cells[at].ident)

    def _ask_open(self) -> None:
        names, _ = QFileDialog.getOpenFileNames(
            self._window,
            "Open a session, cells or measured curves",
            "",
            "Sessions and tables (*.gapledger *.csv *.tsv *.txt *.dat);;All files (*)",
        )
        for name in names:
            self._window.intake.open_file(Path(name))

    def _take_next_sweep(self) -> None:
        """Read the figures off another of the cell's sweeps under light."""
        from app.session.curve_import import next_sweep

        cell = self._session.state.cell
        found = None if cell is None else next_sweep(cell)
        if found is None:
            self._say("This cell has no second sweep under light.")
            return
        command, sentences = found
        self._session.do(command)
        self._say(" ".join(sentences), lasting=True)

    def _take_gap(self, source: Source) -> None:
        """Set the gap by one of the EQE's definitions."""
        from app.session.curves import gap_figures

        cell = self._session.state.cell
        if cell is None:
            return
        found = {} if cell.curves.eqe is None else gap_figures(cell.curves.eqe)
        if source in found:
            values: dict[str, Value] = {"gap": found[source]}
            self._session.do(SetFigures(cell.ident, values, {"gap": source}, label=f"gap from the {source}"))
        elif cell.curves.eqe is None:
            self._say("This cell has no EQE: open its file first (Ctrl+O).")
        else:
            self._say("No gap can be read off this EQE.")

    def _ask_save(self, title: str, name: str, text: Callable[[], str]) -> None:
        chosen, _ = QFileDialog.getSaveFileName(self._window, title, name, "Comma-separated table (*.csv)")
        if chosen:
            self.save_text(Path(chosen), text())

    def save_text(self, path: Path, text: str) -> None:
        """Write a table and tell how it went."""
        try:
            write_text(path, text)
        except WriteError as fault:
            self._say(str(fault), lasting=True)
        else:
            self._say(f"Saved as {path}.")

    def _ask_save_shelf(self) -> None:
        self._ask_save("Save the shelf as a table", "cells.csv", lambda: cell_table(self._session.state.cells))

    def _ask_save_ledger(self) -> None:
        picture = self._window.outcomes.current().picture
        if picture is not None:
            name = f"{safe_stem(picture.entry.name)} ledger.csv"
            self._ask_save("Save the ledger", name, lambda: ledger_csv(picture))

    def _copy_table(self) -> None:
        picture = self._window.outcomes.current().picture
        if picture is not None:
            QGuiApplication.clipboard().setText(ledger_tsv(picture))
            self._say("The ledger is on the clipboard as a table.")

    def _copy_chart(self) -> None:
        from app.figures.export import image
        from app.figures.presets import PRESETS
        from app.workbench.export_panel import copy_image

        picture = self._window.outcomes.current().picture
        if picture is not None:
            copy_image(image(waterfall_of(picture), PRESETS["slide"]))
            self._say("The waterfall is on the clipboard as a picture for a slide.")

    def show_export(self) -> None:
        """Bring up the panel for pictures (made on first use: the start need not wait for it)."""
        from app.workbench.export_panel import ExportPanel

        if self._export is None:
            self._export = ExportPanel(self._window.outcomes, self._window)
            self._export.told.connect(self._say)
        self._export.show()
        self._export.raise_()

    def show_stacks(self) -> None:
        """Bring up the luminescence of the cell's partial stacks."""
        from app.workbench.stacks_panel import StacksPanel

        if self._stacks is None:
            self._stacks = StacksPanel(self._session, self._window.theme, self._window)
        self._stacks.refresh(self._window.outcomes.current())
        self._stacks.show()
        self._stacks.raise_()

    def show_messages(self) -> None:
        """Bring up what went wrong inside the program."""
        from app.workbench.faults import FaultPanel

        if self._messages is None:
            self._messages = FaultPanel(self._window.faults, self._window)
        self._messages.show()
        self._messages.raise_()

    def show_help(self) -> None:
        """Bring up cautions, conventions and keys."""
        from app.workbench.help_panel import HelpPanel

        if self._help is None:
            self._help = HelpPanel(self._window)
        self._help.show()
        self._help.raise_()
