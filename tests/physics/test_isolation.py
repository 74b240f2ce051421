"""The science runs where there is no screen, no program and no table library, and loads none of them."""

import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parents[2]
FOREIGN = ("PySide6", "shiboken6", "pyqtgraph", "app", "pandas", "scipy", "pvlib")

BLOCKED = """
import sys

class Blocker:
    def find_spec(self, name, path=None, target=None):
        if name.split(".")[0] in {"PySide6", "shiboken6", "pyqtgraph", "app", "pandas", "scipy"}:
            raise ImportError("blocked: " + name)

sys.meta_path.insert(0, Blocker())
for name in ("scipy", "pandas", "PySide6", "app"):
    try:
        __import__(name)
    except ImportError:
        continue
    sys.exit(name + " was not blocked")

from physics.cell import Cell
from physics.checks import failed
from physics.diode import Diode
from physics.ideality import matching_ideality
from physics.ledger import ledger_of
from physics.spectrum import reference_spectrum

cell = Cell.of(gap=1.12, voc=0.738, jsc=42.65, ff=0.849, ideality=1.1, rs=0.3, rsh=1e4, ere=0.01, pseudo_ff=0.86)
for name in ("am15g", "am15d", "am0"):
    ledger = ledger_of(cell, reference_spectrum(name))
    assert abs(float(ledger.closure)) < 1e-9
    failed(ledger)
n = matching_ideality(0.82, 0.738, 42.65, 298.15)
Diode.through(0.738, 42.65, 298.15, n).curve()
print("closed")
"""

LOADED = """
import sys
import physics.ledger, physics.checks, physics.lines, physics.spectrum
from physics.spectrum import reference_spectrum
reference_spectrum("am15g")
print(*sorted({name.split(".")[0] for name in sys.modules}))
"""


def _run(code: str) -> str:
    run = subprocess.run(
        [sys.executable, "-W", "error", "-c", code], cwd=ROOT, capture_output=True, text=True, timeout=120, check=False
    )
    assert run.returncode == 0, run.stderr
    return run.stdout.strip()


def test_ledger_without_anything_but_numpy() -> None:
    assert _run(BLOCKED) == "closed"


def test_importing_the_ledger_loads_nothing_foreign() -> None:
    loaded = _run(LOADED).split()
    assert "numpy" in loaded
    assert not set(FOREIGN) & set(loaded)
