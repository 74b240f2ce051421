"""How the picked line was computed: the equation, the same with its numbers, what enters, and how it is known."""

from __future__ import annotations

import html
import re

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QScrollArea, QVBoxLayout, QWidget

from app.wording import Explanation

_SUBSCRIPT = re.compile(r"_([A-Za-z0-9,=]+(?: R_?sh?| Rsh| Rs)?)")


def _rich(text: str) -> str:
    """Escape a text and set what follows "_" as a subscript."""
    return _SUBSCRIPT.sub(r"<sub>\1</sub>", html.escape(text))


def rich_explanation(explanation: Explanation) -> str:
    """An explanation as the rich text of the panel."""
    parts = [f"<b>{html.escape(explanation.title)}</b><br>{html.escape(explanation.amount)}"]
    if explanation.steps:
        parts.append("<br>".join(_rich(step) for step in explanation.steps))
    if explanation.given:
        rows = "".join(
            f"<tr><td>{_rich(g.symbol)}&nbsp;&nbsp;</td><td align='right'>{html.escape(g.value)}&nbsp;&nbsp;</td>"
            f"<td>{_rich(g.title)}</td></tr>"
            for g in explanation.given
        )
        parts.append(f"<table cellspacing='0'>{rows}</table>")
    foot = []
    if explanation.basis:
        foot.append(f"Basis: <b>{html.escape(explanation.basis)}</b>")
    if explanation.source:
        foot.append(f"Source: {html.escape(explanation.source)}")
    parts.append("<br>".join(foot))
    return "".join(f"<p style='margin-top:0; margin-bottom:7px'>{part}</p>" for part in parts if part)


class ExplainPanel(QScrollArea):
    """Shows an explanation; its text can be selected and copied."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWidgetResizable(True)
        self.setFrameShape(QScrollArea.Shape.NoFrame)
        self.text = QLabel()
        self.text.setTextFormat(Qt.TextFormat.RichText)
        self.text.setWordWrap(True)
        self.text.setAlignment(Qt.AlignmentFlag.AlignTop | Qt.AlignmentFlag.AlignLeft)
        self.text.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self.text.setAccessibleName("How the picked line was computed")
        page = QWidget()
        column = QVBoxLayout(page)
        column.setContentsMargins(10, 2, 10, 6)
        column.addWidget(self.text, 1)
        self.setWidget(page)
        self._shown: Explanation | None = None

    def show_explanation(self, explanation: Explanation | None) -> None:
        """Show an explanation, or how to get one."""
        if explanation == self._shown and self.text.text():
            return
        self._shown = explanation
        self.text.setText(
            rich_explanation(explanation)
            if explanation is not None
            else "Pick a bar of the waterfall or a row of the table to see how it was computed."
        )
