"""Synthetic J–V sweeps whose truth comes from pvlib's solver of the one-diode equation, apart from the project's."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from pvlib.pvsystem import i_from_v, singlediode
from scipy.constants import e, k

Array = NDArray[np.float64]
T = 298.15
VT = k * T / e
DATA = Path(__file__).parents[1] / "data" / "sweeps"


@dataclass(frozen=True)
class Truth:
    """One-diode parameters [mA cm⁻², 1, Ω cm²]."""

    j_l: float
    j0: float
    n: float
    rs: float
    rsh: float

    def current(self, voltage: Array) -> Array:
        """mA cm⁻² at voltages [V]."""
        columns = (self.j_l * 1e-3, self.j0 * 1e-3, self.rs, self.rsh, self.n * VT)
        return np.asarray(i_from_v(voltage, *columns, method="lambertw"), dtype=float) * 1e3

    def figures(self) -> dict[str, float]:
        """The figures of merit, named as in `physics.sweep.SweepFigures`."""
        columns = (self.j_l * 1e-3, self.j0 * 1e-3, self.rs, self.rsh, self.n * VT)
        points = {key: float(np.asarray(value)) for key, value in singlediode(*columns, method="brentq").items()}
        jsc, voc, power = points["i_sc"] * 1e3, points["v_oc"], points["p_mp"] * 1e3
        peak = {"v_mp": points["v_mp"], "j_mp": points["i_mp"] * 1e3, "power": power}
        return {"jsc": jsc, "voc": voc, "ff": power / (jsc * voc), **peak}


def random_truth(rng: np.random.Generator) -> Truth:
    """Cells from silicon to perovskite: n 1–2, Rs 0.05–10, Rsh 200–1e6 Ω cm², but none ruined by its resistances."""
    while True:
        voc, n, j_l = rng.uniform(0.5, 1.2), rng.uniform(1.0, 2.0), rng.uniform(5.0, 45.0)
        rs, rsh = 10.0 ** rng.uniform(-1.3, 1.0), 10.0 ** rng.uniform(2.3, 6.0)
        if rs * j_l * 1e-3 < 0.5 * voc and voc * 1e3 / rsh < 0.5 * j_l:
            return Truth(j_l, (j_l - voc * 1e3 / rsh) / np.expm1(voc / (n * VT)), n, rs, rsh)


def sweep(truth: Truth, rng: np.random.Generator, noise: float, points: int = 0) -> tuple[Array, Array]:
    """40 to 400 points from 0 or −0.1 V to just above Voc, with normal noise as a share of the photocurrent."""
    points = points or int(np.exp(rng.uniform(np.log(40.0), np.log(400.0))))
    stop = truth.figures()["voc"] + rng.uniform(0.02, 0.1)
    voltage = np.linspace(rng.choice([0.0, -0.1]), stop, points)
    return voltage, truth.current(voltage) + rng.normal(0.0, noise * truth.j_l, points)


@cache
def precise_curves() -> dict[str, tuple[dict[str, float], Array, Array]]:
    """pvlib's curves: parameters by name, voltages [V] and currents [A]; see tests/data/sweeps/README.md."""
    with (DATA / "precise_curves.csv").open(newline="") as file:
        rows = list(csv.DictReader(file))
    curves = {}
    with (DATA / "precise_parameters.csv").open(newline="") as file:
        for row in csv.DictReader(file):
            name = row.pop("curve")
            mine = [(float(r["voltage_V"]), float(r["current_A"])) for r in rows if r["curve"] == name]
            voltage, current = np.array(mine).T
            curves[name] = ({key: float(value) for key, value in row.items()}, voltage, current)
    return curves
