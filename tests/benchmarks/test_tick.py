"""What a tick of a slider costs, beside a bare repaint of the same plots with ready-made data.

Three things are timed in turn, so that a slow phase of the machine meets all of them:

- a tick while a slider is held: the field, the whole calculation, the waterfall and both plots, painted; the table, the
  shelf and the explanation follow twenty times a second, as they do for a user;
- a tick with all of these in the same frame (a change that does not come from a held slider);
- a bare repaint: the same waterfall and the same two plots in a window of their own, fed with descriptions that were
  made beforehand. Fixed ranges, cached axes, no calculation, no other widget.

All three show numbers that were not on the screen before in that round, as a user's drag does.
"""

from __future__ import annotations

import itertools
import statistics
import time
from collections.abc import Callable, Iterator

import numpy as np
import pytest
from PySide6.QtWidgets import QApplication, QHBoxLayout, QVBoxLayout, QWidget

from app.figures.all_plots import BESIDE, JV, Plot
from app.figures.charts import waterfall_of
from app.figures.spec import PlotSpec, WaterfallSpec
from app.session.commands import SetValue
from app.workbench.plot_view import PlotView
from app.workbench.start import application, make_window
from app.workbench.waterfall_view import WaterfallView
from app.workbench.window import Window

from .record import write

_FRAME_MS = 1000.0 / 60.0
_CELL = 1  # the demo cell of which everything is known: ERE, ideality, Rs and Rsh
_CELL_WITH_CURVES = 0
_LINE = "nonradiative"
_WARM = 5  # ticks before each round's clock starts


def _settle() -> None:
    for _ in range(5):
        QApplication.processEvents()


def _answer() -> None:
    """One turn of the event loop works out what follows from the change, the next one paints it."""
    QApplication.processEvents()
    QApplication.processEvents()


class Bare(QWidget):
    """The plots alone."""

    def __init__(self, window: Window) -> None:
        super().__init__()
        self.waterfall = WaterfallView(window.theme)
        self.jv_plot = PlotView(JV.title, window.theme)
        self.beside = PlotView(_up(window).title, window.theme)
        row = QHBoxLayout()
        row.addWidget(self.jv_plot)
        row.addWidget(self.beside)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self.waterfall)
        column.addLayout(row)
        theirs = window.waterfall, window.jv_plot, window.beside[_up(window).key]
        for mine, like in zip(self.views, theirs, strict=True):
            mine.setFixedSize(like.size())
        for plot in (self.jv_plot, self.beside):
            assert plot.canvas is not None

    @property
    def views(self) -> tuple[QWidget, QWidget, QWidget]:
        return self.waterfall, self.jv_plot, self.beside


def _up(window: Window) -> Plot:
    """The plot whose tab is up."""
    return BESIDE[window._tabs.currentIndex()]


def _shown(made: Window, cell: int) -> Iterator[Window]:
    made.resize(1280, 800)
    made.show()
    _settle()
    if made.intake._loader is not None:
        made.intake._loader.wait()
        _settle()
    made.session.pick(made.session.state.cells[cell].ident)
    made.session.pick_line(_LINE)
    _settle()
    yield made
    made.close()
    made.deleteLater()
    _settle()


@pytest.fixture
def window(qapp: QApplication) -> Iterator[Window]:
    """On a cell known by its figures."""
    application([])
    qapp.setStyle("Fusion")
    made = make_window(["demo"])
    made.intake.leave_curves()
    yield from _shown(made, _CELL)


@pytest.fixture
def window_with_curves(qapp: QApplication) -> Iterator[Window]:
    """On a cell with sweeps, an EQE and a reflectance, its EQE in view."""
    application([])
    qapp.setStyle("Fusion")
    for made in _shown(make_window(["demo"]), _CELL_WITH_CURVES):
        made._tabs.setCurrentIndex([plot.key for plot in BESIDE].index("eqe"))
        _settle()
        cell = made.session.state.cell
        assert cell is not None
        assert cell.curves.sweeps
        assert made.beside["eqe"].isVisible()
        yield made


def _measure(window: Window, rounds: int, ticks: int, key: str = "voc") -> dict[str, object]:
    slider = window.inputs.fields[key].slider
    ident = window.session.state.picked
    assert ident is not None
    middle = slider.sliderPosition()
    cell = window.session.state.cell
    assert cell is not None
    jsc, centre = cell.values["jsc"], cell.values[key]
    assert isinstance(jsc, float)
    assert isinstance(centre, float)
    shades = (jsc - 0.001 * k for k in itertools.count())
    specs: list[tuple[WaterfallSpec, PlotSpec, PlotSpec]] = []
    bare = Bare(window)
    bare.show()
    _settle()

    def other_numbers() -> None:
        """Another Jsc, so that no text is at hand from an earlier round."""
        window.session.do(SetValue(ident, "jsc", next(shades)))
        _settle()

    def value(k: int) -> float:
        return round(centre + 0.001 * (abs(k % 80 - 40) - 20), 4)

    def held(k: int) -> None:
        slider.setSliderPosition(middle - 20 + abs(k % 80 - 40))
        _answer()

    def together(k: int) -> None:
        window.session.do(SetValue(ident, key, value(k)))
        _answer()

    def prepare(k: int) -> None:
        window.session.do(SetValue(ident, key, value(k)))
        picture = window.outcomes.current().picture
        assert picture is not None
        jv_plot, beside = (plot.describe(picture, captioned=False) for plot in (JV, _up(window)))
        assert jv_plot is not None
        assert beside is not None
        specs.append((waterfall_of(picture), jv_plot, beside))

    def repaint(k: int) -> None:
        waterfall, jv_plot, beside = specs[k]
        bare.waterfall.show_spec(waterfall, _LINE)
        bare.jv_plot.show_spec(jv_plot)
        bare.beside.show_spec(beside)
        _answer()

    timed: dict[str, list[list[float]]] = {"held": [], "together": [], "bare": []}
    for _ in range(rounds):
        other_numbers()
        slider.setSliderDown(True)
        timed["held"].append(_times(held, ticks))
        slider.setSliderDown(False)
        other_numbers()
        timed["together"].append(_times(together, ticks))
        other_numbers()
        specs.clear()
        for k in range(ticks + _WARM):
            prepare(k)
        _settle()
        timed["bare"].append(_times(repaint, ticks))
    bare.close()
    bare.deleteLater()
    figures: dict[str, object] = {"rounds": rounds, "ticks_a_round": ticks, "window": [1280, 800]}
    medians = {name: [statistics.median(times) for times in of_rounds] for name, of_rounds in timed.items()}
    for name, of_rounds in timed.items():
        figures[f"{name}_median_ms"] = statistics.median(medians[name])
        figures[f"{name}_p95_ms"] = float(np.percentile(of_rounds, 95))
    for name in ("held", "together"):
        # Round by round, because these machines change their speed by half within seconds.
        ratios = [mine / plain for mine, plain in zip(medians[name], medians["bare"], strict=True)]
        figures[f"{name}_over_bare"] = statistics.median(ratios)
        figures[f"{name}_mean_over_bare_mean"] = float(np.mean(timed[name]) / np.mean(timed["bare"]))
    figures["frame_ms"] = _FRAME_MS
    return figures


def _times(tick: Callable[[int], None], count: int) -> list[float]:
    for k in range(_WARM):
        tick(k)
    times = []
    for k in range(_WARM, _WARM + count):
        start = time.perf_counter()
        tick(k)
        times.append(1000.0 * (time.perf_counter() - start))
    return times


def test_a_tick_is_not_much_more_than_its_repaint(window: Window) -> None:
    figures = _measure(window, rounds=5, ticks=20)
    write("tick", "short", figures)
    assert figures["held_over_bare"] < 2.5, figures  # a guard against mishaps; the long run has the real bound
    assert figures["together_over_bare"] < 4.0, figures


@pytest.mark.parametrize("key", ["voc", "gap"])
def test_a_tick_with_curves_too(window_with_curves: Window, key: str) -> None:
    figures = _measure(window_with_curves, rounds=3, ticks=15, key=key)
    write("tick", f"curves, {key}, short", figures)
    assert figures["held_over_bare"] < 3.0, figures  # a guard, as above


@pytest.mark.slow
@pytest.mark.parametrize("key", ["voc", "gap"])
def test_a_slider_tick_with_curves_stays_within_one_and_a_half_repaints_and_a_frame(
    window_with_curves: Window, key: str
) -> None:
    figures = _measure(window_with_curves, rounds=40, ticks=20, key=key)
    write("tick", f"curves, {key}, long", figures)
    assert figures["held_over_bare"] <= 1.5, figures
    assert figures["held_p95_ms"] < _FRAME_MS, figures


@pytest.fixture(scope="module")
def long_run() -> dict[str, dict[str, object]]:
    """The figures of the long run, once they are there."""
    return {}


def _long(window: Window, kept: dict[str, dict[str, object]]) -> dict[str, object]:
    if "tick" not in kept:
        kept["tick"] = _measure(window, rounds=60, ticks=20)
        write("tick", "long", kept["tick"])
    return kept["tick"]


@pytest.mark.slow
def test_a_slider_tick_stays_within_one_and_a_half_repaints(
    window: Window, long_run: dict[str, dict[str, object]]
) -> None:
    figures = _long(window, long_run)
    assert figures["held_over_bare"] <= 1.5, figures


@pytest.mark.slow
def test_a_tick_stays_within_a_frame(window: Window, long_run: dict[str, dict[str, object]]) -> None:
    figures = _long(window, long_run)
    assert figures["held_p95_ms"] < _FRAME_MS, figures
    assert figures["together_p95_ms"] < _FRAME_MS, figures


@pytest.mark.slow
@pytest.mark.xfail(strict=True, reason="measured 1.52 to 1.60: the texts of table, shelf and explanation are too much")
def test_every_panel_in_the_same_frame_stays_within_one_and_a_half_repaints(
    window: Window, long_run: dict[str, dict[str, object]]
) -> None:
    assert _long(window, long_run)["together_over_bare"] <= 1.5  # type: ignore[operator]
