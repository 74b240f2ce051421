"""Measured curves opened in the window."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QStandardPaths, Qt
from PySide6.QtGui import QAction, QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QCheckBox, QComboBox

from app.figures.all_plots import BESIDE
from app.figures.curve_plots import eqe_plot_of
from app.figures.plots import jv_plot_of
from app.workbench.import_panel import ImportPanel
from app.workbench.window import Window
from physics.diode import Diode
from physics.units import EV_NM

from .conftest import settle


def _write_sweep(path: Path) -> Path:
    """n = 1.4, Rs = 2 Ω cm², Rsh = 2000 Ω cm², a little noise, decimal commas, current negative and in A/m²."""
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.4, 2.0, 2000.0).curve(150)
    noisy = current + 0.01 * np.random.default_rng(2).standard_normal(current.size)
    rows = [f"{v:.5f};{-10 * j:.4f}".replace(".", ",") for v, j in zip(voltage, noisy, strict=True)]
    path.write_text("Cell 7\nVoltage (V);Current density (A/m²)\n" + "\n".join(rows), encoding="cp1252")
    return path


def _write_eqe(path: Path) -> Path:
    """A logistic edge at 1.6 eV, 15 meV wide."""
    wavelength = np.arange(900.0, 315.0, -5.0)
    eqe = 0.85 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.015))
    rows = [f"{w:.0f}\t{q:.7f}" for w, q in zip(wavelength, eqe, strict=True)]
    path.write_text("lambda (nm)\tEQE\n" + "\n".join(rows))
    return path


def _open(window: Window, path: Path) -> ImportPanel:
    """Open a file and take it as it was understood."""
    window.intake.open_file(path)
    settle()
    panel = window.intake._import
    assert panel is not None
    panel.take()
    settle()
    return panel


def _action(window: Window, text: str) -> QAction:
    return next(action for action in window.actions_.findChildren(QAction) if text in action.text().replace("&", ""))


def test_curves_make_a_ledger_out_of_nothing(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    _open(window, _write_eqe(tmp_path / "eqe.txt"))
    _open(window, _write_sweep(tmp_path / "sweep.txt"))
    settle()
    assert "one-diode fit" in window.notices.text.text()
    picture = window.outcomes.current().picture
    assert picture is not None
    assert float(picture.ledger.cell.gap) == pytest.approx(1.6, abs=0.0005)
    assert window.inputs.fields["rs"].entry.text().startswith(("1.9", "2.0"))
    bases = {row.key: row.basis for row in window.table._model.rows}
    assert bases["voltage_edge"].startswith("fitted: from the EQE")
    assert bases["fill_series"] == "fitted: one-diode fit to the sweep"
    assert "uncollected" in bases


def test_the_plots_show_what_was_measured(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    eqe_tab = [plot.key for plot in BESIDE].index("eqe")
    assert not window._tabs.isTabVisible(eqe_tab)
    _open(window, _write_eqe(tmp_path / "eqe.txt"))
    _open(window, _write_sweep(tmp_path / "sweep.txt"))
    settle()
    assert window._tabs.isTabVisible(eqe_tab)
    window._tabs.setCurrentIndex(eqe_tab)
    settle()
    picture = window.outcomes.current().picture
    assert picture is not None
    shown = window.beside["eqe"]._spec
    assert shown is not None
    assert [series.key for series in shown.series] == ["eqe", "slope", "tail"]
    assert shown.marks[0].x == pytest.approx(1.6, abs=0.0005)
    assert "measured" in window.jv_plot.key.text()
    assert "modelled" not in window.jv_plot.key.text()
    sweep = jv_plot_of(picture).series[1]
    assert sweep.y.max() == pytest.approx(22.0, abs=0.1)
    assert eqe_plot_of(picture) is not None


def test_the_gap_follows_the_definition_chosen_and_can_be_undone(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    _open(window, _write_eqe(tmp_path / "eqe.txt"))
    settle()
    window.inputs.fields["gap"].asked.emit(1.7)
    settle()
    cell = window.session.state.cell
    assert cell is not None
    assert "gap" not in cell.sources
    _action(window, "edge mean").trigger()
    settle()
    cell = window.session.state.cell
    assert cell is not None
    assert cell.sources["gap"] == "edge mean"
    assert cell.values["gap"] == pytest.approx(1.6, abs=0.0005)
    assert window.session.undo_name == "gap from the edge mean"
    window.session.undo()
    settle()
    cell = window.session.state.cell
    assert cell is not None
    assert cell.values["gap"] == 1.7


def test_a_cell_without_an_eqe_is_told_what_to_do(window: Window) -> None:
    _action(window, "inflection").trigger()
    assert "has no EQE" in window.notices.text.text()


def test_a_file_that_is_neither_is_told_and_changes_nothing(window: Window, tmp_path: Path) -> None:
    (tmp_path / "letter.txt").write_text("Dear all,\nthe measurement is postponed.\nBest wishes\n")
    before = window.session.state
    window.intake.open_file(tmp_path / "letter.txt")
    assert window.session.state == before
    assert "letter.txt" in window.notices.text.text()


def test_what_was_understood_can_be_changed_and_is_remembered(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    rows = "\n".join(f"{w},{80.0 / (1.0 + np.exp(-(EV_NM / w - 1.6) / 0.015)):.5f}" for w in range(320, 900, 5))
    (tmp_path / "bare.csv").write_text(f"a,b\n{rows}\n")
    before = window.session.state
    window.intake.open_file(tmp_path / "bare.csv")
    settle()
    panel = window.intake._import
    assert panel is not None
    assert panel.isVisible()
    assert window.session.state == before  # nothing is taken before the user says so
    panel.kind.setCurrentIndex(panel.kind.findData("eqe"))
    panel.kind.activated.emit(panel.kind.currentIndex())
    for column, unit in ((3, "nm"), (5, "%")):
        box = panel.traces.cellWidget(0, column)
        assert isinstance(box, QComboBox)
        box.setCurrentIndex(box.findData(unit))
        box.activated.emit(box.currentIndex())
    assert panel.take_button.isEnabled()
    assert panel.preview.item(0, 0).text() == "320"
    assert panel.preview.item(0, 1).text() == "80"
    panel.take()
    settle()
    cell = window.session.state.cell
    assert cell is not None
    assert cell.curves.eqe is not None
    (tmp_path / "again.csv").write_text(f"a,b\n{rows}\n")
    window.intake.open_file(tmp_path / "again.csv")
    settle()
    assert panel.kind.currentData() == "eqe"
    assert panel.take_button.isEnabled()
    assert "again.csv" in panel.windowTitle()


def test_a_file_put_aside_changes_nothing_and_the_next_comes_up(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    before = window.session.state
    window.intake.open_file(_write_eqe(tmp_path / "first.txt"))
    window.intake.open_file(_write_sweep(tmp_path / "second.txt"))
    settle()
    panel = window.intake._import
    assert panel is not None
    assert "first.txt" in panel.windowTitle()
    panel.reject()
    settle()
    assert window.session.state == before
    assert "second.txt" in panel.windowTitle()
    assert panel.isVisible()
    panel.reject()
    settle()
    assert not panel.isVisible()


def test_a_doubtful_comma_is_asked_about_and_can_be_settled(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    lines = "1,000;1,935\n1,100;1,926\n1,150;1,917\n1,200;1,881"
    (tmp_path / "doubt.txt").write_text(f"Voltage (mV);Current (µA)\n{lines}\n", encoding="utf-8")
    window.intake.open_file(tmp_path / "doubt.txt")
    settle()
    panel = window.intake._import
    assert panel is not None
    assert "decimal marks or part thousands" in panel.questions.text()
    assert panel.preview.item(1, 0).text() == "0.0011"
    panel.decimal.setCurrentIndex(panel.decimal.findData("."))
    panel.decimal.activated.emit(0)
    assert panel.preview.item(1, 0).text() == "1.1"
    assert panel.questions.text() == ""
    panel.reject()


def test_a_choice_is_known_in_the_next_run(empty_window: Window, tmp_path: Path, home_of_its_own: Path) -> None:
    _open(empty_window, _write_sweep(tmp_path / "sweep.txt"))
    kept = list(home_of_its_own.rglob("readings.json"))
    assert len(kept) == 1
    assert '"version": 1' in kept[0].read_text(encoding="utf-8")


def test_spreadsheet_cells_are_pasted(empty_window: Window) -> None:
    window = empty_window
    clipboard = QGuiApplication.clipboard()
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.4, 2.0, 2000.0).curve(80)
    rows = "\n".join(f"{v:.4f}\t{j:.4f}" for v, j in zip(voltage, current, strict=True))
    clipboard.setText(f"Voltage (V)\tCurrent density (mA/cm²)\n{rows}\n")
    window.actions_.paste_.trigger()
    settle()
    panel = window.intake._import
    assert panel is not None
    assert panel.isVisible()
    assert "clipboard" in panel.windowTitle()
    panel.take()
    settle()
    cell = window.session.state.cell
    assert cell is not None
    assert cell.values["voc"] == pytest.approx(1.1, abs=1e-3)
    clipboard.setText("name\tgap_eV\tvoc_V\tjsc_mA_cm2\tff_pct\nPasted\t1,6\t1,1\t23\t79\n")
    window.actions_.paste_.trigger()
    settle()
    assert window.session.state.cells[-1].name == "Pasted"
    assert window.session.state.cells[-1].values["gap"] == 1.6
    before = window.session.state
    for text in ("", "   ", "hello there"):
        clipboard.setText(text)
        window.actions_.paste_.trigger()
        settle()
        assert window.session.state == before
        assert "clipboard" in window.notices.text.text().lower()


def test_pasting_into_a_field_stays_in_the_field(empty_window: Window) -> None:
    window = empty_window
    QGuiApplication.clipboard().setText("1.55")
    entry = window.inputs.fields["gap"].entry
    entry.setFocus()
    QTest.keyClick(entry, Qt.Key.Key_V, Qt.KeyboardModifier.ControlModifier)
    settle()
    assert entry.text() == "1.55"
    assert window.session.state.cell is not None
    assert window.session.state.cell.values["gap"] == 1.55


def test_the_figures_may_come_from_the_other_sweep(empty_window: Window) -> None:
    window = empty_window
    _action(window, "next sweep").trigger()
    assert "no second sweep" in window.notices.text.text()
    _open(window, Path(__file__).parents[2] / "resources" / "demo" / "plover_3_jv.txt")
    forward = window.session.state.cell
    assert forward is not None
    assert forward.values["voc"] == pytest.approx(1.048, abs=1e-3)
    assert forward.values["ideality"] == pytest.approx(1.55, abs=0.05)
    _action(window, "next sweep").trigger()
    settle()
    reverse = window.session.state.cell
    assert reverse is not None
    assert reverse.values["voc"] == pytest.approx(1.056, abs=1e-3)
    assert window.session.undo_name == "figures from the reverse sweep"
    assert [sweep.direction for sweep in reverse.curves.sweeps] == ["reverse", "forward"]
    assert "reverse" in window.notices.text.text()
    _action(window, "next sweep").trigger()
    settle()
    again = window.session.state.cell
    assert again is not None
    assert dict(again.values) == dict(forward.values)


def test_what_was_read_off_a_curve_says_so(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    _open(window, _write_eqe(tmp_path / "eqe.txt"))
    _open(window, _write_sweep(tmp_path / "sweep.txt"))
    fields = window.inputs.fields
    assert "the EQE: its inflection" in fields["gap"].entry.toolTip()
    assert "one-diode fit" in fields["rs"].entry.accessibleDescription()
    assert fields["voc"].entry.font().italic()
    assert not fields["temperature"].entry.font().italic()
    assert window.inputs.slanted.isVisible()
    fields["rs"].asked.emit(3.0)
    settle()
    assert "one-diode fit" not in fields["rs"].entry.toolTip()
    assert not fields["rs"].entry.font().italic()


def _combo(panel: ImportPanel, row: int, column: int) -> QComboBox:
    box = panel.traces.cellWidget(row, column)
    assert isinstance(box, QComboBox)
    return box


def test_the_preview_offers_the_sweep_that_feeds_the_figures(empty_window: Window) -> None:
    window = empty_window
    demo = Path(__file__).parents[2] / "resources" / "demo"
    window.intake.open_file(demo / "dunlin_2_jv.txt")
    settle()
    panel = window.intake._import
    assert panel is not None
    assert panel.sweep.isVisible()
    assert [panel.sweep.itemText(k) for k in range(panel.sweep.count())] == [
        "light, forward (lit)",
        "light, reverse (lit)",
    ]  # a dark sweep has no figures
    assert panel.sweep.currentIndex() == 0
    assert panel.chosen_first() == panel.curves
    panel.sweep.setCurrentIndex(1)
    light = _combo(panel, 0, 7)
    light.activated.emit(light.currentIndex())  # something else is looked at again: the choice stays
    assert panel.sweep.currentIndex() == 1
    panel.take()
    settle()
    cell = window.session.state.cell
    assert cell is not None
    assert [sweep.label for sweep in cell.curves.sweeps] == ["light, reverse", "light, forward", "dark"]
    assert "from the sweep light, reverse." in window.notices.text.text()
    window.intake.open_file(demo / "plover_3_eqe.csv")
    settle()
    assert panel.sweep.isHidden()
    panel.reject()
    window.intake.open_file(demo / "curlew_5_jv.csv")
    settle()
    assert panel.sweep.isVisible()
    assert panel.sweep.currentIndex() == 0  # another file, another choice
    panel.reject()


def test_with_one_sweep_left_there_is_nothing_to_choose(empty_window: Window) -> None:
    window = empty_window
    window.intake.open_file(Path(__file__).parents[2] / "resources" / "demo" / "plover_3_jv.txt")
    settle()
    panel = window.intake._import
    assert panel is not None
    panel.sweep.setCurrentIndex(1)
    used = panel.traces.cellWidget(1, 0)
    assert isinstance(used, QCheckBox)
    used.setChecked(False)
    assert panel.sweep.isHidden()
    panel.take()
    settle()
    cell = window.session.state.cell
    assert cell is not None
    assert cell.values["voc"] == pytest.approx(1.048, abs=1e-3)


def test_a_broken_memory_is_told_once(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    home = Path(QStandardPaths.writableLocation(QStandardPaths.StandardLocation.AppConfigLocation))
    home.mkdir(parents=True, exist_ok=True)
    (home / "readings.json").write_text("{ this is none", encoding="utf-8")
    window.intake.open_file(_write_eqe(tmp_path / "eqe.txt"))
    assert "readings.json cannot be read" in window.notices.text.text()
    window.notices.clear()
    window.intake.open_file(_write_eqe(tmp_path / "eqe.txt"))
    settle()
    assert window.notices.text.text() == ""
    panel = window.intake._import
    assert panel is not None
    panel.reject()
    panel.reject()
