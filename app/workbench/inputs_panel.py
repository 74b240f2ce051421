"""The inputs of the cell on show."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QGridLayout, QLabel, QLineEdit, QScrollArea, QVBoxLayout, QWidget

from app.session.appraisal import light_named
from app.session.commands import Describe, SetValue
from app.session.fields import FIELD_BY_KEY
from app.session.outcome import Outcome
from app.session.session import Session
from app.session.state import Value
from app.workbench.number_field import NumberField, ignore_wheel
from app.workbench.theme import Heading, Theme

_GROUPS: tuple[tuple[str, tuple[str, ...]], ...] = (
    ("Measured", ("gap", "voc", "jsc", "ff")),
    ("Conditions", ("temperature", "irradiance")),
    ("If known", ("ere", "ideality", "rs", "rsh", "pseudo_ff", "area")),
)
_SPECTRA = ("am15g", "am15d", "am0", "blackbody:6000")


class InputsPanel(QScrollArea):
    """Name, spectrum and numbers of a cell, each bound to the session."""

    def __init__(self, session: Session, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._session = session
        self._theme = theme
        self.setWidgetResizable(True)
        self.setFrameShape(QScrollArea.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self._page = QWidget()
        self._page.setObjectName("inputs")
        column = QVBoxLayout(self._page)
        column.setContentsMargins(10, 4, 12, 8)
        column.setSpacing(2)
        self.name = QLineEdit()
        self.note = QLineEdit()
        self.spectrum = QComboBox()
        self.spectrum_message = QLabel()
        column.addLayout(self._heading())
        self.fields: dict[str, NumberField] = {}
        for title, keys in _GROUPS:
            column.addLayout(self._group(title, keys))
        column.addStretch(1)
        self.setWidget(self._page)
        theme.changed.connect(self._recolour)
        self._recolour()

    def _recolour(self) -> None:
        self._page.setStyleSheet(self._theme.field_sheet)

    def _heading(self) -> QGridLayout:
        grid = self._grid("Cell")
        for row, (text, editor, tip) in enumerate(
            (
                ("Name", self.name, "What the lab calls the cell; it heads every picture"),
                ("Note", self.note, "Free text; it goes into the small print of pictures"),
            ),
            start=1,
        ):
            label = QLabel(text)
            label.setBuddy(editor)
            editor.setToolTip(tip)
            editor.setAccessibleName(f"{text} of the cell")
            editor.setMaxLength(200)
            grid.addWidget(label, row, 0)
            grid.addWidget(editor, row, 1, 1, 3)
        self.name.textEdited.connect(lambda text: self._describe(cell_name=text))
        self.note.textEdited.connect(lambda text: self._describe(note=text))
        for editor in (self.name, self.note):
            editor.editingFinished.connect(self._session.settle)
        return grid

    def _grid(self, title: str) -> QGridLayout:
        grid = QGridLayout()
        grid.setHorizontalSpacing(6)
        grid.setVerticalSpacing(3)
        grid.setContentsMargins(0, 4, 0, 4)
        grid.setColumnMinimumWidth(0, 36)
        grid.setColumnMinimumWidth(2, 58)
        grid.setColumnStretch(3, 1)
        grid.addWidget(Heading(title), 0, 0, 1, 4)
        return grid

    def _group(self, title: str, keys: tuple[str, ...]) -> QGridLayout:
        grid = self._grid(title)
        row = 1
        if "irradiance" in keys:
            self._add_spectrum(grid, row)
            row += 2
        for key in keys:
            field = NumberField(FIELD_BY_KEY[key], grid, row, self._page)
            field.asked.connect(lambda value, key=key: self._ask(key, value))
            field.settled.connect(self._session.settle)
            self.fields[key] = field
            row += 2
        return grid

    def _add_spectrum(self, grid: QGridLayout, row: int) -> None:
        label = QLabel("Light")
        label.setBuddy(self.spectrum)
        for name in _SPECTRA:
            self.spectrum.addItem(light_named(name).title, name)
        self.spectrum.setAccessibleName("Spectrum of the light")
        self.spectrum.setToolTip("Spectrum under which the cell was measured, scaled to the irradiance below")
        self.spectrum.setMinimumContentsLength(12)
        self.spectrum.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        self.spectrum.activated.connect(lambda index: self._describe(spectrum=self.spectrum.itemData(index)))
        ignore_wheel(self.spectrum)
        self.spectrum_message.setWordWrap(True)
        self.spectrum_message.setProperty("trouble", "refused")
        self.spectrum_message.hide()
        grid.addWidget(label, row, 0)
        grid.addWidget(self.spectrum, row, 1, 1, 3)
        grid.addWidget(self.spectrum_message, row + 1, 0, 1, 4)

    def _ask(self, key: str, value: Value) -> None:
        cell = self._session.state.cell
        if cell is not None:
            self._session.do(SetValue(cell.ident, key, value))

    def _describe(self, **changes: str) -> None:
        cell = self._session.state.cell
        if cell is not None:
            self._session.do(Describe(cell.ident, **changes))

    def show_outcome(self, outcome: Outcome) -> None:
        """Show the cell's inputs and what is wrong with them."""
        appraisal = outcome.appraisal
        self._page.setEnabled(appraisal is not None)
        if appraisal is None:
            return
        entry = appraisal.entry
        for editor, text in ((self.name, entry.name), (self.note, entry.note)):
            if editor.text() != text:
                editor.setText(text)
                editor.setCursorPosition(0)
        self._show_spectrum(entry.spectrum)
        for key, field in self.fields.items():
            field.show_value(entry.values[key])
            field.show_problem(appraisal.about(key), gently=outcome.picture is None)
        problem = appraisal.about("spectrum")
        self.spectrum_message.setVisible(problem is not None)
        if problem is not None:
            self.spectrum_message.setText(f"✕ {problem.message}")

    def _show_spectrum(self, name: str) -> None:
        if self.spectrum.currentData() == name:
            return
        index = self.spectrum.findData(name)
        if index < 0:
            self.spectrum.addItem(name, name)
            index = self.spectrum.count() - 1
        self.spectrum.setCurrentIndex(index)
