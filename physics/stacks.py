"""Luminescence of partial stacks: where in the cell the non-radiative voltage is lost.

The bare absorber, the absorber with one contact, and the finished cell are each measured as they are, at open circuit
and at the generation of one sun. A yield Y puts the splitting of the quasi-Fermi levels at Voc_rad + Vt ln Y (Ross).
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike

from physics.attribution import Attribution, log_mean
from physics.units import Array, thermal_voltage

UNKNOWN: Array = np.full((), np.nan)[()]


def yield_at_one_sun(measured: ArrayLike, suns: ArrayLike, ideality: ArrayLike) -> Array:
    """External luminescence yield at one sun from one at another light level.

    Parameters
    ----------
    measured : array_like
        Yield, 0 to 1.
    suns : array_like
        Generation at which it was measured, in units of that at one sun.
    ideality : array_like
        Ideality n of the stack's recombination: its splitting rises by n·Vt·ln of the light.

    Notes
    -----
    Emission goes with exp(splitting/Vt), that is with the n-th power of the light, and the yield with its power n − 1.
    """
    power = 1.0 - np.asarray(ideality, dtype=float)
    return np.asarray(measured, dtype=float) * np.asarray(suns, dtype=float) ** power


def voltage_at_one_sun(measured: ArrayLike, suns: ArrayLike, ideality: ArrayLike, temperature: ArrayLike) -> Array:
    """Implied voltage [V] at one sun from one at another light level; arguments as above, `temperature` in K."""
    return np.asarray(measured, dtype=float) - np.asarray(ideality) * thermal_voltage(temperature) * np.log(suns)


@dataclass(frozen=True, eq=False)
class Luminescence:
    """What was measured of one stack, at one sun: a yield or an implied voltage; the other is NaN.

    Parameters
    ----------
    fraction : ndarray
        External luminescence yield.
    voltage : ndarray
        Implied open-circuit voltage [V].
    """

    fraction: Array = UNKNOWN
    voltage: Array = UNKNOWN

    def at(self, voc_rad: Array, vt: Array) -> Array:
        """The yield under a radiative voltage and at a thermal voltage [V]."""
        return np.where(np.isnan(self.fraction), np.exp((self.voltage - voc_rad) / vt), self.fraction)[()]


@dataclass(frozen=True, eq=False)
class Stacks:
    """Luminescence of a cell's partial stacks, all broadcastable to the shape of the cell.

    Parameters
    ----------
    bare : Luminescence
        Of the absorber alone.
    contacts : tuple of (str, Luminescence)
        By the name of the contact: of the absorber with that one alone. All names differ.
    finished : Luminescence or None
        Of the finished cell at open circuit; None where not measured.
    rescaled : bool
        Whether any was brought to one sun from another light level.
    """

    bare: Luminescence
    contacts: tuple[tuple[str, Luminescence], ...] = ()
    finished: Luminescence | None = None
    rescaled: bool = False

    @property
    def by_voltage(self) -> bool:
        """Whether the bare absorber is known by its implied voltage, which becomes a yield by the radiative one."""
        return bool(np.isnan(self.bare.fraction).any())


@dataclass(frozen=True, eq=False)
class Splitting:
    """How the non-radiative voltage down to the finished stack is made up.

    Parameters
    ----------
    bare, stack : ndarray
        Yields of the bare absorber and of the finished stack; the latter, where it was not measured, from the
        recombination of absorber and contacts added up (NaN where that comes out negative).
    alone : tuple of ndarray
        Yields with one contact each.
    shares : tuple of ndarray
        Voltage that each contact costs in the finished stack [V].
    recombination : tuple of ndarray
        Of the absorber, then with the first contact added, the first two, …, in units of the emission.
    """

    bare: Array
    stack: Array
    alone: tuple[Array, ...]
    shares: tuple[Array, ...]
    recombination: tuple[Array, ...]


def splitting_of(stacks: Stacks, voc_rad: Array, vt: Array, attribution: Attribution) -> Splitting:
    """Share the voltage between bare absorber and finished stack among the contacts.

    At a given splitting each contact adds a recombination 1/Y_k − 1/Y_bare to that of the absorber, in units of the
    emission. Their logarithm is what counts as voltage, so a contact's share depends on what else recombines:

    - log-mean: Vt (1/Y_k − 1/Y_bare) / Λ(1/Y_bare, 1/Y_stack), free of any order;
    - ladder: the contacts one after the other as they are given, so that the first costs its own Vt ln(Y_bare/Y_1).

    Parameters
    ----------
    stacks : Stacks
    voc_rad, vt : ndarray
        Radiative voltage of the cell and thermal voltage [V].
    attribution : {"log-mean", "ladder"}

    Notes
    -----
    Splitting and yield: R. T. Ross, J. Chem. Phys. 46 (1967) 4590, doi:10.1063/1.1840606 (from memory). Partial stacks:
    M. Stolterfoht et al., Nature Energy 3 (2018) 847, doi:10.1038/s41560-018-0219-8 (from memory).
    """
    bare = stacks.bare.at(voc_rad, vt)
    alone = tuple(reading.at(voc_rad, vt) for _, reading in stacks.contacts)
    with np.errstate(invalid="ignore", divide="ignore"):
        added = tuple(1.0 / each - 1.0 / bare for each in alone)
        after = [1.0 / bare]
        for each in added:
            after.append(after[-1] + each)
        if stacks.finished is None:
            stack = np.where(after[-1] > 0.0, 1.0 / after[-1], np.nan)[()]
        else:
            stack = stacks.finished.at(voc_rad, vt)
        if attribution == "ladder":
            shares = tuple(vt * np.log(now / before) for before, now in pairwise(after))
        else:
            mean = log_mean(1.0 / bare, 1.0 / stack)
            shares = tuple(vt * each / mean for each in added)
    return Splitting(bare, stack, alone, shares, tuple(after))
