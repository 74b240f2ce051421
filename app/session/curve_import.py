"""From the curves of a measurement file to the curves and figures of a cell."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from app.files.measured import EqeCurve, Irradiance, JvSweep, MeasuredCurve, Pairs
from app.files.numbers import write_number
from app.files.table_error import TableError
from app.session.commands import SetFigures
from app.session.curves import Curves, Source, Sweep, edge_for, fit_for, gap_figures
from app.session.fields import FIELD_BY_KEY
from app.session.state import CellEntry, Value
from physics.diode_fit import DiodeFit
from physics.light_series import LightSeries, ideality_of, pseudo_curve
from physics.quantum import Curve
from physics.sweep import SweepFigures, density, figures_of_merit, hysteresis

_NO_AREA = "The file gives currents, not densities: type the cell's area first, then open the file again."
_FITTED = (("n", "ideality"), ("rs", "rs"), ("rsh", "rsh"))
_DIGITS = 6  # figures are kept to more digits than any of them is known to


@dataclass
class _Taking:
    """What has been taken so far."""

    entry: CellEntry
    curves: Curves
    values: dict[str, Value] = field(default_factory=dict)
    sources: dict[str, Source] = field(default_factory=dict)
    sentences: list[str] = field(default_factory=list)

    def number(self, key: str, default: float = np.nan) -> float:
        """A field's number as it will be [the unit of physics]; `default` where it holds none that can be."""
        value, about = self.values.get(key, self.entry.values[key]), FIELD_BY_KEY[key]
        if not isinstance(value, float | int) or about.fault(float(value)):
            return default
        return float(about.to_physics(value))

    def put(self, key: str, value: float, source: Source) -> None:
        """Put a figure [unit of physics] into its field."""
        field_ = FIELD_BY_KEY[key]
        self.values[key] = float(f"{value / field_.scale - field_.offset:.{_DIGITS}g}")
        self.sources[key] = source


def taken(measured: Sequence[MeasuredCurve], entry: CellEntry, file: str) -> tuple[SetFigures, tuple[str, ...]]:
    """What a cell takes from the curves of a file, as one change.

    Parameters
    ----------
    measured : sequence of MeasuredCurve
        As `app.files.measured.apply` gives them.
    entry : CellEntry
        The cell.
    file : str
        Name of the file.

    Returns
    -------
    command : SetFigures
        Curves and figures. A gap that was typed stays.
    sentences : tuple of str
        What was taken, and what could not be.

    Raises
    ------
    TableError
        Where nothing in the file can be taken.
    """
    take = _Taking(entry, entry.curves)
    _take_sweeps(take, [m for m in measured if isinstance(m, JvSweep)])
    for curve in measured:
        if isinstance(curve, EqeCurve):
            _take_eqe(take, curve)
        elif isinstance(curve, Pairs):
            _take_series(take, curve)
        elif isinstance(curve, Irradiance):
            take.sentences.append("Spectra of lamps are not taken by this version.")
    if take.curves is entry.curves:
        raise TableError(" ".join(take.sentences) or f"{file} holds no curve that a cell can take.")
    command = SetFigures(entry.ident, take.values, take.sources, take.curves, f"import of {file}")
    return command, tuple(take.sentences)


def next_sweep(entry: CellEntry) -> tuple[SetFigures, tuple[str, ...]] | None:
    """The change that reads the figures off the next of several sweeps under light; None where there is no other.

    The sweep that feeds the figures stands first, here and in the plots.
    """
    lit = [sweep for sweep in entry.curves.sweeps if sweep.lit]
    if len(lit) < 2:
        return None
    ordered = (*lit[1:], lit[0])
    dark = (sweep for sweep in entry.curves.sweeps if not sweep.lit)
    take = _Taking(entry, replace(entry.curves, sweeps=(*ordered, *dark)))
    _read_off(take, list(ordered))
    name = ordered[0].direction or ordered[0].label
    command = SetFigures(entry.ident, take.values, take.sources, take.curves, f"figures from the {name} sweep")
    return command, tuple(take.sentences)


def _per_area(take: _Taking, curve: JvSweep | Pairs, current: np.ndarray) -> np.ndarray | None:
    """Current densities [mA cm⁻²], or None where no area is known."""
    if curve.is_density:
        return current
    area = curve.area_cm2 or take.number("area")
    if not area > 0:
        return None
    if curve.area_cm2 and "area" not in take.values:
        take.values["area"] = float(curve.area_cm2)
    return density(current, area)


def _take_sweeps(take: _Taking, measured: list[JvSweep]) -> None:
    sweeps = []
    for curve in measured:
        current = _per_area(take, curve, curve.current)
        if current is None:
            take.sentences.append(_NO_AREA)
            return
        sweeps.append(Sweep(curve.label, curve.voltage, current, curve.direction, curve.lit is not False))
    if not sweeps:
        return
    take.curves = replace(take.curves, sweeps=tuple(sweeps))
    lit = [sweep for sweep in sweeps if sweep.lit]
    if not lit:
        take.sentences.append("The sweep was taken in the dark: it is kept, but no figure is read off it.")
        return
    _read_off(take, lit)


def _read_off(take: _Taking, lit: list[Sweep]) -> None:
    """Figures and fit of the first of some sweeps under light, and what the others say beside it."""
    irradiance = take.number("irradiance", 100.0)
    figures = [figures_of_merit(s.voltage, s.current, irradiance) for s in lit]
    _put_figures(take, lit[0], figures[0])
    _tell_hysteresis(take, lit, figures)
    _put_fit(take, fit_for(lit[0], take.number("temperature", 298.15)))


def _put_figures(take: _Taking, sweep: Sweep, figures: SweepFigures) -> None:
    found = {"voc": figures.voc, "jsc": figures.jsc, "ff": figures.ff}
    for key, estimate in found.items():
        if estimate is not None:
            take.put(key, estimate.value, "sweep")
    known = [FIELD_BY_KEY[key].symbol for key, estimate in found.items() if estimate is not None]
    which = f" ({sweep.direction})" if sweep.direction and sweep.direction not in sweep.label.casefold() else ""
    if known:
        take.sentences.append(f"{', '.join(known)} from the sweep {sweep.label or 'of the file'}{which}.")
    if figures.message:
        take.sentences.append(figures.message)


def _tell_hysteresis(take: _Taking, lit: list[Sweep], figures: list[SweepFigures]) -> None:
    by = {sweep.direction: f for sweep, f in zip(lit, figures, strict=True)}
    if "forward" in by and "reverse" in by:
        found = hysteresis(by["forward"], by["reverse"])
        if found is not None:
            amount = write_number(100.0 * found.value, decimals=1)
            take.sentences.append(f"Hysteresis (P reverse − P forward)/P reverse: {amount} %.")


def _put_fit(take: _Taking, fit: DiodeFit) -> None:
    """Take from the fit what it knows; a bound is told, and is no number for the ledger."""
    if not fit.converged:
        take.sentences.append(f"No one-diode fit: {fit.message}")
        return
    told = [FIELD_BY_KEY[key].symbol for name, key in _FITTED if fit.parameters[name].status == "fitted"]
    if told:
        take.sentences.append(f"{', '.join(told)} from a one-diode fit.")
    for name, key in _FITTED:
        parameter, about = fit.parameters[name], FIELD_BY_KEY[key]
        if parameter.status == "fitted":
            take.put(key, parameter.value, "fit")
            continue
        if take.entry.sources.get(key) == "fit":
            take.values[key] = None  # of an earlier sweep
        stated = parameter.stated
        amount = "" if stated is None else f" of {write_number(stated, 3)}{f' {about.unit}' if about.unit else ''}"
        take.sentences.append(f"{about.symbol}: {parameter.status}{amount}.")
    if fit.message:
        take.sentences.append(fit.message)


def _take_eqe(take: _Taking, measured: EqeCurve) -> None:
    curve = Curve(measured.wavelength, measured.eqe)
    if measured.quantity == "reflectance":
        take.curves = replace(take.curves, reflectance=curve)
        take.sentences.append("Reflectance taken.")
        return
    take.curves = replace(take.curves, eqe=curve)
    found = gap_figures(curve)
    typed = isinstance(take.entry.values["gap"], float) and "gap" not in take.entry.sources
    if "inflection" not in found:
        take.sentences.append("EQE taken; no gap could be read off it.")
    elif typed:
        inflection = write_number(found["inflection"])
        take.sentences.append(f"EQE taken; the typed gap stays (the EQE's inflection is at {inflection} eV).")
    else:
        take.put("gap", found["inflection"], "inflection")
        take.sentences.append("EQE taken, and the gap from its inflection.")
    _, faults = edge_for(curve).tail_at(take.number("temperature", 298.15))
    take.sentences += [fault.value for fault in faults]
    if measured.eqe.max() > 1.0:
        take.sentences.append("The EQE exceeds 100 % somewhere: check its unit and the reference cell.")


def _take_series(take: _Taking, measured: Pairs) -> None:
    jsc = _per_area(take, measured, measured.jsc)
    if jsc is None:
        take.sentences.append(_NO_AREA)
        return
    series = LightSeries.of(jsc, measured.voc)
    take.curves = replace(take.curves, series=series)
    slope = ideality_of(series, take.number("temperature", 298.15))
    if slope.fault is not None:
        take.sentences.append(slope.fault.value)
    elif "ideality" not in take.sources and take.entry.sources.get("ideality") != "fit":
        take.put("ideality", slope.value, "light series")
        take.sentences.append("Ideality from Voc at several light levels.")
    one_sun = take.number("jsc")
    if not np.isfinite(one_sun):
        take.sentences.append("Give Jsc, and the pseudo fill factor can be read off the series.")
        return
    pseudo = pseudo_curve(series, one_sun)
    if pseudo.fault is not None:
        take.sentences.append(pseudo.fault.value)
    else:
        take.put("pseudo_ff", pseudo.fill_factor, "light series")
        take.sentences.append("Pseudo fill factor from the series.")
