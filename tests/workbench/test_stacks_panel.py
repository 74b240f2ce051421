"""The panel for partial stacks, used as a person would."""

from __future__ import annotations

import pytest
from PySide6.QtTest import QTest

from app.session.stacks import Reading
from app.workbench.stacks_panel import StacksPanel
from app.workbench.window import Window

from .conftest import settle


@pytest.fixture
def panel(window: Window) -> StacksPanel:
    window.inputs.stacks.click()
    settle()
    found = window.actions_._stacks
    assert found is not None
    return found


def _keys(window: Window) -> list[str]:
    return [row.key for row in window.table._model.rows]


def test_what_is_typed_splits_the_ledger(window: Window, panel: StacksPanel) -> None:
    window.session.pick_line("nonradiative")
    QTest.keyClicks(panel.bare.value, "1.5 %")
    settle()
    assert "one stack more" in panel.message.text()
    assert "one stack more" in window.inputs.stacks_message.text()
    panel.add.click()
    settle()
    QTest.keyClicks(panel.contacts[0].name, "front layer")
    QTest.keyClicks(panel.contacts[0].value, "0.0012")
    QTest.keyClicks(panel.whole.value, "1e-4")
    settle()
    assert panel.message.text() == ""
    assert "nonradiative" not in _keys(window)
    assert "nonradiative_interface:front layer" in _keys(window)
    assert window.explanation.text.startswith("Pick a bar")  # the line that was picked is no more
    window.session.pick_line("nonradiative_interface:front layer")
    settle()
    assert "luminescence yield with front layer alone" in window.explanation.text
    assert window.inputs.stacks.text() == "Partial stacks (3)…"


def test_a_wrong_number_is_told_beside_and_changes_nothing(window: Window, panel: StacksPanel) -> None:
    QTest.keyClicks(panel.bare.value, "0.02")
    QTest.keyClicks(panel.whole.value, "0.3")
    QTest.keyClicks(panel.whole.value, " W")
    settle()
    assert panel.message.text().startswith("✕")
    assert "unit" in panel.message.text()
    cell = window.session.state.cell
    assert cell is not None
    assert (cell.stacks.bare, cell.stacks.finished) == (Reading(0.02), Reading(0.3))
    assert panel.whole.value.text() == "0.3 W"


def test_a_contact_is_left_out_and_undo_brings_it_back(window: Window, panel: StacksPanel) -> None:
    for name in ("one", "two"):
        panel.add.click()
        settle()
        QTest.keyClicks(panel.contacts[-1].name, name)
        QTest.keyClicks(panel.contacts[-1].value, "0.01")
        window.session.settle()
    panel.contacts[0].remove.click()
    settle()
    assert [row.name.text() for row in panel.contacts] == ["two"]
    assert panel.contacts[0].value.text() == "0.01"
    window.actions_.undo.trigger()
    settle()
    assert [row.name.text() for row in panel.contacts] == ["one", "two"]


def test_other_light_levels_need_an_ideality(window: Window, panel: StacksPanel) -> None:
    QTest.keyClicks(panel.bare.value, "0.02")
    QTest.keyClicks(panel.whole.value, "0.001")
    QTest.keyClicks(panel.whole.suns, "10")
    settle()
    assert "ideality" in panel.message.text()
    QTest.keyClicks(panel.ideality, "1.5")
    settle()
    assert panel.message.text() == ""
    basis = {row.key: row.basis for row in window.table._model.rows}
    assert "brought to one sun" in basis["nonradiative_bulk"]


def test_it_follows_the_cell_on_show(window: Window, panel: StacksPanel) -> None:
    QTest.keyClicks(panel.bare.value, "0.02")
    settle()
    cells = window.session.state.cells
    window.session.pick(cells[1].ident)
    settle()
    assert panel.bare.value.text() == ""
    window.session.pick(cells[0].ident)
    settle()
    assert panel.bare.value.text() == "0.02"
