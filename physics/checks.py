"""Whether the figures of a cell can be right, as masks over all cells at once.

Each check carries its sentence as a template whose names are fields of `physics.quantities.Quantities`; whoever
shows it fills in the numbers.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from enum import Enum

import numpy as np

from physics.ledger import Ledger
from physics.units import Array, Mask

# Our own choice: 30 mV is a factor of three in the ERE at 25 °C, more than luminescence is usually uncertain by.
_VOLTAGE_DISAGREEMENT = 0.03  # [V]
# About 4 % is the mean over 16 000 published perovskite cells (2023); more than 5 % wants a reason (common practice).
_CURRENT_DISAGREEMENT = 0.05
_ROUNDING = 1.0 + 1e-9  # a cell that equals its limit is not above it


class Severity(Enum):
    """What a check means for the result."""

    IMPOSSIBLE = "refused"  # no ledger can be made of it
    DOUBTFUL = "doubtful"  # the ledger stands, the figure wants a second look


@dataclass(frozen=True)
class Check:
    """One check.

    Parameters
    ----------
    key : str
        Name of the check.
    field : str
        Field of `physics.cell.Cell` beside which it is told, or "stacks".
    severity : Severity
    hit : callable
        Ledger -> mask of the cells that fail.
    message : str
        One sentence; names in braces, with a format, are fields of `Quantities`.
    """

    key: str
    field: str
    severity: Severity
    hit: Callable[[Ledger], Mask]
    message: str


def _not_finite(ledger: Ledger) -> Mask:
    cell = ledger.cell
    given = np.isfinite(cell.gap * cell.voc * cell.jsc * cell.ff * cell.temperature)
    diode = ledger.diode
    told = diode.drop_below_voc & diode.shunt_above_line & ~_contradict(ledger)
    return given & told & ~np.isfinite(ledger.closure)


def _of_stacks(ledger: Ledger, name: str) -> Array:
    """A number of the partial stacks, NaN where the cells have none."""
    return ledger.quantities.number(name) if name in ledger.quantities.more else np.full(ledger.cell.shape, np.nan)[()]


def _contradict(ledger: Ledger) -> Mask:
    if not ledger.quantities.more:
        return np.zeros(ledger.cell.shape, dtype=bool)[()]
    return ~np.isfinite(ledger.quantities.number("yield_stack") * ledger.quantities.number("contacts"))


def _above_radiative(ledger: Ledger) -> Mask:
    more = ledger.quantities.more
    hit = np.zeros(ledger.cell.shape, dtype=bool)[()]
    for name in more:
        if name.startswith("yield_"):
            hit = hit | (more[name][1] > _ROUNDING)
    return hit


def _stack_below_voc(ledger: Ledger) -> Mask:
    above_voc = ledger.quantities.vt * np.log(_of_stacks(ledger, "yield_stack")) + _of_stacks(ledger, "nonradiative")
    return above_voc < -_VOLTAGE_DISAGREEMENT


CHECKS: tuple[Check, ...] = (
    Check(
        "not_finite", "jsc", Severity.IMPOSSIBLE, _not_finite,
        "The ledger of these figures is no finite number: one of them is far too small or too large.",
    ),
    Check(
        "voc_above_limit", "voc", Severity.IMPOSSIBLE,
        lambda s: s.cell.voc > s.limit.voc * _ROUNDING,
        "Voc is above the limit of {voc_limit:.4g} V for a gap of {gap:.4g} eV: check Voc, its unit, and the gap.",
    ),
    Check(
        "power_above_limit", "ff", Severity.IMPOSSIBLE,
        lambda s: (s.cell.power > s.limit.power * _ROUNDING) & ~(s.cell.voc > s.limit.voc * _ROUNDING),
        "Voc × Jsc × FF is {power:.4g} mW cm⁻², above the limit of {power_limit:.4g} mW cm⁻² for this gap and light: "
        "check the figures, the area and the irradiance.",
    ),
    Check(
        "rs_too_large", "rs", Severity.IMPOSSIBLE,
        lambda s: ~np.isnan(s.cell.rs) & ~s.diode.drop_below_voc,
        "Rs × Jsc would be more than Voc: no diode curve can do that. Give Rs in Ω cm², not in Ω.",
    ),
    Check(
        "rsh_too_small", "rsh", Severity.IMPOSSIBLE,
        lambda s: ~np.isnan(s.cell.rsh) & ~s.diode.shunt_above_line,
        "So low an Rsh would draw more than Jsc before Voc is reached: no diode curve can do that. "
        "Give Rsh in Ω cm², not in Ω.",
    ),
    Check(
        "jsc_above_limit", "jsc", Severity.DOUBTFUL,
        lambda s: s.cell.jsc > s.limit.jsc * _ROUNDING,
        "Jsc is above the {jsc_limit:.4g} mA cm⁻² that the light holds above this gap: check the area (mask), the "
        "irradiance and the gap.",
    ),
    Check(
        "voc_above_radiative", "voc", Severity.DOUBTFUL,
        lambda s: (s.cell.voc > s.quantities.voc_rad * _ROUNDING) & (s.cell.voc <= s.limit.voc * _ROUNDING),
        "Voc is above the {voc_rad:.4g} V that the cell's own Jsc and edge allow, so the non-radiative line comes out "
        "negative: check Jsc, the gap, and the EQE if there is one.",
    ),
    Check(
        "ere_contradicts_voc", "ere", Severity.DOUBTFUL,
        lambda s: np.abs(s["voltage_residual"].delta) > _VOLTAGE_DISAGREEMENT,
        "This ERE and Voc disagree by more than 30 mV, with the edge as it is known; the difference stands in a line "
        "of its own.",
    ),
    Check(
        "currents_disagree", "jsc", Severity.DOUBTFUL,
        lambda s: np.abs(s.quantities.jsc_eqe + s.quantities.jsc_sub_gap - s.cell.jsc)
        > _CURRENT_DISAGREEMENT * s.cell.jsc,
        "The EQE gives {jsc_eqe:.4g} mA cm⁻² above the gap, the sweep {jsc:.4g}: more than 5 % apart wants a reason, "
        "such as the mask's area, the lamp's spectrum, or an EQE without bias light.",
    ),
    Check(
        "ff_above_ideal", "ff", Severity.DOUBTFUL,
        lambda s: np.isnan(s.cell.ideality) & (s.cell.ff > s.quantities.ff_voltage * _ROUNDING),
        "FF is above that of an ideal diode with n = 1 at this Voc. With Auger recombination, as in silicon, n falls "
        "below 1 and this is right; otherwise check FF.",
    ),
    Check(
        "ff_below_quarter", "ff", Severity.DOUBTFUL,
        lambda s: s.cell.ff <= 0.25,
        "An FF of 25 % or less means an S-shaped or straight J–V curve, which no diode with resistances describes.",
    ),
    Check(
        "pseudo_ff_below_ff", "pseudo_ff", Severity.DOUBTFUL,
        lambda s: s.cell.pseudo_ff < s.cell.ff,
        "The pseudo fill factor is below FF, though it lacks the series resistance: check both.",
    ),
    Check(
        "stacks_contradict", "stacks", Severity.IMPOSSIBLE, _contradict,
        "With these yields the contacts would take away more recombination than the bare absorber has: measure the "
        "finished cell's luminescence too, or leave out the contact that brightens the absorber.",
    ),
    Check(
        "stack_above_radiative", "stacks", Severity.DOUBTFUL, _above_radiative,
        "A stack's yield comes out above 1, as its implied voltage is above the {voc_rad:.4g} V of radiative "
        "recombination alone: check that voltage, the gap, and the light level.",
    ),
    Check(
        "stack_below_voc", "stacks", Severity.DOUBTFUL, _stack_below_voc,
        "The finished stack's luminescence puts its splitting more than 30 mV below Voc, so the line down to Voc is "
        "negative: check the yield's calibration, the light level, and the gap.",
    ),
)


def failed(ledger: Ledger) -> list[tuple[Check, Mask]]:
    """Checks that at least one cell fails, with the mask of the cells concerned (shape of the cells)."""
    with np.errstate(invalid="ignore"):
        hits = [(check, check.hit(ledger)) for check in CHECKS]
        if not ledger.cell.shape:
            return [(check, mask) for check, mask in hits if mask]
        return [(check, mask) for check, mask in hits if mask.any()]
