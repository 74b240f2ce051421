"""What was understood of a measurement file, before it is taken: every guess can be changed here."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QCheckBox,
    QComboBox,
    QDialog,
    QDialogButtonBox,
    QHBoxLayout,
    QLabel,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.files.measured import (
    Column,
    EqeCurve,
    JvSweep,
    Kind,
    MeasuredCurve,
    MeasuredText,
    Pairs,
    Reading,
    Trace,
    apply,
    guess,
    units_of,
)
from app.files.measured.units import Dimension
from app.files.table_error import TableError
from app.wording import with_unit
from app.workbench.number_field import ignore_wheel
from app.workbench.theme import Heading, Theme

_ROWS = 8  # of each curve, as understood
_KINDS: dict[Kind, str] = {
    "jv": "J–V sweep",
    "eqe": "EQE or reflectance",
    "intensity": "Light-intensity series",
    "spectrum": "Spectrum of a lamp",
    "unknown": "not known: please choose",
}
_DIMENSIONS: dict[Kind, tuple[tuple[Dimension, ...], tuple[Dimension, ...]]] = {
    "jv": (("voltage",), ("density", "current")),
    "eqe": (("wavelength", "energy"), ("fraction", "responsivity")),
    "intensity": (("density", "current"), ("voltage",)),
    "spectrum": (("wavelength",), ("irradiance",)),
    "unknown": ((), ()),
}
_HEADS = ("Take", "Curve", "First column", "Unit", "Second column", "Unit", "Sign of the second", "Light")
_MARKS = ((".", "point: 1.5"), (",", "comma: 1,5"))
_SIGNS = (("as written", 1), ("turned round", -1))
_LIGHT: dict[bool | None, str] = {None: "not told", True: "under light", False: "dark"}


@dataclass(frozen=True)
class Understood:
    """A curve as numbers under two headings, for a preview."""

    title: str
    heads: tuple[str, str]
    x: np.ndarray
    y: np.ndarray


def understood(curve: MeasuredCurve) -> Understood:
    """A curve in the units in which it will be used."""
    if isinstance(curve, JvSweep):
        told = (curve.direction, {False: "dark", True: "lit", None: ""}[curve.lit])
        how = " · ".join(word for word in told if word and word not in curve.label.casefold())
        unit = "mA cm⁻²" if curve.is_density else "mA"
        title = f"{curve.label} ({how})" if how else curve.label
        return Understood(title, ("V", unit), curve.voltage, curve.current)
    if isinstance(curve, EqeCurve):
        name = "EQE" if curve.quantity == "eqe" else "reflectance"
        return Understood(curve.label, ("nm", f"{name}, %"), curve.wavelength, 100.0 * curve.eqe)
    if isinstance(curve, Pairs):
        return Understood(curve.label, ("mA cm⁻²" if curve.is_density else "mA", "V"), curve.jsc, curve.voc)
    return Understood(curve.label, ("nm", "W m⁻² nm⁻¹"), curve.wavelength, curve.irradiance)


class ImportPanel(QDialog):
    """Shows a file as it was understood and lets the user change how it is read.

    Signals
    -------
    taken
        The user takes the file as it is shown.
    """

    taken = Signal()

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setModal(False)
        self.resize(860, 520)
        self.text: MeasuredText | None = None
        self.reading: Reading | None = None
        self.curves: tuple[MeasuredCurve, ...] = ()
        self.kind = QComboBox()
        for kind, title in _KINDS.items():
            self.kind.addItem(title, kind)
        self.kind.setAccessibleName("What the file holds")
        self.kind.activated.connect(self._choose_kind)
        ignore_wheel(self.kind)
        self.decimal = QComboBox()
        for mark, title in _MARKS:
            self.decimal.addItem(title, mark)
        self.decimal.setAccessibleName("Decimal mark")
        self.decimal.activated.connect(self._choose_decimal)
        ignore_wheel(self.decimal)
        self.sweep = QComboBox()
        self.sweep.setAccessibleName("Sweep that the figures are read off")
        ignore_wheel(self.sweep)
        self._from = QLabel("   Figures from")
        self._from.setBuddy(self.sweep)
        self.traces = self._table("How each curve is read")
        self.preview = self._table("First numbers as understood")
        self.questions, self.fault = QLabel(), QLabel()
        self.questions.setProperty("trouble", "doubtful")
        self.fault.setProperty("trouble", "refused")
        self.setStyleSheet(theme.field_sheet)
        self.buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Cancel)
        self.take_button = self.buttons.addButton("&Take these curves", QDialogButtonBox.ButtonRole.AcceptRole)
        self.buttons.accepted.connect(self.take)
        self.buttons.rejected.connect(self.reject)
        self._lay_out()

    @staticmethod
    def _table(name: str) -> QTableWidget:
        table = QTableWidget()
        table.setAccessibleName(name)
        table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        table.setSelectionMode(QAbstractItemView.SelectionMode.NoSelection)
        table.verticalHeader().hide()
        return table

    def _lay_out(self) -> None:
        what = QHBoxLayout()
        label = QLabel("This file holds a")
        label.setBuddy(self.kind)
        what.addWidget(label)
        what.addWidget(self.kind)
        mark = QLabel("   Decimal mark")
        mark.setBuddy(self.decimal)
        what.addWidget(mark)
        what.addWidget(self.decimal)
        what.addWidget(self._from)
        what.addWidget(self.sweep)
        what.addStretch(1)
        column = QVBoxLayout(self)
        column.addLayout(what)
        for widget, stretch in ((Heading("How each curve is read"), 0), (self.traces, 2),
                                (Heading("First numbers as understood"), 0), (self.preview, 3)):
            column.addWidget(widget, stretch)
        for message in (self.questions, self.fault):
            message.setWordWrap(True)
            column.addWidget(message)
        column.addWidget(self.buttons)

    def show_file(self, text: MeasuredText, reading: Reading) -> None:
        """Show a file with the reading it is understood by."""
        self.text, self.reading = text, reading
        self.sweep.clear()
        self.setWindowTitle(f"{text.source} – what was understood")
        self._fill()
        self.show()
        self.raise_()

    def chosen_first(self) -> tuple[MeasuredCurve, ...]:
        """The curves as understood, the sweep that the figures are to be read off before the others."""
        at = self.sweep.currentData()
        return self.curves if at is None else (self.curves[at], *self.curves[:at], *self.curves[at + 1 :])

    def take(self) -> None:
        """Take the file as it is shown."""
        if self.take_button.isEnabled():
            self.hide()
            self.taken.emit()

    def _choose_kind(self) -> None:
        if self.text is not None:
            self.reading = guess(self.text, self.kind.currentData())
            self._fill()

    def _choose_decimal(self) -> None:
        if self.reading is not None:
            self.reading = replace(self.reading, decimal=self.decimal.currentData(), questions=())
            self._show_understood()

    def _change(self, at: int, **fields: object) -> None:
        if self.reading is not None:
            traces = list(self.reading.traces)
            traces[at] = replace(traces[at], **fields)  # type: ignore[arg-type]
            self.reading = replace(self.reading, traces=tuple(traces))
            self._show_understood()

    def _fill(self) -> None:
        if self.text is None or self.reading is None:
            return
        self.kind.setCurrentIndex(self.kind.findData(self.reading.kind))
        self.decimal.setCurrentIndex(self.decimal.findData(self.reading.decimal))
        self.traces.clear()
        self.traces.setColumnCount(len(_HEADS))
        self.traces.setHorizontalHeaderLabels(list(_HEADS))
        self.traces.setRowCount(len(self.reading.traces))
        for at, trace in enumerate(self.reading.traces):
            for place, widget in enumerate(self._editors(at, trace, self.reading.kind)):
                self.traces.setCellWidget(at, place, widget)
        self.traces.resizeColumnsToContents()
        self._show_understood()

    def _editors(self, at: int, trace: Trace, kind: Kind) -> tuple[QWidget, ...]:
        """The widgets of a row: each changes its part of the reading."""
        used = QCheckBox()
        used.setChecked(trace.used)
        used.setAccessibleName(f"Take curve {at + 1}")
        used.toggled.connect(lambda on: self._change(at, used=on))
        columns = [(f"{c.index}: {c.name or 'no name'}", c.index) for c in self._columns(trace.block)]
        first, second = ([("?", ""), *((u.name, u.name) for u in units_of(*d))] for d in _DIMENSIONS[kind])
        light = [(title, lit) for lit, title in _LIGHT.items()]
        boxes = (
            self._box(at, "x", columns, trace.x, "First column"),
            self._box(at, "x_unit", first, trace.x_unit, "Unit of the first column"),
            self._box(at, "y", columns, trace.y, "Second column"),
            self._box(at, "y_unit", second, trace.y_unit, "Unit of the second column"),
            self._box(at, "y_sign", _SIGNS, trace.y_sign, "Sign of the second column"),
            self._box(at, "lit", light, trace.lit, "Light") if kind == "jv" else QLabel(""),
        )
        return used, QLabel(f" {trace.label or f'curve {at + 1}'} "), *boxes

    def _box(
        self, at: int, name: str, choices: Sequence[tuple[str, object]], value: object, title: str
    ) -> QComboBox:
        box = QComboBox()
        for text, data in choices:
            box.addItem(text, data)
        box.setCurrentIndex(next((k for k, (_, data) in enumerate(choices) if data == value), 0))
        box.setAccessibleName(f"{title} of curve {at + 1}")
        box.activated.connect(lambda index: self._change(at, **{name: choices[index][1]}))
        ignore_wheel(box)
        return box

    def _columns(self, block: int) -> tuple[Column, ...]:
        return () if self.text is None else self.text.blocks[block].columns

    def _show_understood(self) -> None:
        """Read the file as the reading says, and show the first numbers, or what stands in the way."""
        if self.text is None or self.reading is None:
            return
        try:
            self.curves = apply(self.text, self.reading)
            fault = "" if self.curves else "Choose what the file holds, and at least one curve."
        except TableError as refusal:
            self.curves, fault = (), str(refusal)
        self.fault.setText(f"✕ {fault}" if fault else "")
        self.fault.setVisible(bool(fault))
        questions = self.reading.questions
        self.questions.setText("\n".join(f"▲ {question}" for question in questions))
        self.questions.setVisible(bool(questions))
        self.take_button.setEnabled(not fault)
        shown = [understood(curve) for curve in self.curves]
        self._offer_sweeps(shown)
        self._show_numbers(shown)

    def _offer_sweeps(self, shown: list[Understood]) -> None:
        """Offer to read the figures off any of several sweeps under light; off the first, if nobody chooses."""
        place, chosen = self.sweep.currentIndex(), self.sweep.currentText()
        self.sweep.clear()
        for at, curve in enumerate(self.curves):
            if isinstance(curve, JvSweep) and curve.lit is not False:
                self.sweep.addItem(shown[at].title or f"curve {at + 1}", at)
        same = place >= 0 and self.sweep.itemText(place) == chosen  # two may have the same name
        self.sweep.setCurrentIndex(place if same else max(self.sweep.findText(chosen), 0))
        for widget in (self._from, self.sweep):
            widget.setVisible(self.sweep.count() > 1)

    def _show_numbers(self, curves: list[Understood]) -> None:
        self.preview.clear()
        self.preview.setColumnCount(2 * len(curves))
        self.preview.setRowCount(min(_ROWS, max((curve.x.size for curve in curves), default=0)))
        heads: list[str] = []
        for at, curve in enumerate(curves):
            heads += [f"{curve.title}\n{curve.heads[0]}", f"{curve.x.size} points\n{curve.heads[1]}"]
            for offset, values in ((0, curve.x), (1, curve.y)):
                for row, value in enumerate(values[:_ROWS].tolist()):
                    item = QTableWidgetItem(with_unit(value, "", 6) if np.isfinite(value) else "–")
                    item.setTextAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
                    self.preview.setItem(row, 2 * at + offset, item)
        self.preview.setHorizontalHeaderLabels(heads)
        self.preview.resizeColumnsToContents()
