"""Cautions, conventions and keys, in a window of its own."""

from __future__ import annotations

from PySide6.QtWidgets import QDialog, QTextBrowser, QVBoxLayout, QWidget

_TEXT = """
<h3>Cautions</h3>
<p>Figures shown here are an analysis of what was typed in. They are no certified measurement; those are for
accredited laboratories under IEC 60904.</p>
<ul>
<li>Simulator lamps are bright and emit ultraviolet light: shield eyes and skin.</li>
<li>Cells under light, and the sources that sweep them, carry voltage: switch off before touching probes.</li>
<li>Absorbers may hold lead, cadmium and other toxic matter, and broken samples shed it: gloves, ventilation,
proper waste.</li>
<li>Local rules and trained, licensed people decide what is safe in your laboratory, not this program.</li>
</ul>
<h3>Conventions</h3>
<p>The limit is that of a step absorber in detailed balance, emitting from the front face only (an ideal rear mirror)
unless both faces are chosen, which costs 18 mV at 25 °C. Losses from the limit to the cell are shared by logarithmic
means, which depend on no order, or by the ladder current → voltage → fill factor. Both add up exactly.</p>
<p>Basis: <b>measured</b> follows from your figures, <b>calculated</b> from gap, temperature and spectrum alone,
<b>fitted</b> rests on a fit to a measured curve, <b>assumed</b> on an assumption, which is named; assumed bars have a
broken outline. A bar with an arrow is a
gain.</p>
<h3>Keys</h3>
<table cellspacing="4">
<tr><td>Ctrl+N, Ctrl+D, Ctrl+Backspace</td><td>new cell, duplicate, remove</td></tr>
<tr><td>Ctrl+Page Up, Ctrl+Page Down</td><td>previous, next cell</td></tr>
<tr><td>Ctrl+Z, Ctrl+Y</td><td>undo, redo</td></tr>
<tr><td>Ctrl+E, Ctrl+Shift+C</td><td>export a picture, copy the waterfall</td></tr>
<tr><td>Ctrl+Shift+T, Ctrl+V</td><td>copy the ledger as a table, paste cells or measured curves</td></tr>
<tr><td>Ctrl+O</td><td>open a session, a table of cells, measured curves, or a picture made here</td></tr>
<tr><td>Ctrl+S, Ctrl+Shift+S</td><td>save the session, save it as another file</td></tr>
<tr><td>Arrow keys on the waterfall or the table</td><td>pick another line</td></tr>
<tr><td>Wheel, drag, double click on a plot</td><td>zoom, move, show all</td></tr>
</table>
"""


class HelpPanel(QDialog):
    """Shows the text."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Cautions, conventions and keys")
        self.setModal(False)
        self.resize(600, 560)
        text = QTextBrowser()
        text.setHtml(_TEXT)
        text.setAccessibleName("Cautions, conventions and keys")
        column = QVBoxLayout(self)
        column.addWidget(text)
