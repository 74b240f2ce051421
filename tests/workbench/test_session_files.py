"""Sessions saved and opened in the window."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDropEvent, QImage
from PySide6.QtWidgets import QApplication, QFileDialog, QMessageBox, QSplitter

from app.session.commands import RemoveCell, SetValue
from app.session.document import to_text
from app.session_file import backup_of
from app.workbench.export_panel import ExportPanel
from app.workbench.start import make_window
from app.workbench.window import Window

from .conftest import settle


def _drop(window: Window, path: Path) -> None:
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path))])
    place = QPointF(10.0, 10.0)
    buttons = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    enter = QDragEnterEvent(place.toPoint(), Qt.DropAction.CopyAction, data, *buttons)
    QApplication.sendEvent(window, enter)
    assert enter.isAccepted()
    event = QDropEvent(place, Qt.DropAction.CopyAction, data, *buttons)
    QApplication.sendEvent(window, event)
    settle()


def _change(window: Window, value: float) -> None:
    cell = window.session.state.cell
    assert cell is not None
    window.session.do(SetValue(cell.ident, "voc", value))
    window.session.settle()
    settle()


def _answer(monkeypatch: pytest.MonkeyPatch, answer: QMessageBox.StandardButton) -> list[str]:
    asked: list[str] = []

    def question(parent: object, title: str, text: str, *_: object) -> QMessageBox.StandardButton:
        asked.append(text)
        return answer

    monkeypatch.setattr(QMessageBox, "question", question)
    return asked


def test_saved_dropped_and_the_same(window: Window, tmp_path: Path) -> None:
    path = tmp_path / "work.gapledger"
    window.session.pick(window.session.state.cells[3].ident)
    window.session.pick_line("nonradiative")
    settle()
    text, rows = to_text(window.session.state), window.table._model.rows
    assert window.files.save_to(path)
    _change(window, 0.6)
    window.session.pick(window.session.state.cells[1].ident)
    window.session.do(RemoveCell(window.session.state.cells[3].ident))
    settle()
    _drop(window, path)
    assert to_text(window.session.state) == text
    assert window.table._model.rows == rows
    assert window.session.undo_name == ""
    assert window.windowTitle() == "Dunlin 2 – work – Gapledger[*]"
    assert not window.files.unsaved


def test_the_mark_of_unsaved_changes_comes_and_goes(window: Window, tmp_path: Path) -> None:
    assert not window.isWindowModified()
    _change(window, 1.0)
    assert window.isWindowModified()
    window.session.undo()
    settle()
    assert not window.isWindowModified()  # as it was: nothing to save
    window.session.redo()
    settle()
    assert window.isWindowModified()
    assert window.files.save_to(tmp_path / "a.gapledger")
    assert not window.isWindowModified()
    window.session.pick(window.session.state.cells[2].ident)
    settle()
    assert not window.isWindowModified()  # looking is no change
    window.session.undo()
    settle()
    assert window.isWindowModified()


def test_the_version_before_is_kept(window: Window, tmp_path: Path) -> None:
    path = tmp_path / "a.gapledger"
    assert window.files.save_to(path)
    first = path.read_bytes()
    assert not backup_of(path).exists()
    _change(window, 1.0)
    assert window.files.save()
    assert backup_of(path).read_bytes() == first
    assert path.read_bytes() != first
    assert window.files.save()  # nothing new: the copy stays what it is
    assert backup_of(path).read_bytes() == first


def test_what_cannot_be_opened_changes_nothing(window: Window, tmp_path: Path) -> None:
    good = tmp_path / "good.gapledger"
    assert window.files.save_to(good)
    _change(window, 0.9)
    before, title = window.session.state, window.windowTitle()
    text = good.read_text(encoding="utf-8")
    broken = text[: len(text) // 2], text.replace('"version": 1', '"version": 7'), text.replace("1.6", "1e999")
    for k, bad in enumerate(broken):
        path = tmp_path / f"bad{k}.gapledger"
        path.write_text(bad, encoding="utf-8")
        window.intake.open_file(path)
        settle()
        assert window.session.state == before
        assert f"bad{k}.gapledger" in window.notices.text.text()
    assert window.windowTitle() == title
    (tmp_path / "latin.gapledger").write_bytes(text.replace("Plover", "Pl\xf6ver").encode("latin-1"))
    window.intake.open_file(tmp_path / "latin.gapledger")
    assert "latin.gapledger.previous" in window.notices.text.text()


def test_a_save_that_fails_is_told_and_leaves_the_mark(window: Window, tmp_path: Path) -> None:
    _change(window, 1.0)
    assert not window.files.save_to(tmp_path / "missing" / "a.gapledger")
    assert "was not saved" in window.notices.text.text()
    assert window.files.unsaved
    assert window.files.path is None


def test_closing_asks_and_does_what_is_said(
    window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    buttons = QMessageBox.StandardButton
    window.files.asks = True
    asked = _answer(monkeypatch, buttons.Cancel)
    _change(window, 1.0)
    assert not window.close()
    assert window.isVisible()
    assert asked == ["Save the changes to this session first?"]
    path = tmp_path / "kept.gapledger"
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: ("", ""))
    _answer(monkeypatch, buttons.Save)
    assert not window.close()  # no file was chosen after all
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: (str(path.with_suffix("")), ""))
    assert window.close()
    assert path.exists()
    window.show()
    _change(window, 0.8)
    asked = _answer(monkeypatch, buttons.Discard)
    assert window.close()
    assert asked == ["Save the changes to “kept.gapledger” first?"]
    assert '"voc": 0.8,' not in path.read_text(encoding="utf-8")
    window.files.asks = False


def test_opening_over_changes_asks_too(window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "a.gapledger"
    assert window.files.save_to(path)
    window.files.asks = True
    asked = _answer(monkeypatch, QMessageBox.StandardButton.Cancel)
    _change(window, 1.0)
    before = window.session.state
    window.intake.open_file(path)
    assert window.session.state == before
    assert len(asked) == 1
    window.files.asks = False


def test_recent_sessions(window: Window, tmp_path: Path) -> None:
    for k in range(10):
        assert window.files.save_to(tmp_path / f"s{k}.gapledger")
    window.files.recent.aboutToShow.emit()
    names = [Path(action.text()).name for action in window.files.recent.actions()]
    assert names == [f"s{k}.gapledger" for k in (9, 8, 7, 6, 5, 4, 3, 2)]
    window.files.recent.actions()[3].trigger()
    settle()
    assert window.files.path == tmp_path / "s6.gapledger"


def test_a_session_as_an_argument(window: Window, tmp_path: Path) -> None:
    path = tmp_path / "a.gapledger"
    window.session.pick(window.session.state.cells[2].ident)
    assert window.files.save_to(path)
    made = make_window([str(path)])
    assert made.session.state.cell is not None
    assert made.session.state.cell.name == "Curlew 5"
    assert made.files.path == path
    made.close()
    made.deleteLater()


def test_a_picture_brings_its_cell_back(window: Window, tmp_path: Path) -> None:
    cell = window.session.state.cells[1]
    window.session.pick(cell.ident)
    settle()
    panel = ExportPanel(window.outcomes, window)
    panel.save(tmp_path / "chart.png")
    assert not QImage(str(tmp_path / "chart.png")).isNull()
    wanted = window.table._model.rows
    window.session.do(RemoveCell(cell.ident))
    settle()
    _drop(window, tmp_path / "chart.png")
    assert window.session.undo_name == "cell of a picture"
    assert window.session.state.cell is not None
    assert window.session.state.cell.name == cell.name
    assert window.table._model.rows == wanted  # the identical ledger
    panel.deleteLater()


def test_a_picture_with_curves_and_stacks(window: Window, tmp_path: Path) -> None:
    old = Path(__file__).parents[1] / "data" / "sessions" / "form-1.gapledger"
    window.intake.open_file(old)
    settle()
    cell, rows = window.session.state.cell, window.table._model.rows
    assert cell is not None
    assert cell.curves.eqe is not None
    panel = ExportPanel(window.outcomes, window)
    panel.save(tmp_path / "chart.png")
    _drop(window, tmp_path / "chart.png")
    assert len(window.session.state.cells) == 3
    assert window.table._model.rows == rows
    panel.deleteLater()


def test_a_picture_of_others_is_told(window: Window, tmp_path: Path) -> None:
    picture = QImage(4, 4, QImage.Format.Format_RGB32)
    picture.fill(0)
    assert picture.save(str(tmp_path / "other.png"))
    before = window.session.state
    window.intake.open_file(tmp_path / "other.png")
    assert window.session.state == before
    assert "carries no cell" in window.notices.text.text()


def test_a_pdf_carries_its_cell(window: Window, tmp_path: Path) -> None:
    panel = ExportPanel(window.outcomes, window)
    panel.kind.setCurrentIndex(panel.kind.findData("pdf"))
    panel.save(tmp_path / "chart.pdf")
    data = (tmp_path / "chart.pdf").read_bytes()
    assert b"/EmbeddedFile" in data
    assert b"cell.gapledger" in data or "cell.gapledger".encode("utf-16-be") in data
    panel.deleteLater()


def test_the_layout_is_known_in_the_next_run(window: Window) -> None:
    window.resize(780, 690)  # the screen of the tests has 800 by 800
    splitters = window.findChildren(QSplitter)
    splitters[0].setSizes([250, 300, 230])
    settle()
    sizes = [splitter.sizes() for splitter in splitters]
    window.remember_layout()
    other = make_window([])
    other.restore_layout()
    other.show()
    settle()
    assert (other.width(), other.height()) == (window.width(), window.height())
    for splitter, wanted in zip(other.findChildren(QSplitter), sizes, strict=True):
        assert splitter.sizes() == pytest.approx(wanted, abs=2)
    other.close()
    other.deleteLater()


def test_a_broken_memory_of_the_layout_does_no_harm(window: Window, home_of_its_own: Path) -> None:
    window.remember_layout()
    (kept,) = home_of_its_own.rglob("window.ini")
    for content in (b"", b"[General]\ngeometry=nonsense\nsplitter0=@ByteArray(x)\nrecent=7\n", b"\xff\xfe\0\0[["):
        kept.write_bytes(content)
        other = make_window([])
        other.restore_layout()
        other.files.recent.aboutToShow.emit()
        other.close()
        other.deleteLater()
