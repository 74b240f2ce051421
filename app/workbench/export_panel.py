"""Pictures for slides and papers: choose chart and size, see it, save or copy it."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QGuiApplication, QImage, QPixmap
from PySide6.QtWidgets import (
    QComboBox,
    QDialog,
    QFileDialog,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from app.figures.all_plots import PLOTS
from app.figures.charts import waterfall_of
from app.figures.errors import FigureError
from app.figures.export import Background, Carried, Kind, image, render
from app.figures.presets import PRESETS
from app.figures.spec import PlotSpec, WaterfallSpec
from app.files.file_names import safe_stem
from app.files.write_error import WriteError
from app.files.writer import write_file
from app.session.outcome import Outcomes, Picture
from app.session_file import session_of_cell
from app.version import version
from app.wording import shown_name

Spec = WaterfallSpec | PlotSpec
CHARTS: dict[str, str] = {"waterfall": "Waterfall"} | {plot.key: plot.title for plot in PLOTS}
_BACKGROUNDS: tuple[tuple[str, Background], ...] = (("White", "white"), ("Transparent", "transparent"))
_KINDS: tuple[tuple[str, Kind], ...] = (("PNG picture", "png"), ("SVG drawing", "svg"), ("PDF page", "pdf"))


def offered_charts(picture: Picture) -> list[str]:
    """The charts for which a cell has the data, by key."""
    return ["waterfall", *(plot.key for plot in PLOTS if plot.offered(picture))]


def chart_of(picture: Picture, chart: str, title: str = "") -> Spec | None:
    """The description of one chart of a cell, under its own title or another; None where the data do not suffice."""
    spec: Spec | None
    if chart == "waterfall":
        spec = waterfall_of(picture)
    else:
        spec = next(plot for plot in PLOTS if plot.key == chart).describe(picture)
    return replace(spec, title=shown_name(title)) if spec is not None and title.strip() else spec


def copy_image(picture: QImage) -> None:
    """Put a picture on the clipboard.

    Not by way of a QMimeData made here: the clipboard outlives the interpreter, and letting go of such an object then
    ends the process with a segmentation fault.
    """
    QGuiApplication.clipboard().setImage(picture)


class ExportPanel(QDialog):
    """A window of its own beside the main one; it follows the cell on show.

    Signals
    -------
    told : str
        One sentence about what was done, or why it could not be.
    """

    told = Signal(str)

    def __init__(self, outcomes: Outcomes, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._outcomes = outcomes
        self._folder = Path.home()
        self.setWindowTitle("Export a picture")
        self.setModal(False)
        self.chart = self._choice([(CHARTS["waterfall"], "waterfall")])
        self.preset = self._choice((p.title, p.key) for p in PRESETS.values())
        self.background = self._choice(_BACKGROUNDS)
        self.kind = self._choice(_KINDS)
        self.title = QLineEdit()
        self.title.setPlaceholderText("as the chart says")
        self.title.textEdited.connect(self.refresh)
        self.preview = QLabel()
        self.preview.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.preview.setMinimumSize(480, 290)
        self.preview.setObjectName("preview")
        self.message = QLabel()
        self.message.setWordWrap(True)
        self.copy_button = QPushButton("Copy picture")
        self.save_button = QPushButton("Save…")
        self.save_button.setDefault(True)
        self.copy_button.clicked.connect(self.copy)
        self.save_button.clicked.connect(self._ask_and_save)
        self._lay_out()
        self._offer()

    def _choice(self, options: object) -> QComboBox:
        box = QComboBox()
        for title, key in options:  # type: ignore[attr-defined]
            box.addItem(title, key)
        box.currentIndexChanged.connect(self.refresh)
        return box

    def _lay_out(self) -> None:
        form = QFormLayout()
        for text, widget in (
            ("&Chart", self.chart),
            ("&Size", self.preset),
            ("&Ground", self.background),
            ("&Kind of file", self.kind),
            ("&Title", self.title),
        ):
            form.addRow(text, widget)
        buttons = QHBoxLayout()
        buttons.addWidget(self.message, 1)
        buttons.addWidget(self.copy_button)
        buttons.addWidget(self.save_button)
        column = QVBoxLayout(self)
        column.addLayout(form)
        column.addWidget(self.preview, 1)
        column.addLayout(buttons)

    def _spec(self) -> Spec | None:
        outcome = self._outcomes.current()
        if outcome.picture is None or outcome.stale:
            return None
        return chart_of(outcome.picture, self.chart.currentData(), self.title.text())

    def _offer(self) -> None:
        """Offer the charts that the cell on show has the data for."""
        outcome = self._outcomes.current()
        if outcome.picture is None:
            return
        keys = offered_charts(outcome.picture)
        if keys == [self.chart.itemData(at) for at in range(self.chart.count())]:
            return
        chosen = self.chart.currentData()
        self.chart.blockSignals(True)
        self.chart.clear()
        for key in keys:
            self.chart.addItem(CHARTS[key], key)
        self.chart.setCurrentIndex(max(0, self.chart.findData(chosen)))
        self.chart.blockSignals(False)

    def refresh(self) -> None:
        """Draw the preview anew."""
        self._offer()
        spec = self._spec()
        for button in (self.copy_button, self.save_button):
            button.setEnabled(spec is not None)
        if spec is None:
            self.preview.setPixmap(QPixmap())
            self.preview.setText("")
            outcome = self._outcomes.current()
            self.message.setText(
                "There is no picture of the present inputs: mend the fields marked in red first."
                if outcome.picture is None or outcome.stale
                else "The data do not suffice for this chart."
            )
            return
        self.message.clear()
        picture = image(spec, PRESETS[self.preset.currentData()], background=self.background.currentData())
        room: QSize = self.preview.size() * self.devicePixelRatioF()
        small = QPixmap.fromImage(
            picture.scaled(room, Qt.AspectRatioMode.KeepAspectRatio, Qt.TransformationMode.SmoothTransformation)
        )
        small.setDevicePixelRatio(self.devicePixelRatioF())
        self.preview.setPixmap(small)

    def copy(self) -> None:
        """Put the picture on the clipboard."""
        spec = self._spec()
        if spec is not None:
            copy_image(image(spec, PRESETS[self.preset.currentData()], background=self.background.currentData()))
            self._tell("The picture is on the clipboard.")

    def _ask_and_save(self) -> None:
        outcome = self._outcomes.current()
        if outcome.picture is None:
            return
        kind: str = self.kind.currentData()
        stem = f"{safe_stem(outcome.picture.entry.name)} {self.chart.currentData()}"
        name, _ = QFileDialog.getSaveFileName(
            self, "Save picture", str(self._folder / f"{stem}.{kind}"), f"{self.kind.currentText()} (*.{kind})"
        )
        if name:
            self.save(Path(name))

    def save(self, path: Path) -> None:
        """Write the picture to a file and tell how it went."""
        spec = self._spec()
        if spec is None:
            return
        kind: Kind = self.kind.currentData()
        path = path if path.suffix else path.with_name(f"{path.name}.{kind}")
        try:
            background: Background = self.background.currentData()
            preset = PRESETS[self.preset.currentData()]
            write_file(path, render(spec, preset, background=background, kind=kind, carried=self._carried()))
        except (WriteError, FigureError) as fault:
            self._tell(str(fault))
            return
        self._folder = path.parent
        self._tell(f"Saved as {path}.")

    def _carried(self) -> Carried | None:
        """The cell on the picture, so that the picture brings it back."""
        picture = self._outcomes.current().picture
        if picture is None:
            return None
        return Carried(f"Gapledger {version()}", session_of_cell(picture.entry, picture.choices))

    def _tell(self, sentence: str) -> None:
        self.message.setText(sentence)
        self.told.emit(sentence)

    def showEvent(self, event: object) -> None:
        """Draw the preview when the panel comes up."""
        super().showEvent(event)  # type: ignore[arg-type]
        self.refresh()

    def resizeEvent(self, event: object) -> None:
        """Fit the preview to the new size."""
        super().resizeEvent(event)  # type: ignore[arg-type]
        if self.isVisible():
            self.refresh()
