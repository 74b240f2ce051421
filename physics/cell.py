"""A measured cell: its figures of merit and what else is known of it."""

from __future__ import annotations

from dataclasses import dataclass, fields

from numpy.typing import ArrayLike

from physics.units import ZERO_CELSIUS, Array, aligned

UNKNOWN = float("nan")  #: Marks a value that was not measured.


@dataclass(frozen=True, eq=False)
class Cell:
    """One cell, or an array of them: after construction every field is an array of the one broadcast shape.

    Parameters
    ----------
    gap : array_like
        Gap of the absorber [eV].
    voc : array_like
        Open-circuit voltage [V].
    jsc : array_like
        Short-circuit current density of the J–V measurement [mA cm⁻²].
    ff : array_like
        Fill factor, 0 to 1.
    temperature : array_like
        Cell temperature [K].
    irradiance : array_like
        Incident power [mW cm⁻²]; NaN takes the spectrum as tabulated.
    ere : array_like
        External radiative efficiency at open circuit, 0 to 1; NaN where not measured.
    ideality : array_like
        Ideality factor n at the maximum power point; NaN where not known.
    rs, rsh : array_like
        Series and shunt resistance [Ω cm²]; NaN where not known.
    pseudo_ff : array_like
        Fill factor without series resistance, 0 to 1; NaN where not measured.
    eqe_above, eqe_below : array_like
        Current of the EQE under this light, from photons above and below the gap [mA cm⁻²]; NaN where there is no EQE
        (`physics.quantum.collected_current`).
    reflected : array_like
        Photons above the gap that are reflected, as a current [mA cm⁻²]; NaN where no reflectance was measured.
    j0_rad : array_like
        Radiative recombination current by the EQE [mA cm⁻²], for as many faces as the limit emits from; NaN where
        there is no EQE (`physics.quantum.radiative_current`).
    tail_share : array_like
        Share of `j0_rad` that rests on an extrapolated tail, 0 to 1.
    fitted : array_like
        1 where ideality and resistances come from a fit to a J–V sweep, 0 where they were measured otherwise.
    """

    gap: Array
    voc: Array
    jsc: Array
    ff: Array
    temperature: Array
    irradiance: Array
    ere: Array
    ideality: Array
    rs: Array
    rsh: Array
    pseudo_ff: Array
    eqe_above: Array
    eqe_below: Array
    reflected: Array
    j0_rad: Array
    tail_share: Array
    fitted: Array

    @classmethod
    def of(
        cls,
        *,
        gap: ArrayLike,
        voc: ArrayLike,
        jsc: ArrayLike,
        ff: ArrayLike,
        temperature: ArrayLike = ZERO_CELSIUS + 25.0,
        irradiance: ArrayLike = 100.0,
        ere: ArrayLike = UNKNOWN,
        ideality: ArrayLike = UNKNOWN,
        rs: ArrayLike = UNKNOWN,
        rsh: ArrayLike = UNKNOWN,
        pseudo_ff: ArrayLike = UNKNOWN,
        eqe_above: ArrayLike = UNKNOWN,
        eqe_below: ArrayLike = UNKNOWN,
        reflected: ArrayLike = UNKNOWN,
        j0_rad: ArrayLike = UNKNOWN,
        tail_share: ArrayLike = 0.0,
        fitted: ArrayLike = 0.0,
    ) -> Cell:
        """Cells from scalars and arrays of mutually broadcastable shapes; units as the class says.

        Raises
        ------
        ValueError
            When the shapes do not broadcast.
        """
        known = (gap, voc, jsc, ff, temperature, irradiance, ere, ideality, rs, rsh, pseudo_ff)
        return cls(*aligned(*known, eqe_above, eqe_below, reflected, j0_rad, tail_share, fitted))

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of every field."""
        return self.gap.shape

    @property
    def power(self) -> Array:
        """Maximum power Voc·Jsc·FF [mW cm⁻²]."""
        return self.jsc * self.voc * self.ff

    def __getitem__(self, index: object) -> Cell:
        """The cells at an index of the common shape."""
        return Cell(*(getattr(self, f.name)[index] for f in fields(self)))
