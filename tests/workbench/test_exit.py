"""However the work ended, the process ends with status 0."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
_PROGRAM = """
import sys
from PySide6.QtCore import QTimer
from app.workbench import start

make = start.make_window

def watched(arguments):
    window = make(arguments)
    def work():
        {work}
        QTimer.singleShot(100, window.close)
    window.waterfall.first_painted.connect(lambda: QTimer.singleShot(100, work))
    return window

start.make_window = watched
sys.exit(start.open_window(["demo"]))
"""


@pytest.mark.parametrize(
    "work",
    [
        "pass",
        "window.actions_.copy_chart.trigger()",
        "window.actions_.copy_table.trigger()",
        "window.actions_.show_export(); window.actions_._export.copy()",
        "window.actions_.show_help(); window.session.undo()",
    ],
    ids=["nothing", "picture copied", "table copied", "export panel open", "help open"],
)
def test_the_process_ends_well(work: str) -> None:
    environment = os.environ | {"PYTHONPATH": str(ROOT), "QT_QPA_PLATFORM": "offscreen"}
    done = subprocess.run(
        [sys.executable, "-c", _PROGRAM.format(work=work)], env=environment, capture_output=True, text=True, timeout=60
    )
    assert done.returncode == 0, done.stderr
    assert "Traceback" not in done.stderr
