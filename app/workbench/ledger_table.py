"""The ledger as a table: the same amounts as the waterfall, to read and to copy."""

from __future__ import annotations

from functools import lru_cache

from PySide6.QtCore import QModelIndex, Qt, Signal
from PySide6.QtGui import QResizeEvent, QStandardItem, QStandardItemModel
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QTableView, QWidget

from app.ledger_rows import COLUMNS, LedgerRow
from app.workbench.theme import Theme

_TITLES = {"line": "Line", "amount": "% of light", "change": "Change", "basis": "Basis"}
_TIP = len(COLUMNS)  # where the tooltip stands among the texts of a row
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter


class LedgerModel(QStandardItemModel):
    """Rows of a ledger as ready texts: a view that asks Python for ten roles a cell takes three times as long to paint.

    Texts are set only where they differ, so that a repaint is all that a change costs.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(0, len(COLUMNS), parent)
        self.setHorizontalHeaderLabels([_TITLES[name] for name in COLUMNS])
        self.rows: tuple[LedgerRow, ...] = ()
        self._texts: list[tuple[str, ...]] = []
        self._narrow = False

    def show_rows(self, rows: tuple[LedgerRow, ...]) -> None:
        """Show these rows."""
        previous, self.rows = self.rows, rows
        shown, self._texts = self._texts, [_row_texts(row, self._narrow) for row in rows]
        if [r.key for r in rows] != [r.key for r in previous]:
            self.setRowCount(0)
            for row, texts in zip(rows, self._texts, strict=True):
                self.appendRow([_item(row, column, texts) for column in range(len(COLUMNS))])
            return
        for at, (before, now) in enumerate(zip(shown, self._texts, strict=True)):
            if before != now:
                self._change(at, before, now)

    def _change(self, at: int, before: tuple[str, ...], now: tuple[str, ...]) -> None:
        for column in range(len(COLUMNS)):
            if before[column] != now[column]:
                self.item(at, column).setText(now[column])
            if before[_TIP] != now[_TIP]:
                self.item(at, column).setToolTip(now[_TIP])

    def set_narrow(self, narrow: bool) -> None:
        """Use the short names of the lines, or the full ones."""
        if narrow != self._narrow:
            self._narrow = narrow
            self.show_rows(self.rows)


@lru_cache(maxsize=128)
def _row_texts(row: LedgerRow, narrow: bool) -> tuple[str, ...]:
    """Texts of the columns, and the tooltip."""
    line = row.short[:1].upper() + row.short[1:] if narrow else row.line
    return line, row.amount, row.change, row.basis.partition(":")[0], f"{row.line}\n{row.basis}"


def _item(row: LedgerRow, column: int, texts: tuple[str, ...]) -> QStandardItem:
    item = QStandardItem(texts[column])
    item.setToolTip(texts[_TIP])
    item.setEditable(False)
    if COLUMNS[column] in ("amount", "change"):
        item.setTextAlignment(_RIGHT)
    if row.total:
        font = item.font()
        font.setBold(True)
        item.setFont(font)
    return item


class LedgerTable(QTableView):
    """Shows the ledger and lets the user pick a line.

    Signals
    -------
    line_picked : str
        Key of the line.
    """

    line_picked = Signal(str)

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._model = LedgerModel(self)
        self._names: tuple[str, ...] = ()
        self._widest = 0
        self.setModel(self._model)
        self.setAccessibleName("Ledger: every line with its amount and basis")
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setTabKeyNavigation(False)
        self.verticalHeader().hide()
        self.verticalHeader().setDefaultSectionSize(self.fontMetrics().height() + 5)
        header = self.horizontalHeader()
        header.setHighlightSections(False)
        header.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        header.setSectionResizeMode(0, QHeaderView.ResizeMode.Stretch)
        digit = self.fontMetrics().horizontalAdvance("0")
        for column, digits in ((1, 9), (2, 14), (3, 11)):
            self.setColumnWidth(column, digits * digit)
        self._roomy = sum(self.columnWidth(column) for column in (1, 2, 3)) + 9 * digit
        self.clicked.connect(lambda index: self.line_picked.emit(self._model.rows[index.row()].key))
        self.selectionModel().currentRowChanged.connect(self._moved)
        theme.changed.connect(self.viewport().update)

    def _moved(self, current: QModelIndex, previous: QModelIndex) -> None:
        if current.isValid() and self.hasFocus():
            self.line_picked.emit(self._model.rows[current.row()].key)

    def show_rows(self, rows: tuple[LedgerRow, ...], line: str) -> None:
        """Show these rows with one line picked."""
        self._model.show_rows(rows)
        self._fit_names()
        at = next((k for k, row in enumerate(rows) if row.key == line), -1)
        if at != self.currentIndex().row():
            self.setCurrentIndex(self._model.index(at, 0) if at >= 0 else QModelIndex())

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Choose full or short names by the room there is."""
        super().resizeEvent(event)
        # Where room is scarce the basis goes first; the tooltip and the explanation have it, too.
        self.setColumnHidden(COLUMNS.index("basis"), self.viewport().width() < self._roomy)
        self._fit_names()

    def _fit_names(self) -> None:
        names = tuple(row.line for row in self._model.rows if not row.total)
        if names != self._names:
            self._names = names
            self._widest = max((self.fontMetrics().horizontalAdvance(name) for name in names), default=0)
        self._model.set_narrow(self._widest + 8 > self.columnWidth(0))
