"""The live waterfall, painted by the same painter as every exported one."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QKeyEvent, QMouseEvent, QPainter, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.figures.sheet import Sheet
from app.figures.spec import WaterfallSpec
from app.figures.style import screen_style
from app.figures.waterfall import paint_waterfall
from app.workbench.theme import Theme


class WaterfallView(QWidget):
    """Shows a waterfall and lets the user pick a line of it by mouse or arrow keys.

    Signals
    -------
    picked : str
        Key of the line that the user picked.
    first_painted
        The chart has been on the screen for the first time.
    """

    picked = Signal(str)
    first_painted = Signal()

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self._spec: WaterfallSpec | None = None
        self._line = ""
        self._hovered = ""
        self._hint = ""
        self._hits: list[tuple[str, QRectF]] = []
        self._seen = False
        theme.changed.connect(self.update)
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMinimumSize(420, 300)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.setAccessibleName("Waterfall of losses; the ledger table holds the same amounts")

    def sizeHint(self) -> QSize:
        """Size that suits the chart [px]."""
        return QSize(640, 440)

    def show_spec(self, spec: WaterfallSpec | None, line: str, hint: str = "") -> None:
        """Show a waterfall with one line picked, or a hint where there is none."""
        self._spec, self._line, self._hint = spec, line, hint
        if spec is None:
            self._hits = []
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the chart."""
        self._paint()
        if not self._seen:
            self._seen = True
            self.first_painted.emit()

    def _paint(self) -> None:
        palette = self._theme.palette
        area = QRectF(self.rect())
        with QPainter(self) as painter:
            if self._spec is None:
                sheet = Sheet(painter, "screen", pixel=self.devicePixelRatioF())
                sheet.rect(area, palette.paper)
                painter.setPen(palette.muted)
                how = int(Qt.AlignmentFlag.AlignCenter) | int(Qt.TextFlag.TextWordWrap)
                painter.drawText(area.adjusted(40, 40, -40, -40), how, self._hint)
                return
            sheet = Sheet(painter, "screen", pixel=self.devicePixelRatioF())
            style = screen_style(area.width(), area.height())
            self._hits = paint_waterfall(sheet, self._spec, area, style, palette, self._line, self._hovered)
            if self.hasFocus():
                sheet.rect(area.adjusted(1.5, 1.5, -1.5, -1.5), "", palette.frame, 1.0)

    def _key_at(self, place: QPointF) -> str:
        for key, area in self._hits:
            if area.contains(place):
                return key
        return ""

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Tell the line under the pointer by a faint ground."""
        key = self._key_at(event.position())
        if key != self._hovered:
            self._hovered = key
            self.setCursor(Qt.CursorShape.PointingHandCursor if key else Qt.CursorShape.ArrowCursor)
            self.update()

    def leaveEvent(self, event: object) -> None:
        """No line is under the pointer any more."""
        if self._hovered:
            self._hovered = ""
            self.update()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Pick the line under the pointer."""
        key = self._key_at(event.position())
        if key:
            self.picked.emit(key)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Walk the lines with the arrow keys."""
        steps = {Qt.Key.Key_Down: 1, Qt.Key.Key_Right: 1, Qt.Key.Key_Up: -1, Qt.Key.Key_Left: -1}
        step = steps.get(Qt.Key(event.key()))
        keys = list(dict.fromkeys(key for key, _ in self._hits))
        if step is None or not keys:
            super().keyPressEvent(event)
            return
        at = keys.index(self._line) + step if self._line in keys else 0
        self.picked.emit(keys[min(max(at, 0), len(keys) - 1)])
