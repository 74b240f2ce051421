"""Starts the installed program on the demo cells without a screen, and leaves when its chart has been painted.

Exit status 0 after a first painted window, 1 where none came within a minute.
"""

import os
import sys
import time

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

from PySide6.QtCore import QTimer

from app.workbench.start import application, make_window


def main() -> int:
    started = time.perf_counter()
    app = application([])
    window = make_window(["demo"])
    window.waterfall.first_painted.connect(lambda: QTimer.singleShot(300, lambda: app.exit(0)))
    QTimer.singleShot(60_000, lambda: app.exit(1))
    window.show()
    status = app.exec()
    picture = window.grab().toImage()
    colours = {picture.pixel(x, y) for x in range(0, picture.width(), 7) for y in range(0, picture.height(), 7)}
    print(f"first painted window after {time.perf_counter() - started:.2f} s, {len(colours)} colours on it")
    return status if len(colours) > 20 else 1


if __name__ == "__main__":
    sys.exit(main())
