"""The plots that share a place on tabs: which there are, what they cost, and that nothing in them is cut."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QFontMetricsF
from PySide6.QtWidgets import QApplication, QMenuBar

from app.figures.all_plots import BESIDE, Plot
from app.figures.spec import Mark, PlotSpec
from app.session.commands import AddCells
from app.session.curves import Curves, Sweep
from app.session.outcome import Picture
from app.session.stacks import Reading, StackReadings
from app.session.state import EMPTY_VALUES, CellEntry
from app.workbench import window as window_module
from app.workbench.plot_canvas import PlotCanvas
from app.workbench.plot_view import PlotView
from app.workbench.window import Window
from physics.diode import Diode
from physics.light_series import LightSeries
from physics.quantum import Curve
from physics.units import EV_NM

from .conftest import settle

KEYS = [plot.key for plot in BESIDE]


def _entry() -> CellEntry:
    """A cell of which everything was measured, and whose names are long."""
    rng = np.random.default_rng(12)
    voltage, current = Diode.through(1.1, 22.0, 298.15, 1.4, 2.0, 2000.0).curve(120)
    current = current + 0.02 * rng.standard_normal(120)
    current[30] += 2.0
    sweeps = tuple(
        Sweep(way, voltage[::turn], current[::turn], way) for way, turn in (("forward", 1), ("reverse", -1))
    )
    wavelength = np.arange(310.0, 900.0, 5.0)
    eqe = Curve(wavelength, 0.85 / (1.0 + np.exp(-(EV_NM / wavelength - 1.6) / 0.015)))
    light = np.geomspace(0.02, 1.2, 12) * 22.0
    noisy = 1.1 + 1.4 * 0.02569 * np.log(light / 22.0) + 0.001 * rng.standard_normal(12)
    curves = Curves(sweeps, eqe, Curve(wavelength, np.full(wavelength.size, 0.08)), LightSeries.of(light, noisy))
    stacks = StackReadings(Reading(0.02), (("electron transport layer", Reading(0.002)),), Reading(6e-4))
    values = {**EMPTY_VALUES, "gap": 1.6, "voc": 1.1, "jsc": 22.0, "ff": 79.0}
    return CellEntry(0, "Cell 7", values=values, curves=curves, stacks=stacks)


@pytest.fixture
def full_window(empty_window: Window) -> Window:
    empty_window.session.do(AddCells((_entry(),)))
    settle()
    return empty_window


def _show(window: Window, key: str) -> PlotView:
    window._tabs.setCurrentIndex(KEYS.index(key))
    settle()
    return window.beside[key]


def _frame(canvas: PlotCanvas) -> QRectF:
    """The inside of the axes [px], a pixel wider."""
    return canvas.getViewBox().sceneBoundingRect().adjusted(-1.0, -1.0, 1.0, 1.0)  # type: ignore[no-any-return]


def _box(canvas: PlotCanvas, mark: Mark) -> QRectF:
    """Where the text of a mark stands [px]."""
    label = canvas._labels[mark.key]
    return label.deviceTransform(canvas.viewportTransform()).mapRect(label.boundingRect())


def test_a_cell_has_tabs_for_what_was_measured(full_window: Window) -> None:
    tabs = full_window._tabs
    assert [key for at, key in enumerate(KEYS) if tabs.isTabVisible(at)] == KEYS
    _show(full_window, "emission")
    bare = replace(_entry(), curves=Curves(), stacks=StackReadings(None, (), None))
    full_window.session.do(AddCells((bare,)))
    settle()
    assert [key for at, key in enumerate(KEYS) if tabs.isTabVisible(at)] == ["gap", "spectrum"]
    assert KEYS[tabs.currentIndex()] in ("gap", "spectrum")  # the tab that was up is gone


def test_a_letter_brings_up_one_tab_or_menu() -> None:
    letters = [re.search(r"&(\w)", plot.tab) for plot in BESIDE]
    assert all(letters)
    tabs = [letter.group(1).lower() for letter in letters if letter is not None]
    assert len(set(tabs)) == len(tabs)


def test_the_letters_of_the_tabs_are_not_those_of_the_menus(full_window: Window) -> None:
    bar = full_window.findChild(QMenuBar)
    assert bar is not None
    menus = {re.search(r"&(\w)", action.text()).group(1).lower() for action in bar.actions()}  # type: ignore[union-attr]
    tabs = {re.search(r"&(\w)", plot.tab).group(1).lower() for plot in BESIDE}  # type: ignore[union-attr]
    assert not menus & tabs


def test_only_the_plot_that_is_up_is_described(full_window: Window, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[str] = []

    def counting(plot: Plot) -> Plot:
        def describe(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
            asked.append(plot.key)
            return plot.describe(picture, stale, captioned=captioned)

        return replace(plot, describe=describe)

    monkeypatch.setattr(window_module, "BESIDE", tuple(counting(plot) for plot in BESIDE))
    full_window.refresh()
    assert asked == ["gap"]
    asked.clear()
    _show(full_window, "fit")
    assert set(asked) == {"fit"}


def test_a_canvas_is_made_on_first_need(full_window: Window) -> None:
    made = [key for key in KEYS if full_window.beside[key]._canvas is not None]
    assert made == ["gap"]
    assert _show(full_window, "series")._canvas is not None
    assert full_window.beside["emission"]._canvas is None


@pytest.mark.parametrize("size", [(1024, 640), (1280, 800), (1920, 1080)])
@pytest.mark.parametrize("key", KEYS)
def test_nothing_is_cut(full_window: Window, key: str, size: tuple[int, int]) -> None:
    full_window.resize(*size)
    settle()
    view = _show(full_window, key)
    settle()
    canvas = view.canvas
    assert view._spec is not None
    assert view.key.height() >= view.key.heightForWidth(view.key.width())
    assert canvas.geometry().bottom() <= view.height()
    assert canvas.geometry().top() >= view.key.geometry().bottom()
    for mark in view._spec.marks:
        assert _frame(canvas).contains(_box(canvas, mark)), mark.label
    bar = full_window._tabs.tabBar()
    for at in range(bar.count()):
        name = bar.tabText(at).replace("&", "")
        assert bar.tabRect(at).width() > QFontMetricsF(bar.font()).horizontalAdvance(name)


def test_a_label_without_room_above_its_mark_stays_in_the_frame(full_window: Window) -> None:
    canvas = full_window.jv_plot.canvas
    spec = full_window.jv_plot._spec
    assert spec is not None
    high = tuple(replace(mark, y=spec.y_range[1] * 0.995) for mark in spec.marks)
    canvas.show_spec(replace(spec, marks=high))
    QApplication.processEvents()
    for mark in high:
        assert _frame(canvas).contains(_box(canvas, mark)), mark.label


def test_dots_have_no_line_and_areas_are_filled(full_window: Window) -> None:
    fit = _show(full_window, "fit").canvas
    assert fit._curves["residual"].opts["pen"].style() is Qt.PenStyle.NoPen
    assert fit._curves["residual"].opts["symbol"] == "o"
    spectrum = _show(full_window, "spectrum").canvas
    tone = full_window.theme.palette.tones["cell"].fill
    assert spectrum._curves["collected"].opts["brush"].color().name() == tone


def test_the_figures_stand_beside_the_key(full_window: Window) -> None:
    for key, told in (("fit", "Rsh"), ("emission", "J0,rad")):
        view = _show(full_window, key)
        assert view._spec is not None
        assert told in view._spec.note
        assert told in view.key.text()
