"""The window as a user meets it."""

from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QColor, QDropEvent, QGuiApplication, QPalette
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QAbstractButton, QApplication, QComboBox, QLineEdit, QSlider, QWidget

from app.cells import cell_table, shelf_of
from app.figures.presets import PRESETS
from app.files.tables import read_table
from app.ledger_rows import ledger_csv
from app.session.state import CellEntry
from app.wording import explain
from app.workbench.export_panel import ExportPanel
from app.workbench.window import Window
from physics.lines import LINES

from .conftest import settle


def _type(window: Window, key: str, text: str) -> None:
    entry = window.inputs.fields[key].entry
    entry.setFocus()
    entry.selectAll()
    QTest.keyClicks(entry, text)
    settle()


def _cell(window: Window) -> CellEntry:
    cell = window.session.state.cell
    assert cell is not None
    return cell


def test_from_a_slip_of_paper_to_a_picture(empty_window: Window, tmp_path: Path) -> None:
    window = empty_window
    assert window.outcomes.current().picture is None
    for key, text in (("gap", "1,12"), ("voc", "738 mV"), ("jsc", "42.65"), ("ff", "84.9")):
        _type(window, key, text)
    picture = window.outcomes.current().picture
    assert picture is not None
    assert float(picture.ledger.efficiency) == pytest.approx(0.2672, abs=5e-5)
    window.actions_.show_export()
    settle()
    panel = window.actions_._export
    assert isinstance(panel, ExportPanel)
    panel.save(tmp_path / "cell.png")
    assert (tmp_path / "cell.png").read_bytes().startswith(b"\x89PNG")


def test_plots_come_after_the_first_paint(window: Window) -> None:
    for plot in (window.jv_plot, window.gap_plot):
        assert plot.canvas.isVisible()


@pytest.mark.parametrize("at", range(6))
def test_each_demo_cell_has_a_ledger(window: Window, at: int) -> None:
    window.session.pick(window.session.state.cells[at].ident)
    settle()
    outcome = window.outcomes.current()
    assert outcome.picture is not None
    assert outcome.appraisal is not None
    assert outcome.appraisal.problems == ()
    assert _cell(window).name in window.windowTitle()
    # The table has the sunlight as well; the chart has the limit twice, as a piece of the strip and as a row.
    keys = [row.key for row in window.table._model.rows]
    assert keys == ["sunlight", *dict.fromkeys(key for key, _ in window.waterfall._hits)]


def test_picking_a_bar_tells_how_it_was_computed(window: Window) -> None:
    for key, area in list(window.waterfall._hits):
        QTest.mouseClick(
            window.waterfall, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, area.center().toPoint()
        )
        settle()
        picture = window.outcomes.current().picture
        assert picture is not None
        assert window.session.state.line == key
        assert explain(picture.ledger, key).amount in window.explanation.text


def test_arrow_keys_walk_the_bars_and_the_table(window: Window) -> None:
    window.waterfall.setFocus()
    QTest.keyClick(window.waterfall, Qt.Key.Key_Down)
    settle()
    first = window.session.state.line
    QTest.keyClick(window.waterfall, Qt.Key.Key_Down)
    settle()
    assert first
    assert window.session.state.line not in ("", first)
    walked = window.session.state.line
    window.table.setFocus()
    QTest.keyClick(window.table, Qt.Key.Key_Down)
    settle()
    keys = [row.key for row in window.table._model.rows]
    assert window.session.state.line == keys[keys.index(walked) + 1]
    picture = window.outcomes.current().picture
    assert picture is not None
    assert explain(picture.ledger, window.session.state.line).title in window.explanation.text


@pytest.mark.parametrize("attribution", ["log-mean", "ladder"])
def test_every_line_of_every_cell_is_explained_with_its_numbers(window: Window, attribution: str) -> None:
    box = window.actions_.attribution
    box.setCurrentIndex(box.findData(attribution))
    box.activated.emit(box.currentIndex())
    settle()
    for cell in window.session.state.cells:
        picture = window.outcomes.of(cell).picture
        assert picture is not None
        assert picture.ledger.attribution == attribution
        for line in LINES:
            entry = picture.ledger[line.key]
            explanation = explain(picture.ledger, line.key)
            assert explanation.source
            if not bool(entry.present):
                assert explanation.amount == "not in this ledger"
                continue
            share = -100 * float(entry.loss) / float(picture.ledger.limit.incident)
            assert f"{abs(share):.2f}" in explanation.amount
            assert explanation.basis
            assert "{" not in "".join(explanation.steps)


def test_a_fault_is_told_beside_its_field_and_the_picture_stays(window: Window) -> None:
    _type(window, "voc", "1.9")
    field = window.inputs.fields["voc"]
    assert field.message.isVisible()
    assert "above the limit" in field.message.text()
    outcome = window.outcomes.current()
    assert outcome.stale
    assert outcome.picture is not None
    assert float(outcome.picture.ledger.cell.voc) == 1.048  # the last that was shown: keys in one turn are one change
    assert window.waterfall._spec is not None
    assert window.waterfall._spec.stale
    for head in (*window._heads, window.jv_plot.head, window.gap_plot.head):
        assert "last valid input" in head.text()
    assert not window.actions_.export.isEnabled()
    _type(window, "voc", "1.1")
    assert not field.message.isVisible()
    assert not window.outcomes.current().stale
    assert window.actions_.export.isEnabled()


def test_a_drawn_curve_is_not_passed_off_as_measured(window: Window) -> None:
    assert "(modelled)" in window.jv_plot.key.text()


def test_nothing_modal_comes_up_while_typing(window: Window) -> None:
    for key in window.inputs.fields:
        for text in ("x", "-1", "1e999", "99999999", ""):
            _type(window, key, text)
            assert QApplication.activeModalWidget() is None


def test_cells_by_their_actions(window: Window) -> None:
    names = [c.name for c in window.session.state.cells]
    actions = window.actions_
    actions.duplicate.trigger()
    settle()
    assert _cell(window).name == f"{names[0]} (copy)"
    actions.remove.trigger()
    assert [c.name for c in window.session.state.cells] == names
    actions.new.trigger()
    settle()
    assert window.outcomes.current().picture is None
    actions.undo.trigger()
    actions.undo.trigger()
    actions.undo.trigger()
    assert [c.name for c in window.session.state.cells] == names
    settle()
    assert not actions.undo.isEnabled()
    actions.redo.trigger()
    assert len(window.session.state.cells) == len(names) + 1


def test_the_last_cell_may_go_and_a_new_one_come(window: Window) -> None:
    for _ in range(6):
        window.actions_.remove.trigger()
        settle()
    assert window.session.state.cells == ()
    assert "Ctrl+N" in window.waterfall._hint
    assert not window.actions_.duplicate.isEnabled()
    window.actions_.new.trigger()
    settle()
    assert len(window.session.state.cells) == 1


def test_conventions_are_undone_too(window: Window) -> None:
    box = window.actions_.faces
    box.setCurrentIndex(1)
    box.activated.emit(1)
    settle()
    assert window.session.state.choices.faces == 2
    window.session.undo()
    settle()
    assert box.currentData() == 1


def test_tables_open_and_broken_ones_are_told(window: Window, tmp_path: Path) -> None:
    good = tmp_path / "good.csv"
    good.write_text("name;gap_eV;voc_V;jsc_mA_cm2;ff_pct\na;1,6;1,1;22,5;78\n;1,6;1,1;22,5;78\nb;1,6;abc;22,5;78\n")
    window.intake.open_file(good)
    settle()
    assert "2 cells taken from good.csv" in window.notices.text.text()
    assert "Line 3" in window.notices.text.text()
    assert _cell(window).values["jsc"] == 22.5
    window.intake.open_file(tmp_path / "none.csv")
    assert "does not exist" in window.notices.text.text()
    (tmp_path / "bad.csv").write_bytes(b"\0\1\2")
    count = len(window.session.state.cells)
    window.intake.open_file(tmp_path / "bad.csv")
    assert "not text" in window.notices.text.text()
    assert len(window.session.state.cells) == count


def test_a_dropped_table_opens(window: Window, tmp_path: Path) -> None:
    table = tmp_path / "t.csv"
    table.write_text("name,gap_eV,voc_V,jsc_mA_cm2,ff_pct\ndropped,1.6,1.1,22.5,78\n")
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(table))])
    event = QDropEvent(
        QPointF(50, 50), Qt.DropAction.CopyAction, data, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    )
    window.dropEvent(event)
    assert _cell(window).name == "dropped"


def test_the_shelf_is_saved_and_read_back(window: Window, tmp_path: Path) -> None:
    _type(window, "ere", "abc")
    cells = window.session.state.cells
    window.actions_.save_text(tmp_path / "cells.csv", cell_table(cells))
    table = read_table((tmp_path / "cells.csv").read_bytes(), "cells.csv")
    shelf = shelf_of(table, "cells.csv")
    back, left_out = shelf.entries, shelf.left_out
    assert left_out == ()
    for mine, theirs in zip(cells, back, strict=True):
        assert (mine.name, mine.group, mine.note, mine.spectrum) == (
            theirs.name, theirs.group, theirs.note, theirs.spectrum,
        )  # fmt: skip
        for key, value in mine.values.items():
            if isinstance(value, float):
                assert theirs.values[key] == value


def test_the_ledger_file_adds_up(window: Window) -> None:
    picture = window.outcomes.current().picture
    assert picture is not None
    table = read_table(ledger_csv(picture).encode(), "ledger")
    powers = [float(row[table.columns.index("power_mW_cm2")]) for row in table.rows]
    lines = [p for p, row in zip(powers, table.rows, strict=True) if row[table.columns.index("family")]]
    assert powers[0] + sum(lines) == pytest.approx(powers[-1], abs=1e-9)
    window.actions_.copy_table.trigger()
    copied = QGuiApplication.clipboard().text()
    assert copied.count("\n") >= len(table.rows)
    assert "\t" in copied


def test_the_clipboard_holds_a_slide(window: Window) -> None:
    window.actions_.copy_chart.trigger()
    image = QGuiApplication.clipboard().image()
    assert (image.width(), image.height()) == (1920, 1080)


@pytest.mark.parametrize("chart", ["waterfall", "jv", "gap", "spectrum"])
@pytest.mark.parametrize("preset", PRESETS)
def test_every_picture_in_every_size(window: Window, tmp_path: Path, chart: str, preset: str) -> None:
    panel = ExportPanel(window.outcomes, window)
    panel.chart.setCurrentIndex(panel.chart.findData(chart))
    panel.preset.setCurrentIndex(panel.preset.findData(preset))
    for ground in ("white", "transparent"):
        panel.background.setCurrentIndex(panel.background.findData(ground))
        panel.save(tmp_path / f"{ground}.png")
        assert (tmp_path / f"{ground}.png").read_bytes().startswith(b"\x89PNG")
    panel.save(tmp_path / "missing" / "x.png")
    assert "was not saved" in panel.message.text()
    panel.deleteLater()


def test_pictures_do_not_depend_on_the_window(window: Window, tmp_path: Path, qapp: QApplication) -> None:
    panel = ExportPanel(window.outcomes, window)
    panel.save(tmp_path / "small.png")
    light = qapp.palette()
    window.resize(1900, 1000)
    qapp.setPalette(QPalette(QColor("#202428")))
    settle()
    assert window.theme.palette.key == "dark"
    panel.save(tmp_path / "large.png")
    qapp.setPalette(light)
    settle()
    assert window.theme.palette.key == "light"
    assert (tmp_path / "small.png").read_bytes() == (tmp_path / "large.png").read_bytes()
    panel.deleteLater()


def test_an_unforeseen_fault_is_told_and_work_goes_on(window: Window, capsys: pytest.CaptureFixture[str]) -> None:
    try:
        raise RuntimeError("boom")
    except RuntimeError as fault:
        window.faults.exception(RuntimeError, fault, fault.__traceback__)
    settle()
    assert "boom" in window.notices.text.text()
    assert "Traceback" in capsys.readouterr().err
    _type(window, "voc", "1.1")
    assert not window.outcomes.current().stale


def test_everything_has_a_name_for_a_screen_reader(window: Window) -> None:
    for widget in window.findChildren(QWidget):
        if isinstance(widget, QLineEdit | QSlider | QComboBox) and widget.isVisible():
            assert widget.accessibleName(), widget
        if isinstance(widget, QAbstractButton) and widget.isVisible():
            assert widget.accessibleName() or widget.text(), widget
    for view in (window.waterfall, window.table, window.shelf, window.explanation, window.jv_plot.canvas):
        assert view.accessibleName()


@pytest.mark.parametrize("size", [(1024, 640), (1280, 800), (1920, 1080)])
def test_no_input_is_cut_off_or_covered(window: Window, size: tuple[int, int]) -> None:
    window.resize(*size)
    _type(window, "voc", "1.9")
    _type(window, "ff", "0.7")
    _type(window, "rs", "abc")
    settle()
    page = window.inputs.widget()
    assert page.width() <= window.inputs.viewport().width()
    bottom = 0
    for field in window.inputs.fields.values():
        top = field.mapTo(page, field.rect().topLeft()).y()
        assert top >= bottom
        bottom = top + field.height()
        assert field.height() >= field.entry.height()
        for part in (field.label, field.entry, field.unit, field.slider, field.message):
            if part.isVisible():
                assert field.rect().contains(part.geometry()), (field.field.key, part)
        shown = field.message
        if shown.isVisible():
            assert shown.height() >= shown.heightForWidth(shown.width()) - 1
            assert shown.y() >= field.entry.geometry().bottom()


def test_the_help_opens_beside_the_window(window: Window) -> None:
    window.actions_.show_help()
    settle()
    assert window.actions_._help is not None
    assert not window.actions_._help.isModal()
