"""The shelf: the cells on hand, each with its efficiency and that of its limit."""

from __future__ import annotations

from PySide6.QtCore import QAbstractListModel, QModelIndex, QPersistentModelIndex, QSize, Qt, Signal
from PySide6.QtWidgets import QAbstractItemView, QListView, QWidget

from app.session.outcome import Outcomes
from app.session.state import CellEntry, State
from app.wording import percent

Index = QModelIndex | QPersistentModelIndex


class ShelfModel(QAbstractListModel):
    """The cells of a session as list rows."""

    def __init__(self, outcomes: Outcomes, parent: QWidget) -> None:
        super().__init__(parent)
        self._outcomes = outcomes
        metrics = parent.fontMetrics()
        self._two_lines = QSize(10 * metrics.averageCharWidth(), 2 * metrics.lineSpacing() + 2)
        self._cells: tuple[CellEntry, ...] = ()
        self._texts: dict[int, str] = {}  # as last shown: a repaint only where it would show something else

    @property
    def cells(self) -> tuple[CellEntry, ...]:
        """The cells as shown."""
        return self._cells

    def show_cells(self, cells: tuple[CellEntry, ...]) -> list[int]:
        """Show these cells; tells the rows that read otherwise now, of cells that were there before.

        `dataChanged` would not do: a list view answers it by laying out every row anew.
        """
        previous, self._cells = self._cells, cells
        if [c.ident for c in previous] != [c.ident for c in cells]:
            self._cells = previous
            self.beginResetModel()
            self._cells = cells
            self.endResetModel()
            return []
        return [
            row
            for row, (before, now) in enumerate(zip(previous, cells, strict=True))
            if before is not now and self._texts.get(now.ident) != self._text(now)
        ]

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008 (Qt's own signature)
        """Number of cells."""
        return 0 if parent.isValid() else len(self._cells)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Name and efficiency of a cell."""
        cell = self._cells[index.row()]
        if role == Qt.ItemDataRole.DisplayRole:
            text = self._texts[cell.ident] = self._text(cell)
            return text
        if role == Qt.ItemDataRole.SizeHintRole:
            return self._two_lines
        if role == Qt.ItemDataRole.ToolTipRole:
            return "\n".join(part for part in (cell.name, cell.group, cell.note) if part)
        return None

    def _text(self, cell: CellEntry) -> str:
        return f"{cell.name or 'Unnamed cell'}\n{self._summary(cell)}"

    def _summary(self, cell: CellEntry) -> str:
        outcome = self._outcomes.of(cell)
        if outcome.picture is None:
            return "inputs missing"
        ledger = outcome.picture.ledger
        text = f"{percent(float(ledger.efficiency), 1)} of {percent(float(ledger.limit.efficiency), 1)}"
        return f"{text} – last valid input" if outcome.stale else text


class Shelf(QListView):
    """Lists the cells and lets the user pick one.

    Signals
    -------
    cell_picked : int
        `ident` of the cell.
    removal_asked
        The user pressed the delete key.
    """

    cell_picked = Signal(int)
    removal_asked = Signal()

    def __init__(self, outcomes: Outcomes, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._showing = False
        self._model = ShelfModel(outcomes, self)
        self.setModel(self._model)
        self.setAccessibleName("Shelf of cells")
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setUniformItemSizes(True)
        self.setSpacing(1)
        self.selectionModel().currentChanged.connect(self._moved)

    def _moved(self, current: QModelIndex, previous: QModelIndex) -> None:
        if not self._showing and current.isValid() and current.row() < len(self._model.cells):
            self.cell_picked.emit(self._model.cells[current.row()].ident)

    def show_state(self, state: State) -> None:
        """Show the shelf with its picked cell."""
        self._showing = True  # where rows come and go the list picks another one by itself, which is nobody's wish
        for row in self._model.show_cells(state.cells):
            self.update(self._model.index(row))
        if state.picked is not None:
            row = state.position(state.picked)
            if self.currentIndex().row() != row:
                self.setCurrentIndex(self._model.index(row))
        self._showing = False

    def keyPressEvent(self, event: object) -> None:
        """Delete removes the cell on show."""
        if event.key() in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace):  # type: ignore[attr-defined]
            self.removal_asked.emit()
        else:
            super().keyPressEvent(event)  # type: ignore[arg-type]
