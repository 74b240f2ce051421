"""Luminescence of partial stacks: a row for the bare absorber, for each contact alone, and for the finished cell."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QGridLayout,
    QLabel,
    QPushButton,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.files.numbers import NumberError, read_number, write_number
from app.session.commands import SetStacks
from app.session.outcome import Outcome
from app.session.session import Session
from app.session.stacks import NO_STACKS, Reading, StackReadings, read_reading, read_suns
from app.workbench.number_field import Entry
from app.workbench.theme import Heading, Theme

_ABOUT = (
    "External photoluminescence yields at open circuit (0.012, 1.2 %), or implied Voc (1.18 V). All count as at one "
    "sun's generation; a reading at another light level is brought there with the ideality below."
)
_HEADS = ("Stack", "Yield or implied Voc", "at (suns)")


class _Row:
    """The widgets of one stack; a contact has a name that can be typed and a button to leave it out."""

    def __init__(self, title: str, contact: bool) -> None:
        self.name = Entry()
        self.name.setMaxLength(40)
        self.title = QLabel(title)
        self.value = Entry()
        self.suns = Entry()
        self.remove = QToolButton()
        self.remove.setText("✕")
        self.remove.setToolTip("Leave this contact out")
        self.remove.setAccessibleName(f"Leave {title} out")
        self.name.setPlaceholderText("name of the contact")
        self.name.setAccessibleName(f"Name of {title}")
        self.value.setPlaceholderText("unknown")
        self.value.setAccessibleName(f"Luminescence yield or implied Voc, {title}")
        self.suns.setPlaceholderText("1")
        self.suns.setAccessibleName(f"Light level in suns, {title}")
        self.contact = contact

    def show_reading(self, name: str, reading: Reading | None) -> None:
        """Show what the session holds; what is typed stays as long as it means that."""
        if self.name.text() != name:
            self.name.setText(name)
        try:
            same = self.read() == reading
        except NumberError:
            same = False
        if not same:
            self.value.setText("" if reading is None else reading.text)
            self.suns.setText("" if reading is None or reading.suns == 1.0 else write_number(reading.suns))

    def read(self) -> Reading | None:
        """What is typed; NumberError with a sentence where it is no reading."""
        suns = read_suns(self.suns.text())
        return read_reading(self.value.text(), suns)


class StacksPanel(QDialog):
    """Binds the partial stacks of the cell on show to the session."""

    def __init__(self, session: Session, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._session = session
        self._theme = theme
        self._shown: tuple[int | None, StackReadings] | None = None
        self.setWindowTitle("Partial stacks")
        self.setModal(False)
        self.head = Heading("")
        about = QLabel(_ABOUT)
        about.setWordWrap(True)
        self.bare, self.whole = _Row("Bare absorber", False), _Row("Finished cell", False)
        self.contacts: list[_Row] = []
        self._grid = QGridLayout()
        self._grid.setColumnStretch(0, 2)
        self._grid.setColumnStretch(1, 2)
        self._grid.setColumnStretch(2, 1)
        self.ideality = Entry()
        self.ideality.setPlaceholderText("not needed at one sun")
        self.ideality.setAccessibleName("Ideality by which readings at other light levels are brought to one sun")
        self.add = QPushButton("&Add a contact")
        self.add.setAutoDefault(False)
        self.message = QLabel()
        self.message.setWordWrap(True)
        self.message.setProperty("trouble", "doubtful")
        self.message.setMinimumHeight(2 * self.message.fontMetrics().height() + 4)
        self.message.setAlignment(Qt.AlignmentFlag.AlignTop | Qt.AlignmentFlag.AlignLeft)
        close = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        close.rejected.connect(self.close)
        column = QVBoxLayout(self)
        for widget in (self.head, about):
            column.addWidget(widget)
        column.addLayout(self._grid)
        column.addWidget(self.message)
        column.addStretch(1)
        column.addWidget(close)
        self.add.clicked.connect(self._add_contact)
        for entry in self._entries((self.bare, self.whole)):
            self._bind(entry)
        self._bind(self.ideality)
        self._lay_out()
        theme.changed.connect(self._recolour)
        self._recolour()
        self.resize(520, 360)

    def _recolour(self) -> None:
        self.setStyleSheet(self._theme.field_sheet)

    @staticmethod
    def _entries(rows: tuple[_Row, ...] | list[_Row]) -> list[Entry]:
        return [entry for row in rows for entry in (row.name, row.value, row.suns)]

    def _bind(self, entry: Entry) -> None:
        entry.textEdited.connect(self._typed)
        entry.left.connect(self._session.settle)

    def _lay_out(self) -> None:
        """Place the rows, the contacts between the bare absorber and the finished cell."""
        while self._grid.count():
            self._grid.takeAt(0)
        for column, text in enumerate(_HEADS):
            if self._grid.itemAtPosition(0, column) is None:
                self._grid.addWidget(self._head(text), 0, column)
        at = 1
        for row in (self.bare, *self.contacts, self.whole):
            self._grid.addWidget(row.name if row.contact else row.title, at, 0)
            self._grid.addWidget(row.value, at, 1)
            self._grid.addWidget(row.suns, at, 2)
            if row.contact:
                self._grid.addWidget(row.remove, at, 3)
            at += 1
        self._grid.addWidget(self.add, at, 0)
        label = self._head("Ideality for other light levels")
        label.setBuddy(self.ideality)
        self._grid.addWidget(label, at + 1, 0)
        self._grid.addWidget(self.ideality, at + 1, 1)

    def _head(self, text: str) -> QLabel:
        known = self.findChild(QLabel, text)
        if known is not None:
            return known
        label = QLabel(text, self)
        label.setObjectName(text)
        return label

    def _set_contacts(self, count: int) -> None:
        if count == len(self.contacts):
            return
        while len(self.contacts) < count:
            row = _Row(f"contact {len(self.contacts) + 1}", True)
            row.title.setParent(self)
            row.title.hide()
            row.remove.clicked.connect(lambda _=False, row=row: self._remove(row))
            for entry in self._entries([row]):
                self._bind(entry)
            self.contacts.append(row)
        for row in self.contacts[count:]:
            for widget in (row.name, row.value, row.suns, row.remove, row.title):
                widget.hide()  # deleted only when Qt comes to it
                widget.deleteLater()
        del self.contacts[count:]
        self._lay_out()

    @property
    def _given(self) -> StackReadings:
        cell = self._session.state.cell
        return NO_STACKS if cell is None else cell.stacks

    def _do(self, stacks: StackReadings, typed: bool = False) -> None:
        cell = self._session.state.cell
        if cell is not None:
            if typed:
                self._shown = (cell.ident, stacks)
            self._session.do(SetStacks(cell.ident, stacks))

    def _add_contact(self) -> None:
        self._do(replace(self._given, contacts=(*self._given.contacts, ("", None))))
        self._session.settle()
        self.show_state()
        self.contacts[-1].name.setFocus()

    def _remove(self, row: _Row) -> None:
        if row not in self.contacts:
            return
        at = self.contacts.index(row)
        contacts = self._given.contacts
        self._do(replace(self._given, contacts=(*contacts[:at], *contacts[at + 1 :])))
        self._session.settle()

    def _typed(self) -> None:
        """Give the session what is typed, or tell what is wrong with it."""
        try:
            ideality = read_number(self.ideality.text()) if self.ideality.text().strip() else None
            if ideality is not None and not 0.1 <= ideality <= 10.0:
                raise NumberError("The ideality lies between 0.1 and 10; most stacks between 1 and 2.")
            contacts = tuple((row.name.text(), row.read()) for row in self.contacts)
            stacks = StackReadings(self.bare.read(), contacts, self.whole.read(), ideality)
        except NumberError as fault:
            self.message.setText(f"✕ {fault}")
        else:
            self._do(stacks, typed=True)
            self._tell("")

    def _tell(self, sentence: str) -> None:
        sentence = sentence or self._given.fault
        self.message.setText(f"▲ {sentence}" if sentence else "")

    def refresh(self, outcome: Outcome) -> None:
        """Show what the session holds, and what is wrong with it."""
        cell = self._session.state.cell
        self.head.setText("" if cell is None else cell.name)
        self.show_state()
        appraisal = outcome.appraisal
        problem = None if appraisal is None else appraisal.about("stacks")
        if not self.message.text().startswith("✕"):
            self._tell("" if problem is None else problem.message)

    def show_state(self) -> None:
        """Show what the session holds."""
        cell, given = self._session.state.cell, self._given
        shown = (None if cell is None else cell.ident, given)
        if shown == self._shown:  # what is being typed stays, be it a number yet or not
            return
        self._shown = shown
        self.message.clear()
        self.setEnabled(cell is not None)
        self._set_contacts(len(given.contacts))
        self.bare.show_reading("", given.bare)
        self.whole.show_reading("", given.finished)
        for row, (name, reading) in zip(self.contacts, given.contacts, strict=True):
            row.show_reading(name, reading)
        text = self.ideality.text().strip()
        try:
            same = (read_number(text) if text else None) == given.ideality
        except NumberError:
            same = False
        if not same:
            self.ideality.setText("" if given.ideality is None else write_number(given.ideality))
