"""Constants of nature and the few conversions that everything else shares."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
Indices = NDArray[np.intp]

# Exact by the definition of the SI (BIPM, SI Brochure, 9th edition, 2019). They equal scipy.constants to the last
# digit (tests/physics/test_units.py); scipy itself is not imported here because it would double the start-up time.
ELEMENTARY_CHARGE = 1.602176634e-19  #: q [C]
BOLTZMANN = 1.380649e-23  #: k [J/K]
PLANCK = 6.62607015e-34  #: h [J s]
LIGHT_SPEED = 299792458.0  #: c [m/s]

#: h c / q [eV nm]: the wavelength of a photon times its energy.
EV_NM = PLANCK * LIGHT_SPEED / ELEMENTARY_CHARGE * 1e9

#: 1 W m⁻² in mW cm⁻², and equally 1 A m⁻² in mA cm⁻².
PER_M2 = 0.1

ZERO_CELSIUS = 273.15  #: 0 °C [K]


def thermal_voltage(temperature: ArrayLike) -> Array:
    """Thermal voltage Vt = kT/q [V] at a `temperature` [K] of any shape."""
    return np.asarray(temperature, dtype=float) * (BOLTZMANN / ELEMENTARY_CHARGE)


def aligned(*values: ArrayLike) -> tuple[Array, ...]:
    """Arrays of one shape from scalars and arrays of mutually broadcastable shapes; ValueError where they are not."""
    arrays = tuple(np.asarray(value, dtype=float) for value in values)
    shape = arrays[0].shape
    if all(array.shape == shape for array in arrays):  # broadcasting costs ten times as much as this look
        return arrays if shape else tuple(array[()] for array in arrays)  # numpy counts faster with its scalars
    return tuple(np.broadcast_arrays(*arrays))
