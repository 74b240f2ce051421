"""Typing numbers with keys, in five locales: what is meant, or a refusal beside the field, never something else."""

from collections.abc import Iterator

import pytest
from PySide6.QtCore import QLocale, QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QWidget

from app.session.fields import FIELDS, Field
from app.session.state import Unread
from app.workbench.number_field import slider_position, slider_value
from app.workbench.window import Window

from .conftest import press, settle

LOCALES = ("C", "en_US", "de_DE", "fr_FR", "tr_TR")

#: Field, what is typed, the value in the field's unit, or None for a refusal.
TYPED: list[tuple[str, str, float | None]] = [
    ("voc", "1.1", 1.1), ("voc", "1,1", 1.1), ("voc", "1,127", 1.127), ("voc", "1.127", 1.127), ("voc", ".9", 0.9),
    ("voc", ",9", 0.9), ("voc", "0,738 V", 0.738), ("voc", "738 mV", 0.738), ("voc", "738mV", 0.738),
    ("voc", " 0.9 ", 0.9), ("voc", "9e-1", 0.9), ("voc", "9E-1", 0.9), ("voc", "9·10⁻¹", 0.9), ("voc", "+0.9", 0.9),
    ("voc", "0.9.1", None), ("voc", "0,9,1", None), ("voc", "1.1 A", None), ("voc", "1.1 V V", None),
    ("voc", "abc", None), ("voc", "1.1x", None), ("voc", "nan", None), ("voc", "inf", None), ("voc", "1e999", None),
    ("voc", "--1", None), ("voc", "1 2", None), ("voc", "0x1", None), ("voc", "1_1", None), ("voc", "1;1", None),
    ("voc", "−0.5", -0.5), ("voc", "-0.5", -0.5), ("voc", "1,5", 1.5), ("voc", "1;5", None), ("voc", "½", None),
    ("jsc", "24.53", 24.53), ("jsc", "24,53", 24.53), ("jsc", "24.53 mA/cm²", 24.53), ("jsc", "24.53 mA/cm2", 24.53),
    ("jsc", "24.53 mA cm^-2", 24.53), ("jsc", "245.3 A/m2", 24.53), ("jsc", "24.53 mA", None),
    ("jsc", "2.453e1", 24.53),
    ("ff", "77.6", 77.6), ("ff", "77,6 %", 77.6), ("ff", "77.6%", 77.6), ("ff", "120", 120.0), ("ff", "0.776", 0.776),
    ("gap", "1.6", 1.6), ("gap", "1600 meV", 1.6), ("gap", "1,6 eV", 1.6), ("gap", "1.6 V", None),
    ("ere", "0.0042", 0.0042), ("ere", "0.42 %", 0.0042), ("ere", "4.2e-3", 0.0042), ("ere", "1×10^-3", 1e-3),
    ("ere", "10⁻³", 1e-3), ("ere", "42 ppm", 4.2e-5), ("rsh", "1 000 000", 1e6), ("rsh", "1.000.000", 1e6),
    ("rsh", "1,234", None), ("rsh", "1,234.5", 1234.5), ("rsh", "1.234,5", 1234.5), ("rsh", "5 kΩ cm²", 5000.0),
    ("rsh", "1e-3", 1e-3), ("irradiance", "1000 W/m²", 100.0), ("irradiance", "1 sun", 100.0),
    ("temperature", "−10", -10.0), ("temperature", "25 °C", 25.0), ("temperature", "298 K", None), ("rs", "0", 0.0),
]  # fmt: skip


@pytest.fixture(params=LOCALES)
def _locale(request: pytest.FixtureRequest) -> Iterator[None]:
    before = QLocale()
    QLocale.setDefault(QLocale(request.param))
    yield
    QLocale.setDefault(before)


def _type(window: Window, key: str, text: str) -> None:
    entry = window.inputs.fields[key].entry
    entry.setFocus()
    entry.selectAll()
    QTest.keyClick(entry, Qt.Key.Key_Delete)
    press(entry, text)
    settle()


def _value(window: Window, key: str) -> object:
    cell = window.session.state.cell
    assert cell is not None
    return cell.values[key]


@pytest.mark.usefixtures("_locale")
def test_what_is_typed_is_what_is_meant_or_refused(window: Window) -> None:
    assert len(TYPED) >= 60
    for key, text, meant in TYPED:
        _type(window, key, text)
        value = _value(window, key)
        field = window.inputs.fields[key]
        if meant is None:
            assert isinstance(value, Unread), (text, value)
            assert field.message.isVisible(), text
            assert field.message.text().startswith("✕")
        else:
            assert value == meant, text
        assert field.entry.text() == text  # nothing is rewritten under the cursor
        QTest.keyClick(field.entry, Qt.Key.Key_Return)
        if meant is not None:
            assert field.field.read(field.entry.text()) == meant  # written out plainly, the same number
        window.session.undo()
        settle()


def test_leaving_a_field_writes_the_number_out(window: Window) -> None:
    _type(window, "voc", "1100 mV")
    window.inputs.fields["ff"].entry.setFocus()
    settle()
    assert window.inputs.fields["voc"].entry.text() == "1.1"


def test_an_emptied_condition_takes_its_default(window: Window) -> None:
    _type(window, "temperature", "")
    window.inputs.fields["ff"].entry.setFocus()
    settle()
    assert _value(window, "temperature") == 25.0
    assert window.inputs.fields["temperature"].entry.text() == "25"


def test_an_emptied_optional_field_is_unknown(window: Window) -> None:
    _type(window, "rs", "")
    assert _value(window, "rs") is None
    assert not window.inputs.fields["rs"].message.isVisible()


def test_a_visit_to_a_field_is_one_step_of_undo(window: Window) -> None:
    before = window.session.state
    _type(window, "voc", "1.1234")
    window.inputs.fields["ff"].entry.setFocus()
    settle()
    assert window.session.undo_name == "change of Voc"
    window.session.undo()
    settle()
    assert window.session.state == before
    assert window.session.undo_name == ""
    assert window.inputs.fields["voc"].entry.text() == "1.048"


def test_undo_in_a_field_is_the_sessions(window: Window) -> None:
    before = window.session.state
    _type(window, "voc", "1.1234")
    entry = window.inputs.fields["voc"].entry
    QTest.keyClick(entry, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    settle()
    assert window.session.state == before
    assert entry.text() == "1.048"
    both = Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier
    for key, modifiers in ((Qt.Key.Key_Y, Qt.KeyboardModifier.ControlModifier), (Qt.Key.Key_Z, both)):
        QTest.keyClick(entry, key, modifiers)
        settle()
        assert _value(window, "voc") == 1.1234
        window.session.undo()
        settle()


def _turn_wheel(widget: QWidget) -> None:
    middle = QPointF(widget.rect().center())
    event = QWheelEvent(
        middle, widget.mapToGlobal(middle), QPoint(), QPoint(0, 120), Qt.MouseButton.NoButton,
        Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    QApplication.sendEvent(widget, event)


def test_the_wheel_changes_nothing_that_has_no_focus(window: Window) -> None:
    window.waterfall.setFocus()
    before = window.session.state
    for field in window.inputs.fields.values():
        _turn_wheel(field.entry)
        _turn_wheel(field.slider)
    for box in (window.inputs.spectrum, window.actions_.attribution, window.actions_.faces):
        _turn_wheel(box)
    settle()
    assert window.session.state == before
    assert window.inputs.spectrum.currentIndex() == 0


def test_a_drag_is_one_step_of_undo_and_moves_the_number(window: Window) -> None:
    slider = window.inputs.fields["voc"].slider
    before = window.session.state
    slider.setSliderDown(True)
    for position in range(slider.sliderPosition(), slider.sliderPosition() + 40, 4):
        slider.setSliderPosition(position)
        settle()
    slider.setSliderDown(False)
    settle()
    moved = _value(window, "voc")
    assert isinstance(moved, float)
    assert moved > 1.048
    assert float(window.inputs.fields["voc"].entry.text()) == moved
    window.session.undo()
    assert window.session.state == before


def test_arrow_keys_move_a_slider(window: Window) -> None:
    slider = window.inputs.fields["ff"].slider
    slider.setFocus()
    before = _value(window, "ff")
    QTest.keyClick(slider, Qt.Key.Key_Right)
    settle()
    after = _value(window, "ff")
    assert isinstance(before, float)
    assert isinstance(after, float)
    assert after > before
    assert slider.value() == slider_position(window.inputs.fields["ff"].field, after)


@pytest.mark.parametrize("field", FIELDS, ids=lambda f: f.key)
def test_slider_and_value_go_both_ways(field: Field) -> None:
    low, high = field.slider
    assert slider_position(field, low) == 0
    assert slider_position(field, high) == 1000
    assert slider_position(field, high * 10) == 1000
    for position in range(0, 1001, 50):
        value = slider_value(field, position)
        assert field.fault(value) == ""
        assert abs(slider_position(field, value) - position) <= (25 if field.log else 2)


def test_every_field_is_reached_by_tab(window: Window) -> None:
    seen: list[QWidget] = []
    widget: QWidget = window.inputs.name
    while widget not in seen:
        seen.append(widget)
        widget = widget.nextInFocusChain()
    seen = [w for w in seen if w.focusPolicy() & Qt.FocusPolicy.TabFocus and w.isVisible()]
    for field in window.inputs.fields.values():
        assert field.entry in seen
        assert field.slider in seen
    assert window.waterfall in seen
    assert window.table in seen
