"""The one-diode fill factor against pvlib's own solvers."""

import numpy as np
import pytest
from numpy.typing import NDArray
from pvlib.pvsystem import singlediode

from physics.diode import Diode

Array = NDArray[np.float64]


def _cells(count: int, seed: int) -> Diode:
    rng = np.random.default_rng(seed)
    voc, jsc = rng.uniform(0.3, 1.5, count), rng.uniform(1.0, 60.0, count)
    ohm = 1e3 * voc / jsc
    rs = ohm * rng.uniform(0.0, 0.4, count)
    rsh = ohm * np.exp(rng.uniform(np.log(2.5), np.log(1e5), count))
    return Diode.through(voc, jsc, rng.uniform(250.0, 350.0, count), rng.uniform(0.8, 2.5, count), rs, rsh)


def _by_pvlib(diode: Diode, method: str) -> dict[str, Array]:
    """pvlib's key points [V, A cm⁻²], from J_L and J0 as the head of `physics.diode` gives them.

    A = [Jsc (1 + Rs/Rsh) − Voc/Rsh]/[1 − exp((Jsc Rs − Voc)/(n Vt))], J0 = A exp(−Voc/(n Vt)),
    J_L = A + Voc/Rsh − J0.
    """
    jsc = diode.jsc * 1e-3
    top = jsc * (1 + diode.rs / diode.rsh) - diode.voc / diode.rsh
    a = top / (1 - np.exp((jsc * diode.rs - diode.voc) / diode.scale))
    j0 = a * np.exp(-diode.voc / diode.scale)
    light = a + diode.voc / diode.rsh - j0
    points = singlediode(light, j0, diode.rs, diode.rsh, diode.scale, method=method)
    return {key: np.asarray(points[key], dtype=float) for key in ("i_sc", "v_oc", "v_mp", "p_mp")}


@pytest.mark.parametrize(("method", "count"), [("lambertw", 3000), ("newton", 3000), ("brentq", 200)])
def test_fill_factor_agrees_with_pvlib(method: str, count: int) -> None:
    diode = _cells(count, seed=11)
    theirs = _by_pvlib(diode, method)
    np.testing.assert_allclose(theirs["i_sc"], diode.jsc * 1e-3, rtol=1e-9)
    np.testing.assert_allclose(theirs["v_oc"], diode.voc, rtol=1e-9)
    ff = theirs["p_mp"] / (diode.voc * diode.jsc * 1e-3)
    np.testing.assert_allclose(diode.fill_factor(), ff, rtol=0, atol=1e-6)
    np.testing.assert_allclose(diode.maximum_power()[0], theirs["v_mp"], rtol=1e-5)
