"""The ledger as a table: the same amounts as the waterfall, to read and to copy."""

from __future__ import annotations

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QPersistentModelIndex, Qt, Signal
from PySide6.QtGui import QFont, QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QTableView, QWidget

from app.ledger_rows import COLUMNS, LedgerRow
from app.workbench.theme import Theme

# A view asks for some ten roles a cell at each paint: plain numbers make the answer quick.
_TEXT = int(Qt.ItemDataRole.DisplayRole)
_FONT = int(Qt.ItemDataRole.FontRole)
_ALIGNMENT = int(Qt.ItemDataRole.TextAlignmentRole)
_ROLES = frozenset({_TEXT, _FONT, _ALIGNMENT, int(Qt.ItemDataRole.ToolTipRole)})
_RIGHT = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)

Index = QModelIndex | QPersistentModelIndex
_TITLES = {"line": "Line", "amount": "% of light", "change": "Change", "basis": "Basis"}


class LedgerModel(QAbstractTableModel):
    """Rows of a ledger; changed in place while the lines stay the same, so that a repaint is all it costs."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.rows: tuple[LedgerRow, ...] = ()
        self._narrow = False
        self._bold = QFont()
        self._bold.setBold(True)

    def show_rows(self, rows: tuple[LedgerRow, ...]) -> None:
        """Show these rows."""
        if [r.key for r in rows] != [r.key for r in self.rows]:
            self.beginResetModel()
            self.rows = rows
            self.endResetModel()
            return
        previous, self.rows = self.rows, rows
        for row, (before, now) in enumerate(zip(previous, rows, strict=True)):
            if before != now:
                for column, name in enumerate(COLUMNS):
                    if before.text(name) != now.text(name):
                        # Cell by cell: for a range, the view would paint the whole table anew.
                        self.dataChanged.emit(self.index(row, column), self.index(row, column))

    def set_narrow(self, narrow: bool) -> None:
        """Use the short names of the lines, or the full ones."""
        if narrow != self._narrow:
            self._narrow = narrow
            self.dataChanged.emit(self.index(0, 0), self.index(len(self.rows) - 1, 0))

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008 (Qt's own signature)
        """Number of lines and totals."""
        return 0 if parent.isValid() else len(self.rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008
        """Number of columns."""
        return 0 if parent.isValid() else len(COLUMNS)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Text, alignment and weight of a cell."""
        if role not in _ROLES:
            return None
        row, column = self.rows[index.row()], COLUMNS[index.column()]
        if role == _TEXT:
            if column == "basis":
                return row.basis.partition(":")[0]
            return row.short[:1].upper() + row.short[1:] if column == "line" and self._narrow else row.text(column)
        if role == _ALIGNMENT:
            return _RIGHT if column in ("amount", "change") else None
        if role == _FONT:
            return self._bold if row.total else None
        return f"{row.line}\n{row.basis}"

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Name of a column."""
        if orientation == Qt.Orientation.Horizontal and role == Qt.ItemDataRole.DisplayRole:
            return _TITLES[COLUMNS[section]]
        return None


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
