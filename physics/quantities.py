"""Every number that a ledger line may be made of, by name, with its symbol and unit."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import Any

import numpy as np

from physics.attribution import Attribution, factor_weights
from physics.cell import Cell
from physics.diode import Diode, ideal_fill_factor
from physics.limit import Limit
from physics.stacks import Stacks, splitting_of
from physics.units import Array, Mask, thermal_voltage


@dataclass(frozen=True)
class Meaning:
    """What a quantity is: its symbol ("_" starts a subscript), unit ("" for a pure number) and name."""

    symbol: str
    unit: str
    title: str


def _quantity(symbol: str, unit: str, title: str) -> Any:
    return field(metadata={"meaning": Meaning(symbol, unit, title)})


@dataclass(frozen=True, eq=False)
class Quantities:
    """The numbers of a ledger, all of one broadcast shape; NaN where unknown. Units stand beside each field."""

    incident: Array = _quantity("P_sun", "mW cm⁻²", "incident power")
    above_gap: Array = _quantity("P_above", "mW cm⁻²", "power in photons above the gap")
    gap: Array = _quantity("E_g", "eV", "gap")
    temperature: Array = _quantity("T", "K", "cell temperature")
    vt: Array = _quantity("V_t", "V", "thermal voltage kT/q")
    jsc_limit: Array = _quantity("J_lim", "mA cm⁻²", "photon current above the gap")
    j0_limit: Array = _quantity("J_0,lim", "mA cm⁻²", "thermal emission above the gap")
    voc_limit: Array = _quantity("V_lim", "V", "open-circuit voltage of the limit")
    ff_limit: Array = _quantity("FF_lim", "", "fill factor of the limit")
    power_limit: Array = _quantity("P_lim", "mW cm⁻²", "power of the limit")
    jsc: Array = _quantity("J_sc", "mA cm⁻²", "short-circuit current density of the cell")
    voc: Array = _quantity("V_oc", "V", "open-circuit voltage of the cell")
    ff: Array = _quantity("FF", "", "fill factor of the cell")
    power: Array = _quantity("P_cell", "mW cm⁻²", "power of the cell")
    voc_limit_at_jsc: Array = _quantity("V_lim(J_sc)", "V", "step-edge voltage at the cell's own current")
    jsc_eqe: Array = _quantity("J_EQE", "mA cm⁻²", "current of the EQE above the gap")
    jsc_sub_gap: Array = _quantity("J_sub", "mA cm⁻²", "current of the EQE below the gap")
    jsc_reflected: Array = _quantity("J_R", "mA cm⁻²", "photons above the gap that are reflected, as a current")
    j0_rad: Array = _quantity("J_0,rad", "mA cm⁻²", "radiative recombination current of the cell")
    voc_rad: Array = _quantity("V_rad", "V", "radiative voltage of the cell")
    ere_reciprocal: Array = _quantity("ERE_rec", "", "external radiative efficiency by reciprocity (Rau 2007)")
    ere: Array = _quantity("ERE", "", "external radiative efficiency")
    ideality: Array = _quantity("n", "", "ideality factor")
    rs: Array = _quantity("R_s", "Ω cm²", "series resistance")
    rsh: Array = _quantity("R_sh", "Ω cm²", "shunt resistance")
    pseudo_ff: Array = _quantity("pFF", "", "fill factor without series resistance")
    tail_share: Array = _quantity("s_tail", "", "share of J_0,rad that rests on the extrapolated tail")
    fitted: Array = _quantity("fit", "", "1 where n, R_s and R_sh come from a fit")
    ff_voltage: Array = _quantity("FF_n=1", "", "ideal diode, n = 1, at the cell's V_oc")
    ff_ideality: Array = _quantity("FF_n", "", "diode with the cell's n")
    ff_without_rs: Array = _quantity("FF_no Rs", "", "diode before R_s is added")
    ff_with_rs: Array = _quantity("FF_with Rs", "", "the same diode with R_s")
    ff_without_rsh: Array = _quantity("FF_no Rsh", "", "diode before R_sh is added")
    ff_with_rsh: Array = _quantity("FF_with Rsh", "", "the same diode with R_sh")
    ff_diode: Array = _quantity("FF_diode", "", "diode with all that is known of n, R_s and R_sh")
    weight_current: Array = _quantity("w_J", "V", "power per unit of current")
    weight_voltage: Array = _quantity("w_V", "mA cm⁻²", "power per unit of voltage")
    weight_fill: Array = _quantity("w_FF", "mW cm⁻²", "power per unit of fill factor")

    #: Numbers that only some cells have, such as the yields of partial stacks, by a name that no field above has.
    more: Mapping[str, tuple[Meaning, Array]] = field(default_factory=dict)

    def number(self, name: str) -> Array:
        """The quantity called `name`; AttributeError where there is none."""
        value: Array = self.more[name][1] if name in self.more else getattr(self, name)
        return value

    def meaning(self, name: str) -> Meaning:
        """What the quantity called `name` is; KeyError where there is none."""
        return self.more[name][0] if name in self.more else meaning(name)

    def knows(self, name: str) -> Mask:
        """Which cells have a number for the quantity called `name`; worked out once, for all lines that ask."""
        masks: dict[str, Mask] = self.__dict__.setdefault("_known", {})
        mask = masks.get(name)
        if mask is None:
            mask = masks[name] = ~np.isnan(getattr(self, name))
        return mask


def meaning(name: str) -> Meaning:
    """Meaning of the quantity called `name`.

    Raises
    ------
    KeyError
        When there is none of that name.
    """
    return _MEANINGS[name]


_MEANINGS: dict[str, Meaning] = {f.name: f.metadata["meaning"] for f in fields(Quantities) if "meaning" in f.metadata}


def quantities_of(
    cell: Cell, limit: Limit, attribution: Attribution, stacks: Stacks | None = None
) -> Quantities:
    """All quantities of a ledger.

    Parameters
    ----------
    cell : Cell
        The measured cells.
    limit : Limit
        Their limits, of the same shape.
    attribution : {"log-mean", "ladder"}
        Convention for the weights.
    stacks : Stacks, optional
        Luminescence of partial stacks.

    Returns
    -------
    Quantities
        Without an EQE the absorption edge is taken as a step, so `j0_rad` is `j0_limit`, and `voc_rad` equals
        `voc_limit_at_jsc` bit for bit.
    """
    vt = thermal_voltage(cell.temperature)
    voc_limit_at_jsc = vt * np.log1p(cell.jsc / limit.j0)
    j0_rad, voc_rad = limit.j0, voc_limit_at_jsc
    step = np.isnan(cell.j0_rad)
    if not step.all():
        j0_rad = np.where(step, limit.j0, cell.j0_rad)
        voc_rad = vt * np.log1p(cell.jsc / np.where(j0_rad > 0, j0_rad, np.nan))
    weights = factor_weights(
        (limit.jsc, limit.voc, limit.ff), (cell.jsc, cell.voc, cell.ff), attribution
    )
    return Quantities(
        incident=limit.incident,
        above_gap=limit.above_gap,
        gap=limit.gap,
        temperature=limit.temperature,
        vt=vt,
        jsc_limit=limit.jsc,
        j0_limit=limit.j0,
        voc_limit=limit.voc,
        ff_limit=limit.ff,
        power_limit=limit.power,
        jsc=cell.jsc,
        voc=cell.voc,
        ff=cell.ff,
        power=cell.power,
        voc_limit_at_jsc=voc_limit_at_jsc,
        jsc_eqe=cell.eqe_above,
        jsc_sub_gap=cell.eqe_below,
        jsc_reflected=cell.reflected,
        j0_rad=j0_rad,
        voc_rad=voc_rad,
        ere_reciprocal=np.exp((cell.voc - voc_rad) / vt),
        ere=cell.ere,
        ideality=cell.ideality,
        rs=cell.rs,
        rsh=cell.rsh,
        pseudo_ff=cell.pseudo_ff,
        tail_share=cell.tail_share,
        fitted=cell.fitted,
        **_fill_factors(cell, vt),
        weight_current=weights[0],
        weight_voltage=weights[1],
        weight_fill=weights[2],
        more={} if stacks is None else _of_stacks(stacks, cell, voc_rad, vt, attribution),
    )


def _of_stacks(
    stacks: Stacks, cell: Cell, voc_rad: Array, vt: Array, attribution: Attribution
) -> dict[str, tuple[Meaning, Array]]:
    """The numbers of partial stacks: of contact k, counted from 1, under names that end in k."""
    split = splitting_of(stacks, voc_rad, vt, attribution)
    nonradiative = np.where(np.isnan(cell.ere), voc_rad - cell.voc, -vt * np.log(cell.ere))[()]
    found = "measured" if stacks.finished is not None else "absorber and contacts added up"
    numbers = {
        "nonradiative": (Meaning("ΔV_nr", "V", "all non-radiative loss of voltage"), nonradiative),
        "yield_bare": (Meaning("Y_bare", "", "luminescence yield of the bare absorber"), split.bare),
        "yield_stack": (Meaning("Y_stack", "", f"luminescence yield of the finished stack ({found})"), split.stack),
        "contacts": (
            Meaning("ΔV_contacts", "V", "shares of the single contacts"),
            sum(split.shares, np.zeros(()))[()],
        ),
    }
    for k, ((name, _), alone, share) in enumerate(zip(stacks.contacts, split.alone, split.shares, strict=True), 1):
        numbers[f"yield_{k}"] = (Meaning(f"Y_{k}", "", f"luminescence yield with {name} alone"), alone)
        numbers[f"share_{k}"] = (Meaning(f"ΔV_{k}", "V", f"share of {name}"), share)
    for k, value in enumerate(split.recombination):
        which = "the absorber" if k == 0 else f"the absorber and the first {k} contact{'s' if k > 1 else ''}"
        numbers[f"recombination_{k}"] = (Meaning(f"R_{k}", "", f"recombination of {which} over emission"), value)
    return numbers


def _fill_factors(cell: Cell, vt: Array) -> dict[str, Array]:
    """Fill factors of one-diode curves through the measured Jsc and Voc, adding one known thing at a time.

    What is unknown is left out, and then the state equals the one before it bit for bit, so that its line is zero.
    The ideality comes first. Then Rs and Rsh; but where a fill factor without series resistance was measured, Rsh
    and then Rs, so that what stands before that fill factor holds no Rs.
    """
    ideality = np.where(np.isnan(cell.ideality), 1.0, cell.ideality)
    has_rs, has_rsh = ~np.isnan(cell.rs), ~np.isnan(cell.rsh)
    unity, plain = ideal_fill_factor(cell.voc / np.array([vt, ideality * vt]))

    shunt_first = ~np.isnan(cell.pseudo_ff)
    diode = _with_resistances(cell, ideality, plain, has_rs, has_rsh)
    first = _with_resistances(cell, ideality, plain, has_rs & ~shunt_first, has_rsh & shunt_first)
    return {
        "ff_voltage": unity,
        "ff_ideality": plain,
        "ff_without_rs": np.where(shunt_first, first, plain),
        "ff_with_rs": np.where(shunt_first, diode, first),
        "ff_without_rsh": np.where(shunt_first, plain, first),
        "ff_with_rsh": np.where(shunt_first, first, diode),
        "ff_diode": diode,
    }


def _with_resistances(cell: Cell, ideality: Array, plain: Array, rs_known: Mask, rsh_known: Mask) -> Array:
    """Fill factors with Rs and Rsh where the masks say so, and `plain` itself where neither is known."""
    known = rs_known | rsh_known
    if not known.any():
        return plain
    rs, rsh = np.where(rs_known, cell.rs, 0.0), np.where(rsh_known, cell.rsh, np.inf)
    diode = Diode.through(cell.voc, cell.jsc, cell.temperature, ideality, rs, rsh)
    return np.where(known, diode.fill_factor(), plain)
