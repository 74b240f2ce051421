"""What a tick of a slider costs, beside a bare repaint of the same plots with ready-made data.

Three things are timed in turn, so that a slow phase of the machine meets all of them:

- a tick while a slider is held: the field, the whole calculation, the waterfall and both plots, painted; the table, the
  shelf and the explanation follow twenty times a second, as they do for a user;
- a tick with all of these in the same frame (a change that does not come from a held slider);
- a bare repaint: the same waterfall and the same two plots in a window of their own, fed with descriptions that were
  made beforehand. Fixed ranges, cached axes, no calculation, no other widget.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable, Iterator

import numpy as np
import pytest
from PySide6.QtWidgets import QApplication, QHBoxLayout, QVBoxLayout, QWidget

from app.figures.charts import gap_plot_of, jv_plot_of, waterfall_of
from app.session.commands import SetValue
from app.workbench.plot_view import PlotView
from app.workbench.start import application, make_window
from app.workbench.waterfall_view import WaterfallView
from app.workbench.window import Window

from .record import write

_FRAME_MS = 1000.0 / 60.0
_CELL = 1  # the demo cell of which everything is known: ERE, ideality, Rs and Rsh
_LINE = "nonradiative"


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
        self.jv_plot = PlotView("Current density against voltage", window.theme)
        self.gap_plot = PlotView("Efficiency against the gap", window.theme)
        row = QHBoxLayout()
        row.addWidget(self.jv_plot)
        row.addWidget(self.gap_plot)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self.waterfall)
        column.addLayout(row)
        for mine, theirs in zip(self.views, (window.waterfall, window.jv_plot, window.gap_plot), strict=True):
            mine.setFixedSize(theirs.size())
        for plot in (self.jv_plot, self.gap_plot):
            assert plot.canvas is not None

    @property
    def views(self) -> tuple[QWidget, QWidget, QWidget]:
        return self.waterfall, self.jv_plot, self.gap_plot


@pytest.fixture
def window(qapp: QApplication) -> Iterator[Window]:
    application([])
    qapp.setStyle("Fusion")
    made = make_window(["demo"])
    made.resize(1280, 800)
    made.show()
    _settle()
    made.session.pick(made.session.state.cells[_CELL].ident)
    made.session.pick_line(_LINE)
    _settle()
    yield made
    made.close()
    made.deleteLater()
    _settle()


def _measure(window: Window, rounds: int, ticks: int) -> dict[str, object]:
    slider = window.inputs.fields["voc"].slider
    ident = window.session.state.picked
    assert ident is not None
    middle = slider.sliderPosition()
    values = [1.14 + 0.001 * k for k in range(80)]
    specs = []
    for value in values:
        window.session.do(SetValue(ident, "voc", value))
        picture = window.outcomes.current().picture
        assert picture is not None
        specs.append((waterfall_of(picture), jv_plot_of(picture), gap_plot_of(picture)))
    bare = Bare(window)
    bare.show()
    _settle()

    def held(k: int) -> None:
        slider.setSliderPosition(middle - 20 + k % 41)
        _answer()

    def together(k: int) -> None:
        window.session.do(SetValue(ident, "voc", values[k % len(values)]))
        _answer()

    def repaint(k: int) -> None:
        waterfall, jv_plot, gap_plot = specs[k % len(specs)]
        bare.waterfall.show_spec(waterfall, _LINE)
        bare.jv_plot.show_spec(jv_plot)
        bare.gap_plot.show_spec(gap_plot)
        _answer()

    timed: dict[str, list[float]] = {"held": [], "together": [], "bare": []}
    for _ in range(rounds):
        slider.setSliderDown(True)
        timed["held"] += _times(held, ticks)
        slider.setSliderDown(False)
        _settle()
        timed["together"] += _times(together, ticks)
        timed["bare"] += _times(repaint, ticks)
    bare.close()
    bare.deleteLater()
    figures: dict[str, object] = {"rounds": rounds, "ticks_a_round": ticks, "window": [1280, 800]}
    for name, times in timed.items():
        figures[f"{name}_median_ms"] = statistics.median(times)
        figures[f"{name}_p95_ms"] = float(np.percentile(times, 95))
    for name in ("held", "together"):
        figures[f"{name}_over_bare"] = statistics.median(timed[name]) / statistics.median(timed["bare"])
    figures["frame_ms"] = _FRAME_MS
    return figures


def _times(tick: Callable[[int], None], count: int) -> list[float]:
    for k in range(5):
        tick(k)
    times = []
    for k in range(count):
        start = time.perf_counter()
        tick(k)
        times.append(1000.0 * (time.perf_counter() - start))
    return times


def test_a_tick_is_not_much_more_than_its_repaint(window: Window) -> None:
    figures = _measure(window, rounds=3, ticks=40)
    write("tick", "short", figures)
    assert figures["held_over_bare"] < 2.5, figures  # a guard against mishaps; the long run has the real bound
    assert figures["together_over_bare"] < 4.0, figures


@pytest.mark.slow
@pytest.mark.parametrize("which", ["held", "together"])
def test_a_tick_stays_within_one_and_a_half_repaints(window: Window, which: str) -> None:
    """The aim is 1.5 for both. It is not reached with every panel in one frame, and that run fails until it is."""
    figures = _measure(window, rounds=20, ticks=60)
    write("tick", "long", figures)
    assert figures[f"{which}_over_bare"] <= 1.5, figures
    assert figures[f"{which}_p95_ms"] < _FRAME_MS, figures
