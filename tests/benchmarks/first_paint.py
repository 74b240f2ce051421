"""Prints, as JSON, the seconds from a given start to the first painted window, of the program or of a bare window.

Usage: first_paint.py START program|bare, START being the time of day at which the process was started.
"""

import json
import sys
import time

_HEAVY = ("scipy", "pandas", "pvlib")


def _tell(started: float) -> None:
    print(json.dumps({"seconds": time.time() - started, "heavy": [m for m in _HEAVY if m in sys.modules]}), flush=True)


def _bare(started: float) -> int:
    import numpy  # noqa: F401
    import pyqtgraph
    from PySide6.QtCore import QTimer
    from PySide6.QtGui import QPainter
    from PySide6.QtWidgets import QApplication, QMainWindow, QSplitter, QWidget

    app = QApplication([])
    app.setStyle("Fusion")

    class Plain(QWidget):
        def paintEvent(self, event: object) -> None:
            with QPainter(self) as painter:
                painter.fillRect(self.rect(), 0xFFFFFFFF)
            _tell(started)
            QTimer.singleShot(0, app.quit)

    window, parts = QMainWindow(), QSplitter()
    for part in (Plain(), pyqtgraph.PlotWidget(), pyqtgraph.PlotWidget()):
        parts.addWidget(part)
    window.setCentralWidget(parts)
    window.resize(1280, 800)
    window.show()
    return app.exec()


def _program(started: float) -> int:
    from PySide6.QtCore import QTimer
    from PySide6.QtWidgets import QApplication

    from app.workbench import start
    from app.workbench.window import Window

    make = start.make_window

    def watched(arguments: list[str]) -> Window:
        window = make(arguments)

        def complete() -> None:
            assert window.jv_plot._canvas is not None
            assert window.gap_plot._canvas is not None
            _tell(started)
            QApplication.quit()

        window.waterfall.first_painted.connect(lambda: _tell(started))
        window.waterfall.first_painted.connect(lambda: QTimer.singleShot(0, lambda: QTimer.singleShot(0, complete)))
        return window

    start.make_window = watched  # type: ignore[assignment]
    return start.open_window(["demo"])


if __name__ == "__main__":
    sys.exit((_program if sys.argv[2] == "program" else _bare)(float(sys.argv[1])))
