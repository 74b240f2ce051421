"""Where the figures of benchmarks go."""

import json
import os
import platform
from pathlib import Path

import numpy as np
import pyqtgraph
import PySide6
import scipy


def write(name: str, key: str, figures: dict[str, object]) -> None:
    """Put figures under a key of NAME.json in the folder of GAPLEDGER_BENCHMARKS (out/benchmarks if there is none)."""
    folder = Path(os.environ.get("GAPLEDGER_BENCHMARKS") or Path("out") / "benchmarks")
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / f"{name}.json"
    known = json.loads(path.read_text(encoding="utf-8")) if path.is_file() else {}
    machine = {
        "cores": os.cpu_count(),
        "machine": platform.machine(),
        "python": platform.python_version(),
        "numpy": np.__version__,
        "scipy": scipy.__version__,
        "PySide6": PySide6.__version__,
        "pyqtgraph": pyqtgraph.__version__,
    }
    path.write_text(json.dumps(known | {key: figures | machine}, indent=2) + "\n", encoding="utf-8")
