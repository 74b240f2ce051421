"""Measured curves in physical units."""

from __future__ import annotations

from dataclasses import dataclass

from app.files.measured.reading import CurveQuantity, Direction
from physics.units import Array


@dataclass(frozen=True, eq=False)
class JvSweep:
    """A current–voltage sweep in measured order, its photocurrent positive.

    Attributes
    ----------
    label : str
    voltage : ndarray, shape (n,)
        [V].
    current : ndarray, shape (n,)
        [mA cm⁻²] where `is_density`, else [mA].
    is_density : bool
    area_cm2 : float or None
        Area of the cell [cm²] where it is stated.
    direction : {"forward", "reverse", ""}
        From low to high voltage, or the other way.
    lit : bool or None
        Under light or in the dark; None where that is not known.
    """

    label: str
    voltage: Array
    current: Array
    is_density: bool
    area_cm2: float | None
    direction: Direction
    lit: bool | None


@dataclass(frozen=True, eq=False)
class EqeCurve:
    """A quantum efficiency or a reflectance: `wavelength` [nm] ascending, no two alike, and `eqe` as a fraction."""

    label: str
    wavelength: Array
    eqe: Array
    quantity: CurveQuantity = "eqe"


@dataclass(frozen=True, eq=False)
class Pairs:
    """A light-intensity series: `jsc` [mA cm⁻² where `is_density`, else mA] and `voc` [V], in measured order."""

    label: str
    jsc: Array
    voc: Array
    is_density: bool
    area_cm2: float | None


@dataclass(frozen=True, eq=False)
class Irradiance:
    """A spectrum: `wavelength` [nm] ascending, no two alike, and `irradiance` [W m⁻² nm⁻¹]."""

    label: str
    wavelength: Array
    irradiance: Array


MeasuredCurve = JvSweep | EqeCurve | Pairs | Irradiance
