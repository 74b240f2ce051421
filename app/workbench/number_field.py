"""One input of a cell: its symbol, what was typed, its unit, a slider, and what is wrong with it."""

from __future__ import annotations

import math

from PySide6.QtCore import QEvent, QObject, Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent, QWheelEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QSlider, QVBoxLayout, QWidget

from app.files.numbers import NumberError, write_number
from app.session.appraisal import Problem
from app.session.curves import Source
from app.session.fields import Field
from app.session.state import Unread, Value
from physics.checks import Severity

_SLIDER_STEPS = 1000
_SOURCES: dict[Source, str] = {
    "sweep": "the J–V sweep",
    "fit": "the one-diode fit to the sweep; its uncertainty stands on the tab Fit",
    "inflection": "the EQE: its inflection",
    "edge mean": "the EQE: the mean of its edge",
    "light series": "the light-intensity series",
}


def slider_value(field: Field, position: int) -> float:
    """Value [field's unit] of a slider position (0 to 1000), rounded to what the field shows."""
    low, high = field.slider
    share = position / _SLIDER_STEPS
    if field.log:
        value = low * (high / low) ** share
        return float(f"{value:.{field.digits}g}")
    return round(low + (high - low) * share, field.digits)


def slider_position(field: Field, value: float) -> int:
    """Slider position (0 to 1000) of a value [field's unit]; values beyond the slider stand at its end."""
    low, high = field.slider
    if field.log:
        share = math.log(value / low) / math.log(high / low) if value > 0 else 0.0
    else:
        share = (value - low) / (high - low)
    return round(_SLIDER_STEPS * min(max(share, 0.0), 1.0))


def label_width(widget: QWidget) -> int:
    """Width [px] of the column of names, the same for every row of the inputs."""
    return widget.fontMetrics().horizontalAdvance("Name") + 4


class CalmSlider(QSlider):
    """A slider that leaves the wheel to the scroll area around it unless it has the focus."""

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Turn only where the user is at work."""
        if self.hasFocus():
            super().wheelEvent(event)
        else:
            event.ignore()


class Entry(QLineEdit):
    """A line of text whose changes the session undoes, not the line itself. The wheel does nothing; leaving is told."""

    left = Signal()

    def event(self, event: QEvent) -> bool:
        """Leave undo and redo to the window, where they take back the same change as everywhere."""
        if (
            event.type() == QEvent.Type.ShortcutOverride
            and isinstance(event, QKeyEvent)
            and event.modifiers() & Qt.KeyboardModifier.ControlModifier
            and event.key() in (Qt.Key.Key_Z, Qt.Key.Key_Y)
        ):
            event.ignore()
            return False
        return super().event(event)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Scroll what is around the field, never its number."""
        event.ignore()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Tell that the visit to the field is over."""
        super().focusOutEvent(event)
        self.left.emit()


class NumberField(QWidget):
    """Binds one field of a cell to a row of widgets. It holds no value of its own: it shows one and asks for another.

    Signals
    -------
    asked : object
        The user wants the field to be this `Value`.
    settled
        A drag or a visit to the field is over.
    """

    asked = Signal(object)
    settled = Signal()

    def __init__(self, field: Field, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.field = field
        self._shown: Value = None
        self._touched = True  # what is shown may not be what the session holds
        self._typed_in = False  # the text is the user's
        self._problem: tuple[Problem | None, bool] = (None, False)
        self._source: Source | None = None
        self.label = QLabel(field.symbol)
        self.entry = Entry()
        self.unit = QLabel(field.unit)
        self.slider = CalmSlider(Qt.Orientation.Horizontal)
        self.message = QLabel()
        self._prepare()
        row = QHBoxLayout()
        row.setSpacing(6)
        for widget, stretch in ((self.label, 0), (self.entry, 0), (self.unit, 0), (self.slider, 1)):
            row.addWidget(widget, stretch)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(1)
        column.addLayout(row)
        column.addWidget(self.message)

    def _prepare(self) -> None:
        field = self.field
        optional = "" if field.required else " Leave it empty if it is not known."
        if field.default is not None:
            optional = f" Empty means {write_number(field.default)} {field.unit}."
        tip = f"{field.title}{f' in {field.unit}' if field.unit else ''}.{optional}"
        name = f"{field.title}{f' in {field.unit}' if field.unit else ''}"
        self.label.setFixedWidth(label_width(self))
        self.unit.setFixedWidth(self.fontMetrics().horizontalAdvance("mW cm⁻²") + 2)
        self.label.setBuddy(self.entry)
        self.label.setToolTip(tip)
        self.entry.setToolTip(tip)
        self.entry.setAccessibleName(name)
        self.entry.setPlaceholderText("" if field.required else "unknown" if field.default is None else "")
        self.entry.setFixedWidth(self.entry.fontMetrics().horizontalAdvance("0") * 8 + 14)
        self.entry.textEdited.connect(self._typed)
        self.entry.left.connect(self._left)
        self.entry.returnPressed.connect(self._left)
        self.slider.setRange(0, _SLIDER_STEPS)
        self.slider.setPageStep(_SLIDER_STEPS // 20)
        self.slider.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.slider.setAccessibleName(f"{name}, slider")
        self.slider.setToolTip(tip)
        self.slider.setMinimumWidth(50)
        self.slider.actionTriggered.connect(self._slid)
        self.slider.sliderReleased.connect(self.settled)
        self.message.setWordWrap(True)
        self.message.hide()

    def show_value(self, value: Value) -> None:
        """Show a value. What the user is typing stays as typed as long as it means that value."""
        if not self._touched and (value is self._shown or value == self._shown):
            return
        typed, self._typed_in = self._typed_in, False
        self._shown, self._touched = value, False
        if not typed or self._read() != value:
            self.entry.setText(self._text(value))
            self.entry.setCursorPosition(0)
        if not self.slider.isSliderDown():
            position = slider_position(self.field, value) if isinstance(value, float | int) else 0
            if position != self.slider.value():
                self.slider.setValue(position)

    def show_source(self, source: Source | None) -> None:
        """Mark a value that was read off a curve, and say of which kind."""
        if source == self._source:
            return
        self._source = source
        tip = self.label.toolTip()
        told = "" if source is None else f"Read off {_SOURCES[source]}. Typing over it takes its place."
        self.entry.setToolTip(f"{told}\n{tip}" if told else tip)
        self.entry.setAccessibleDescription(told)
        self._set_property(self.entry, "origin", "" if source is None else "curve")

    def show_problem(self, problem: Problem | None, gently: bool = False) -> None:
        """Tell what is wrong beside the field; `gently` where a missing number is only not there yet."""
        shown = (problem, gently)
        if shown == self._problem:
            return
        self._problem = shown
        self.message.setVisible(problem is not None)
        trouble = ""
        if problem is None:
            self.message.clear()
        elif problem.missing and gently:
            trouble = "missing"
            self.message.setText(problem.message)
        else:
            trouble = "refused" if problem.severity is Severity.IMPOSSIBLE else "doubtful"
            self.message.setText(f"{'✕' if trouble == 'refused' else '▲'} {problem.message}")
        for widget in (self.message, self.entry):
            self._mark(widget, trouble)

    @staticmethod
    def _mark(widget: QWidget, trouble: str) -> None:
        """Set the property that the style sheet colours by."""
        NumberField._set_property(widget, "trouble", trouble)

    @staticmethod
    def _set_property(widget: QWidget, name: str, value: str) -> None:
        if widget.property(name) != value:
            widget.setProperty(name, value)
            widget.style().unpolish(widget)
            widget.style().polish(widget)

    @staticmethod
    def _text(value: Value) -> str:
        if value is None:
            return ""
        return value.text if isinstance(value, Unread) else write_number(value)

    def _read(self) -> Value:
        text = self.entry.text()
        if not text.strip():
            return None
        try:
            return self.field.read(text)
        except NumberError as fault:
            return Unread(text, str(fault))

    def _typed(self) -> None:
        self._touched = self._typed_in = True
        self.asked.emit(self._read())

    def _left(self) -> None:
        """The visit is over: an empty field with a default takes it, and the number is written out plainly."""
        self._touched = self._typed_in = True
        value = self._read()
        if value is None and self.field.default is not None:
            self.asked.emit(self.field.default)
        elif isinstance(value, float):
            self.entry.setText(self._text(value))
        self.settled.emit()

    def _slid(self) -> None:
        self._touched = True
        self.asked.emit(slider_value(self.field, self.slider.sliderPosition()))


def ignore_wheel(widget: QWidget) -> None:
    """Keep the wheel from changing a widget that does not have the focus."""
    widget.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
    widget.installEventFilter(_WheelGuard(widget))


class _WheelGuard(QObject):
    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if event.type() == QEvent.Type.Wheel and isinstance(watched, QWidget) and not watched.hasFocus():
            event.ignore()
            return True
        return super().eventFilter(watched, event)
