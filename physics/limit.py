"""The detailed-balance limit of a step absorber."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from physics.diode import ideal_fill_factor
from physics.emission import photon_current
from physics.spectrum import Illumination
from physics.units import Array, aligned, thermal_voltage

#: How many faces of the absorber emit: 1 with an ideal rear mirror, 2 without.
Faces = Literal[1, 2]


@dataclass(frozen=True, eq=False)
class Limit:
    """What a step absorber could do at best; every field of the broadcast shape of the inputs.

    Parameters
    ----------
    gap : ndarray
        Gap Eg [eV].
    temperature : ndarray
        Cell temperature [K].
    incident : ndarray
        Incident power [mW cm⁻²].
    above_gap : ndarray
        Power in the photons above the gap [mW cm⁻²].
    jsc, j0 : ndarray
        Photocurrent and radiative recombination current [mA cm⁻²].
    voc : ndarray
        Open-circuit voltage [V].
    ff : ndarray
        Fill factor.
    """

    gap: Array
    temperature: Array
    incident: Array
    above_gap: Array
    jsc: Array
    j0: Array
    voc: Array
    ff: Array

    @property
    def power(self) -> Array:
        """Maximum power [mW cm⁻²]."""
        return self.jsc * self.voc * self.ff

    @property
    def efficiency(self) -> Array:
        """Maximum power over incident power."""
        return self.power / self.incident

    @property
    def ultimate_efficiency(self) -> Array:
        """J·Eg/q over incident power: one gap's worth of energy for every photon above it."""
        return self.jsc * self.gap / self.incident


def detailed_balance_limit(
    gap: ArrayLike,
    temperature: ArrayLike,
    light: Illumination,
    irradiance: ArrayLike = np.nan,
    faces: Faces = 1,
) -> Limit:
    """Limit of a step absorber in the radiative limit.

    J(V) = J_lim − J0 (exp(V/Vt) − 1) with J_lim the photon current above the gap and J0 the thermal emission above
    it; Voc = Vt ln(J_lim/J0 + 1), and the maximum power point in closed form (`physics.diode.ideal_fill_factor`).

    Parameters
    ----------
    gap : array_like
        Gap [eV].
    temperature : array_like
        Cell temperature [K].
    light : Illumination
        Spectrum of the incident light.
    irradiance : array_like
        Power to which the spectrum is scaled [mW cm⁻²]; NaN leaves it as tabulated.
    faces : {1, 2}
        Faces that emit. Two faces double J0 and cost Vt ln 2.

    Returns
    -------
    Limit
        NaN for gaps that the spectrum does not cover, and for a temperature or irradiance that is not above zero.

    Notes
    -----
    Shockley and Queisser, J. Appl. Phys. 32 (1961) 510, doi:10.1063/1.1736034, in the Boltzmann form of the tables by
    S. Rühle, Solar Energy 130 (2016) 139, doi:10.1016/j.solener.2016.02.015. Outside the cell n = 1.

    The generalised Planck form of the emission gives slightly less, and the more so the nearer the voltage comes to
    the gap. Above 0.7 eV at one sun (250 to 350 K) that is less than 8e-6 of Voc and 7e-7 of the power. At 0.7 eV it
    is 3e-5 of the power at 100 suns and 0.8 % at full concentration (46 239 suns); there the best cell under a 6000 K
    sun comes out as 40.80 % at 1.103 eV, where the generalised form has 40.74 % at 1.109 eV
    (tests/physics/test_limit_quadrature.py).
    """
    gap, temperature, irradiance = aligned(gap, temperature, irradiance)
    incident = np.where(np.isnan(irradiance), light.power, np.where(irradiance > 0, irradiance, np.nan))
    scale = incident / light.power
    jsc = scale * light.photon_current_above(gap)
    j0 = faces * photon_current(gap, temperature)
    vt = thermal_voltage(temperature)
    voc = vt * np.log1p(jsc / np.where(j0 > 0, j0, np.nan))
    return Limit(
        gap=gap,
        temperature=temperature,
        incident=incident,
        above_gap=scale * light.power_above(gap),
        jsc=jsc,
        j0=j0,
        voc=voc,
        ff=ideal_fill_factor(voc / vt),
    )
