"""Runs the real program on the demo cells; tells where a slider stands, and at the end what its field holds.

Prints one line of JSON when the window is complete, and one when it has been closed.
"""

import json
import sys

from PySide6.QtCore import QPoint, QTimer

from app.workbench import start
from app.workbench.window import Window


def _place(window: Window, key: str) -> dict[str, list[int]]:
    field = window.inputs.fields[key]
    slider = field.slider
    share = slider.value() / slider.maximum()
    handle = slider.mapToGlobal(QPoint(round(6 + share * (slider.width() - 12)), slider.height() // 2))
    corner = field.entry.mapToGlobal(QPoint(0, 0))
    return {
        "handle": [handle.x(), handle.y()],
        "entry": [corner.x(), corner.y(), field.entry.width(), field.entry.height()],
    }


def main() -> int:
    made: list[Window] = []
    make = start.make_window

    def remember(arguments: list[str]) -> Window:
        window = make(arguments)
        window.move(0, 0)
        made.append(window)
        QTimer.singleShot(0, lambda: setattr(window.files, "asks", False))  # nobody is there to answer at the end
        window.waterfall.first_painted.connect(
            lambda: QTimer.singleShot(800, lambda: print(json.dumps(_place(window, "voc")), flush=True))
        )
        return window

    start.make_window = remember  # type: ignore[assignment]
    status = start.open_window(["demo"])
    window = made[0]
    cell = window.session.state.cell
    print(json.dumps({"voc": cell.values["voc"] if cell else None, "undo": window.session.undo_name}), flush=True)
    return status


if __name__ == "__main__":
    sys.exit(main())
