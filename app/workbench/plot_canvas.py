"""The pyqtgraph part of a live plot. Items are made once and only moved; ranges change only when they must."""

from __future__ import annotations

import numpy as np
import pyqtgraph as pg
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPen, QResizeEvent, QTransform
from PySide6.QtWidgets import QGraphicsItem, QGraphicsSimpleTextItem, QWidget

from app.figures.fonts import chart_font
from app.figures.spec import Mark, PlotSpec, Series, Side, dot_scale
from app.workbench.theme import Theme
from physics.units import Array

_DASHES = {
    "solid": Qt.PenStyle.SolidLine,
    "dashed": Qt.PenStyle.DashLine,
    "dotted": Qt.PenStyle.DotLine,
    "none": Qt.PenStyle.NoPen,
}
_SYMBOLS = {"circle": "o", "square": "s", "diamond": "d", "triangle": "t1"}
_LABEL_PX = 12
_LEFT = 46.0  # width of the left axis [px]
_ABOVE = 100.0  # marks are drawn over all curves


def _same(before: Array, now: Array) -> bool:
    return before is now or np.array_equal(before, now, equal_nan=True)


def _shift(side: Side, width: float, height: float) -> tuple[float, float]:
    """Where a text of a size begins, as seen from its mark [px]."""
    if side == "n":
        return -width / 2, -height - 6.0
    if side == "s":
        return -width / 2, 7.0
    dx = 7.0 if "e" in side else -width - 7.0
    return dx, -height - 4.0 if "n" in side else 4.0 if "s" in side else -height / 2


class PlotCanvas(pg.PlotWidget):  # type: ignore[misc]  # pyqtgraph has no annotations
    """Draws a `PlotSpec`. The wheel zooms and dragging moves; a double click shows the whole plot again."""

    def __init__(self, title: str, theme: Theme, parent: QWidget | None = None) -> None:
        self._spec: PlotSpec | None = None
        super().__init__(parent)
        self._theme = theme
        self._ranges: tuple[tuple[float, float], tuple[float, float]] | None = None
        self._room = (0.0, 0.0)  # inside the axes [px]
        self._names: tuple[tuple[tuple[float, str], ...], ...] = ((), ())
        self._curves: dict[str, pg.PlotCurveItem] = {}
        self._marks: dict[str, pg.ScatterPlotItem] = {}
        self._labels: dict[str, QGraphicsSimpleTextItem] = {}
        self.setAccessibleName(title)
        self._prepare()
        self.recolour()

    def _prepare(self) -> None:
        item = self.getPlotItem()
        item.setMenuEnabled(False)  # its menu offers exporters that do not draw what the screen shows
        item.hideButtons()
        item.disableAutoRange()
        item.showGrid(x=True, y=True, alpha=0.15)
        for name in ("left", "bottom"):
            axis = item.getAxis(name)
            axis.setCacheMode(QGraphicsItem.CacheMode.DeviceCoordinateCache)  # a grid costs 20 ms a paint without
            axis.setStyle(tickFont=chart_font(11, hinted=True), hideOverlappingLabels=True)
            axis.enableAutoSIPrefix(False)
            axis.setTickDensity(1.6)
        item.getAxis("left").setWidth(_LEFT)
        item.getAxis("bottom").setHeight(36)
        self.setMinimumSize(180, 100)
        self.getViewBox().sigResized.connect(self._place_labels)
        self.scene().sigMouseClicked.connect(self._clicked)

    def show_spec(self, spec: PlotSpec) -> None:
        """Show a plot."""
        previous, self._spec = self._spec, spec
        if previous is None or previous.x_label != spec.x_label:
            self._label_axes(spec)
        if (spec.x_names, spec.y_names) != self._names:
            self._names = (spec.x_names, spec.y_names)
            for name, names in (("bottom", spec.x_names), ("left", spec.y_names)):
                self.getPlotItem().getAxis(name).setTicks([names] if names else None)
            self._fit_left_axis(spec)
        if self._ranges != (spec.x_range, spec.y_range):
            self._ranges = (spec.x_range, spec.y_range)
            self._show_all()
        for at, series in enumerate(spec.series):
            self._show_series(series, at)
        for mark in spec.marks:
            self._show_mark(mark)
        self._hide_missing(spec)

    def _fit_left_axis(self, spec: PlotSpec) -> None:
        """Numbers take the same room in all plots; names take what they need."""
        metrics = QFontMetricsF(chart_font(11, hinted=True))
        widest = max((metrics.horizontalAdvance(text) for _, text in spec.y_names), default=0.0)
        self.getPlotItem().getAxis("left").setWidth(max(_LEFT, widest + (12 if not spec.y_label else 28)))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Name the axes in full where there is room."""
        super().resizeEvent(event)
        if self._spec is not None:
            self._label_axes(self._spec)

    def _show_all(self) -> None:
        if self._ranges is not None:
            (left, right), (bottom, top) = self._ranges
            self.setRange(xRange=(left, right), yRange=(bottom, top), padding=0.0)

    def _label_axes(self, spec: PlotSpec) -> None:
        palette = self._theme.palette
        style = {"color": palette.ink, "font-size": "8pt"}
        item = self.getPlotItem()
        wide = QFontMetricsF(chart_font(_LABEL_PX, bold=True)).horizontalAdvance(spec.y_label)
        room = self.height() - item.getAxis("bottom").height()
        for name, text in (("bottom", spec.x_label), ("left", spec.y_name(wide <= room))):
            axis = item.getAxis(name)
            axis.setLabel(text, **style)
            axis.resizeEvent()  # the label is centred by its width of then only when the axis is resized

    def _show_series(self, series: Series, at: int) -> None:
        curve = self._curves.get(series.key)
        if curve is None:
            curve = pg.PlotDataItem if series.markers else pg.PlotCurveItem
            curve = curve(antialias=True)
            self._curves[series.key] = curve
            self._colour_series(series, curve)
            self.addItem(curve, ignoreBounds=True)
        x, y = curve.getData()
        if x is None or not (_same(x, series.x) and _same(y, series.y)):
            curve.setData(series.x, series.y, connect="finite" if np.isnan(series.y).any() else "all")
        if curve.zValue() != at:  # a later one is drawn over an earlier one, whichever came first to the plot
            curve.setZValue(at)
        curve.setVisible(True)

    def _colour_series(self, series: Series, curve: pg.PlotCurveItem) -> None:
        if series.filled:
            tone = self._theme.palette.tones[series.role]
            curve.setFillLevel(0.0)
            curve.setBrush(pg.mkBrush(tone.fill))
            curve.setPen(pg.mkPen(None))
            return
        curve.setPen(self._pen(series))
        if series.markers:
            ink = self._theme.palette.tones[series.role].ink
            curve.setSymbol("o")
            curve.setSymbolSize(6.0 * dot_scale(series))
            curve.setSymbolPen(pg.mkPen(None))
            curve.setSymbolBrush(pg.mkBrush(ink))

    def _pen(self, series: Series) -> QPen:
        pen = QPen(QColor(self._theme.palette.tones[series.role].ink), 2.0, _DASHES[series.dash])
        pen.setCosmetic(True)
        return pen

    def _show_mark(self, mark: Mark) -> None:
        dot, label = self._marks.get(mark.key), self._labels.get(mark.key)
        if dot is None or label is None:
            dot = pg.ScatterPlotItem(size=9, symbol=_SYMBOLS[mark.symbol], pxMode=True)
            label = QGraphicsSimpleTextItem()
            label.setFlag(QGraphicsItem.GraphicsItemFlag.ItemIgnoresTransformations)
            font = QFont(chart_font(_LABEL_PX, bold=True, hinted=True))
            label.setFont(font)
            self._marks[mark.key], self._labels[mark.key] = dot, label
            dot.setZValue(_ABOVE)
            label.setZValue(_ABOVE)
            self.addItem(dot, ignoreBounds=True)
            self.getViewBox().addItem(label, ignoreBounds=True)
            self._colour_mark(mark, dot, label)
        x, y = dot.getData()
        if len(x) == 0 or x[0] != mark.x or y[0] != mark.y:
            dot.setData([mark.x], [mark.y])
        if label.text() != mark.label:
            label.setText(mark.label)
        self._place_label(mark, label)
        dot.setVisible(True)
        label.setVisible(True)

    def _place_labels(self) -> None:
        """Place all texts anew for the room there is now."""
        view = self.getViewBox()
        self._room = (view.width(), view.height())
        for mark in () if self._spec is None else self._spec.marks:
            if mark.key in self._labels:
                self._place_label(mark, self._labels[mark.key])

    def _place_label(self, mark: Mark, label: QGraphicsSimpleTextItem) -> None:
        """Put a text on its side of its mark, and inside the frame."""
        box = label.boundingRect()
        shift = self._inside(mark, box.width(), box.height())
        label.setTransform(QTransform.fromTranslate(*shift))
        label.setPos(mark.x, mark.y)

    def _inside(self, mark: Mark, width: float, height: float) -> tuple[float, float]:
        """Where a text of a size begins, as seen from its mark [px], inside the frame of the whole plot."""
        side = mark.side
        across, down = self._room
        if self._ranges is None or width >= across or height >= down:
            return _shift(side, width, height)
        (left, right), (bottom, top) = self._ranges
        x, y = (mark.x - left) / (right - left) * across, (top - mark.y) / (top - bottom) * down
        if side == "n" and y < height - 2.0:  # no room above, and lower down it would hide the mark
            side = "sw"
        dx, dy = _shift(side, width, height)
        if 0.0 <= x <= across:
            dx = min(max(dx, -x), across - width - x)
        if 0.0 <= y <= down:
            dy = min(max(dy, -y), down - height - y)
        return dx, dy

    def _hide_missing(self, spec: PlotSpec) -> None:
        series, marks = {s.key for s in spec.series}, {m.key for m in spec.marks}
        for key, curve in self._curves.items():
            if key not in series:
                curve.setVisible(False)
        for key, dot in self._marks.items():
            if key not in marks:
                dot.setVisible(False)
                self._labels[key].setVisible(False)

    def _colour_mark(self, mark: Mark, dot: pg.ScatterPlotItem, label: QGraphicsSimpleTextItem) -> None:
        palette = self._theme.palette
        ink = palette.tones[mark.role].ink
        dot.setPen(pg.mkPen(ink, width=2))
        dot.setBrush(pg.mkBrush(ink if mark.filled else palette.paper))
        label.setBrush(QColor(ink))

    def recolour(self) -> None:
        """Take the theme's colours."""
        palette = self._theme.palette
        self.setBackground(palette.paper)
        for name in ("left", "bottom"):
            axis = self.getPlotItem().getAxis(name)
            axis.setPen(pg.mkPen(palette.frame))
            axis.setTextPen(pg.mkPen(palette.muted))
        if self._spec is None:
            return
        self._label_axes(self._spec)
        for series in self._spec.series:
            self._colour_series(series, self._curves[series.key])
        for mark in self._spec.marks:
            self._colour_mark(mark, self._marks[mark.key], self._labels[mark.key])

    def _clicked(self, event: object) -> None:
        if event.double():  # type: ignore[attr-defined]
            self._show_all()
