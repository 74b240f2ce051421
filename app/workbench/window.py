"""The main window: the shelf and inputs, the waterfall with the plots behind it, the ledger and how it came about."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QByteArray, QEvent, Qt, QTimer
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import QMainWindow, QSplitter, QTabWidget, QVBoxLayout, QWidget

from app.figures.all_plots import BESIDE, JV
from app.figures.charts import waterfall_of
from app.ledger_rows import ledger_rows
from app.session.commands import RemoveCell
from app.session.outcome import Outcome, Outcomes, Picture
from app.session.session import Session
from app.wording import explain
from app.workbench.actions import Actions
from app.workbench.explain_panel import ExplainPanel
from app.workbench.faults import Fault, FaultLog
from app.workbench.inputs_panel import InputsPanel
from app.workbench.intake import Intake
from app.workbench.ledger_table import LedgerTable
from app.workbench.notice_bar import NoticeBar
from app.workbench.plot_view import PlotView
from app.workbench.recovery import Recovery
from app.workbench.session_files import SessionFiles, settings
from app.workbench.shelf import Shelf
from app.workbench.theme import Heading, Theme
from app.workbench.waterfall_view import WaterfallView

_EMPTY_SHELF = "The shelf is empty. Press Ctrl+N for a new cell, or open a table of cells with Ctrl+O."
_EMPTY_CELL = (
    "Type the gap, Voc, Jsc and FF of the cell on the left.\nThe way of every watt from the sunlight to the cell "
    "appears here as soon as the four are there."
)


class Window(QMainWindow):
    """Binds the session to the views. It holds nothing itself: every change goes to the session, and comes back."""

    def __init__(self, session: Session) -> None:
        super().__init__()
        self.session = session
        self.complete = False  # whether it has shown itself with all its parts
        self.outcomes = Outcomes(session)
        self.theme = Theme(self)
        self.shelf = Shelf(self.outcomes)
        self.inputs = InputsPanel(session, self.theme)
        self.waterfall = WaterfallView(self.theme)
        self.jv_plot = PlotView(JV.title, self.theme)
        self.beside = {plot.key: PlotView(plot.title, self.theme) for plot in BESIDE}
        self.gap_plot = self.beside["gap"]
        self.table = LedgerTable(self.theme)
        self.explanation = ExplainPanel(self.theme)
        self.notices = NoticeBar()
        self.faults = FaultLog(self)
        self.faults.added.connect(self._tell_fault)
        self._heads = (Heading("Ledger"), Heading("How the picked line came about"))
        self.files = SessionFiles(self)
        self.recovery: Recovery | None = None
        self.intake = Intake(self)
        self.actions_ = Actions(self)
        self.setCentralWidget(self._lay_out())
        self.setAcceptDrops(True)
        self.resize(1280, 800)
        self._due = QTimer(self, singleShot=True, interval=0)
        self._due.timeout.connect(self.refresh)
        self._texts_due = QTimer(self, singleShot=True, interval=50)
        self._texts_due.timeout.connect(self._show_texts)
        session.listen(self._due.start)
        self.shelf.cell_picked.connect(session.pick)
        self.shelf.removal_asked.connect(self._remove)
        self.waterfall.picked.connect(session.pick_line)
        self.waterfall.first_painted.connect(self._complete, Qt.ConnectionType.QueuedConnection)
        self.table.line_picked.connect(session.pick_line)
        self.inputs.stacks.clicked.connect(self.actions_.show_stacks)
        self.refresh()

    def _lay_out(self) -> QWidget:
        left = self._column((Heading("Shelf"), self.shelf), (None, self.inputs))
        left.setStretchFactor(0, 1)
        left.setStretchFactor(1, 3)
        left.setSizes([170, 580])
        plots = QSplitter(Qt.Orientation.Horizontal)
        plots.addWidget(self.jv_plot)
        self._tabs = QTabWidget()
        self._tabs.setDocumentMode(True)
        self._tabs.setUsesScrollButtons(True)
        self._tabs.tabBar().setExpanding(False)
        for plot in BESIDE:
            self._tabs.addTab(self.beside[plot.key], plot.tab)
            self._tabs.setTabToolTip(self._tabs.count() - 1, plot.title)
        self._tabs.currentChanged.connect(lambda _: self._due.start())
        plots.addWidget(self._tabs)
        plots.setStretchFactor(0, 1)
        plots.setStretchFactor(1, 1)
        plots.setSizes([289, 289])
        middle = QSplitter(Qt.Orientation.Vertical)
        middle.addWidget(self.waterfall)
        middle.addWidget(plots)
        middle.setStretchFactor(0, 3)
        middle.setStretchFactor(1, 2)
        middle.setSizes([440, 270])
        right = self._column((self._heads[0], self.table), (self._heads[1], self.explanation))
        right.setSizes([380, 330])
        whole = QSplitter(Qt.Orientation.Horizontal)
        for place, (widget, stretch) in enumerate(((left, 0), (middle, 3), (right, 1))):
            whole.addWidget(widget)
            whole.setStretchFactor(place, stretch)
        whole.setSizes([306, 578, 396])
        page = QWidget()
        column = QVBoxLayout(page)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(whole, 1)
        column.addWidget(self.notices)
        return page

    @staticmethod
    def _column(*parts: tuple[Heading | None, QWidget]) -> QSplitter:
        column = QSplitter(Qt.Orientation.Vertical)
        column.setChildrenCollapsible(False)
        for head, widget in parts:
            if head is not None:
                box = QWidget()
                inner = QVBoxLayout(box)
                inner.setContentsMargins(0, 0, 0, 0)
                inner.setSpacing(2)
                head.setContentsMargins(10, 5, 0, 0)
                inner.addWidget(head)
                inner.addWidget(widget, 1)
                widget = box
            column.addWidget(widget)
        return column

    def remember_layout(self) -> None:
        """Keep size, place and divisions of the window for the next run."""
        kept = settings()
        kept.setValue("geometry", self.saveGeometry())
        for at, splitter in enumerate(self.findChildren(QSplitter)):
            kept.setValue(f"splitter{at}", splitter.saveState())

    def restore_layout(self) -> None:
        """Take the layout of the last run, as far as there is one; Qt keeps the window on the screen."""
        kept = settings()
        geometry = kept.value("geometry")
        if isinstance(geometry, QByteArray):
            self.restoreGeometry(geometry)
        for at, splitter in enumerate(self.findChildren(QSplitter)):
            state = kept.value(f"splitter{at}")
            if isinstance(state, QByteArray):
                splitter.restoreState(state)

    def keep_journal(self, folder: Path) -> None:
        """Keep a journal of unsaved work in a folder, and offer what lies there when the window has shown itself."""
        self.recovery = Recovery(self, folder)

    def refresh(self) -> None:
        """Show the session as it is now.

        While a slider is held, the charts and the inputs follow in the same frame and the texts behind them twenty
        times a second, which is faster than digits can be read.
        """
        outcome = self.outcomes.current()
        self.inputs.show_outcome(outcome)
        self.actions_.show_state(outcome)
        self._show_charts(outcome)
        if not self.inputs.sliding:
            self._show_texts()
        elif not self._texts_due.isActive():
            self._texts_due.start()

    def _complete(self) -> None:
        """The window is on the screen: bring what was not worth waiting for."""
        self.complete = True
        for plot in (self.jv_plot, self.gap_plot):
            plot.canvas.update()
        self.intake.load_curves()
        if self.recovery is not None:
            self.recovery.offer()

    def _show_charts(self, outcome: Outcome) -> None:
        picture, stale = outcome.picture, outcome.stale
        if picture is None:
            self.waterfall.show_spec(None, "", _EMPTY_SHELF if outcome.appraisal is None else _EMPTY_CELL)
            self.jv_plot.show_spec(None)
            self._show_beside(None, stale)
            return
        self.waterfall.show_spec(waterfall_of(picture, stale), self.session.state.line)
        self.jv_plot.show_spec(JV.describe(picture, stale, captioned=False))
        self._show_beside(picture, stale)

    def _show_beside(self, picture: Picture | None, stale: bool) -> None:
        """Show the plot whose tab is up. A plot has a tab where the cell has its data."""
        for at, plot in enumerate(BESIDE):
            offered = picture is not None and plot.offered(picture)
            if self._tabs.isTabVisible(at) != offered and at > 0:  # Qt lays the tabs out anew at each call
                self._tabs.setTabVisible(at, offered)
        plot = BESIDE[self._tabs.currentIndex()]
        view = self.beside[plot.key]
        spec = None if picture is None else plot.describe(picture, stale, captioned=False)
        if spec is not None and plot is not BESIDE[0]:
            _ = view.canvas  # made on first need
        view.show_spec(spec, "" if picture is None else "The data do not suffice for this plot.")

    def _show_texts(self) -> None:
        state, outcome = self.session.state, self.outcomes.current()
        picture, line = outcome.picture, state.line
        self.shelf.show_state(state)
        self.files.show_title()
        for head in self._heads:
            head.mark_stale(outcome.stale and picture is not None)
        self.table.show_rows(() if picture is None else ledger_rows(picture), line)
        explanation = explain(picture.ledger, line, picture.entry.spectrum) if picture is not None and line else None
        self.explanation.show_explanation(explanation)

    def _tell_fault(self, fault: Fault) -> None:
        self.notices.say(
            f"Something went wrong inside the program ({fault.sentence}). Your cells are still here; what you did last "
            "may not have worked. Help → Messages has the detail.",
            lasting=True,
        )

    def _remove(self) -> None:
        cell = self.session.state.cell
        if cell is not None:
            self.session.do(RemoveCell(cell.ident))

    def changeEvent(self, event: QEvent) -> None:
        """Follow the desktop between light and dark."""
        super().changeEvent(event)
        if event.type() in (QEvent.Type.PaletteChange, QEvent.Type.ThemeChange):
            self.theme.changed.emit()

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Take files that are dropped on the window."""
        if event.mimeData().hasUrls():
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Open what was dropped: sessions, tables of cells, or curves of the cell on show."""
        for url in event.mimeData().urls():
            if url.isLocalFile():
                self.intake.open_file(Path(url.toLocalFile()))

    def closeEvent(self, event: QCloseEvent) -> None:
        """Close the windows beside this one, too, unless there are changes that the user wants to keep."""
        if not self.files.may_leave():
            event.ignore()
            return
        self.actions_.close_panels()
        self.intake.close()
        if self.files.asks:
            self.remember_layout()
        if self.recovery is not None:
            self.recovery.end()
        super().closeEvent(event)


