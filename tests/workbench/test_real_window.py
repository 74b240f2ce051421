"""The real program on a real X server, moved by real events."""

import json
import os
import shutil
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtGui import QImage

ROOT = Path(__file__).parents[2]
pytestmark = [
    pytest.mark.xvfb,
    pytest.mark.skipif(not (shutil.which("Xvfb") and shutil.which("xdotool")), reason="needs Xvfb and xdotool"),
]


@pytest.fixture
def environment() -> Iterator[dict[str, str]]:
    """The environment of an X server of our own, on a display that was free."""
    reading, writing = os.pipe()
    command = ["Xvfb", "-displayfd", str(writing), "-screen", "0", "1920x1080x24", "-nolisten", "tcp"]
    with subprocess.Popen(command, pass_fds=[writing], stderr=subprocess.DEVNULL) as server:
        os.close(writing)
        with os.fdopen(reading) as pipe:
            number = pipe.readline().strip()
        assert number, "Xvfb did not start"
        yield os.environ | {"DISPLAY": f":{number}", "QT_QPA_PLATFORM": "xcb", "PYTHONPATH": str(ROOT)}
        server.terminate()


def _xdotool(environment: dict[str, str], *words: object) -> None:
    subprocess.run(["xdotool", *map(str, words)], env=environment, check=True, timeout=20)


def _grab(environment: dict[str, str], path: Path) -> QImage:
    script = ROOT / "tests" / "workbench" / "grab_screen.py"
    subprocess.run([sys.executable, str(script), str(path)], env=environment, check=True, timeout=60)
    return QImage(str(path))


def test_a_dragged_slider_changes_the_number(environment: dict[str, str], tmp_path: Path) -> None:
    script = ROOT / "tests" / "workbench" / "real_window.py"
    with subprocess.Popen(
        [sys.executable, str(script)], env=environment, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    ) as program:
        assert program.stdout is not None
        place = json.loads(program.stdout.readline())
        before = _grab(environment, tmp_path / "before.png")
        x, y = place["handle"]
        _xdotool(environment, "mousemove", x, y, "mousedown", 1)
        for step in range(1, 13):
            _xdotool(environment, "mousemove", x - step, y)
        _xdotool(environment, "mouseup", 1)
        time.sleep(0.5)
        after = _grab(environment, tmp_path / "after.png")
        _xdotool(environment, "key", "ctrl+q")
        end = json.loads(program.stdout.readline())
        assert program.wait(timeout=30) == 0
        assert program.stderr is not None
        assert "Traceback" not in program.stderr.read()
    assert end["voc"] < 1.048 - 0.02
    assert end["undo"] == "change of Voc"
    left, top, width, height = place["entry"]
    assert before.copy(left, top, width, height) != after.copy(left, top, width, height)
    chart = (320, 60, 500, 400)
    assert before.copy(*chart) != after.copy(*chart)
