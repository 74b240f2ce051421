"""Random cells for the tests of the ledger."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from physics.cell import Cell
from physics.limit import detailed_balance_limit
from physics.spectrum import Illumination


def random_cells(count: int, light: Illumination, seed: int, irradiance: float | None = None) -> Cell:
    """Cells that could exist, and some that could not quite: a current, voltage or fill factor above the limit's.

    Optional figures are there or not at random. Resistances stay within what a curve through Voc and Jsc allows.
    """
    rng = np.random.default_rng(seed)
    low, high = light.gap_range
    gap = rng.uniform(max(0.45, low), min(3.5, high), count)
    temperature = rng.uniform(230.0, 370.0, count)
    power = np.exp(rng.uniform(np.log(1e-3), np.log(1e3), count)) if irradiance is None else np.full(count, irradiance)
    limit = detailed_balance_limit(gap, temperature, light, power)
    voc = limit.voc * rng.uniform(0.3, 1.02, count)
    jsc = limit.jsc * rng.uniform(0.3, 1.1, count)
    ohm = 1e3 * voc / jsc

    def sometimes(values: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.where(rng.random(count) < 0.5, values, np.nan)

    with_eqe = rng.random(count) < 0.5
    return Cell.of(
        gap=gap,
        voc=voc,
        jsc=jsc,
        ff=rng.uniform(0.26, 0.94, count),
        temperature=temperature,
        irradiance=power,
        ere=sometimes(10.0 ** rng.uniform(-9.0, 0.0, count)),
        ideality=sometimes(rng.uniform(0.6, 3.0, count)),
        rs=sometimes(ohm * rng.uniform(0.0, 0.8, count)),
        rsh=sometimes(ohm * np.exp(rng.uniform(np.log(1.05), np.log(1e4), count))),
        pseudo_ff=sometimes(rng.uniform(0.3, 0.95, count)),
        eqe_above=np.where(with_eqe, jsc * rng.uniform(0.9, 1.1, count), np.nan),
        eqe_below=np.where(with_eqe, jsc * rng.uniform(0.0, 0.05, count), np.nan),
        reflected=sometimes(jsc * rng.uniform(0.0, 0.2, count)),
        j0_rad=np.where(with_eqe, limit.j0 * np.exp(rng.uniform(-1.0, 4.0, count)), np.nan),
        tail_share=np.where(rng.random(count) < 0.5, rng.random(count), 0.0),
        fitted=np.where(rng.random(count) < 0.5, 1.0, 0.0),
    )
