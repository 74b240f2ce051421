"""The inputs of the cell on show."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QLabel, QPushButton, QScrollArea, QVBoxLayout, QWidget

from app.session.appraisal import Appraisal
from app.session.commands import Describe, SetValue
from app.session.curves import Source
from app.session.fields import FIELD_BY_KEY
from app.session.light import light_named
from app.session.outcome import Outcome
from app.session.session import Session
from app.session.state import Value
from app.workbench.number_field import Entry, NumberField, ignore_wheel, label_width
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
        # Qt sizes a page with wrapped texts for a viewport without the bar, which the bar would then cover.
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOn)
        self._page = QWidget()
        self._page.setObjectName("inputs")
        self.name = Entry()
        self.note = Entry()
        self.spectrum = QComboBox()
        self.spectrum_message = QLabel()
        self.fields: dict[str, NumberField] = {}
        self._troubled = False
        self._stacks_shown = 0
        self._sources: Mapping[str, Source] = {}
        column = QVBoxLayout(self._page)
        column.setContentsMargins(10, 4, 10, 8)
        column.setSpacing(3)
        self._add_texts(column)
        self.slanted = QLabel("slanted: read off curves")
        self.slanted.setProperty("origin", "curve")
        self.slanted.hide()
        for title, keys in _GROUPS:
            column.addSpacing(6)
            head = QHBoxLayout()
            head.addWidget(Heading(title))
            if "voc" in keys:
                head.addStretch(1)
                head.addWidget(self.slanted)
            column.addLayout(head)
            if "irradiance" in keys:
                self._add_spectrum(column)
            for key in keys:
                self._add_field(column, key)
        self._add_stacks(column)
        column.addStretch(1)
        self.setWidget(self._page)
        theme.changed.connect(self._recolour)
        self._recolour()

    def _recolour(self) -> None:
        self._page.setStyleSheet(self._theme.field_sheet)

    def _row(self, text: str, editor: QWidget) -> QHBoxLayout:
        label = QLabel(text)
        label.setFixedWidth(label_width(label))
        label.setBuddy(editor)
        row = QHBoxLayout()
        row.setSpacing(6)
        row.addWidget(label)
        row.addWidget(editor, 1)
        return row

    def _add_texts(self, column: QVBoxLayout) -> None:
        column.addWidget(Heading("Cell"))
        for text, editor, tip in (
            ("Name", self.name, "What the lab calls the cell; it heads every picture"),
            ("Note", self.note, "Free text; it goes into the small print of pictures"),
        ):
            editor.setToolTip(tip)
            editor.setAccessibleName(f"{text} of the cell")
            editor.setMaxLength(200)
            editor.editingFinished.connect(self._session.settle)
            column.addLayout(self._row(text, editor))
        self.name.textEdited.connect(lambda text: self._describe(cell_name=text))
        self.note.textEdited.connect(lambda text: self._describe(note=text))

    def _add_field(self, column: QVBoxLayout, key: str) -> None:
        field = NumberField(FIELD_BY_KEY[key])
        field.asked.connect(lambda value: self._ask(key, value))
        field.settled.connect(self._session.settle)
        self.fields[key] = field
        column.addWidget(field)

    def _add_spectrum(self, column: QVBoxLayout) -> None:
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
        column.addLayout(self._row("Light", self.spectrum))
        column.addWidget(self.spectrum_message)

    def _add_stacks(self, column: QVBoxLayout) -> None:
        self.stacks = QPushButton("Partial stacks…")
        self.stacks.setToolTip(
            "Luminescence of the bare absorber, of stacks with one contact, and of the finished cell:\n"
            "it splits the non-radiative line into absorber, interfaces and contacts"
        )
        self.stacks_message = QLabel()
        self.stacks_message.setWordWrap(True)
        self.stacks_message.setProperty("trouble", "doubtful")
        self.stacks_message.hide()
        column.addWidget(self.stacks)
        column.addWidget(self.stacks_message)

    @property
    def sliding(self) -> bool:
        """Whether the user holds a slider."""
        return any(field.slider.isSliderDown() for field in self.fields.values())

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
        count = len(entry.stacks.readings)
        if count != self._stacks_shown:
            self._stacks_shown = count
            self.stacks.setText(f"Partial stacks ({count})…" if count else "Partial stacks…")
        for key, field in self.fields.items():
            field.show_value(entry.values[key])
        if entry.sources is not self._sources:
            self._show_sources(entry.sources)
        troubled, self._troubled = self._troubled, bool(appraisal.problems)
        if troubled or self._troubled:
            self._show_problems(appraisal, gently=outcome.picture is None)

    def _show_sources(self, sources: Mapping[str, Source]) -> None:
        """Mark what was read off curves."""
        self._sources = sources
        for key, field in self.fields.items():
            field.show_source(sources.get(key))
        self.slanted.setVisible(bool(sources))

    def _show_problems(self, appraisal: Appraisal, gently: bool) -> None:
        for key, field in self.fields.items():
            field.show_problem(appraisal.about(key), gently)
        problem = appraisal.about("spectrum")
        self.spectrum_message.setVisible(problem is not None)
        if problem is not None:
            self.spectrum_message.setText(f"✕ {problem.message}")
        problem = appraisal.about("stacks")
        self.stacks_message.setVisible(problem is not None)
        if problem is not None:
            self.stacks_message.setText(f"▲ {problem.message}")

    def _show_spectrum(self, name: str) -> None:
        if self.spectrum.currentData() == name:
            return
        index = self.spectrum.findData(name)
        if index < 0:
            self.spectrum.addItem(name, name)
            index = self.spectrum.count() - 1
        self.spectrum.setCurrentIndex(index)
