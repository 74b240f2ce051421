"""The photons of a light, and what becomes of them in a cell. No Qt, no physics."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from app.figures.plot_parts import STALE, caption_of, cell_name, round_range
from app.figures.spec import PlotSpec, Role, Series
from app.files.numbers import write_number
from app.session.light import light_named
from app.session.outcome import Picture
from app.wording import THIN, unbroken, with_unit
from physics.units import EV_NM, Array

_STEP_NM = 5.0  # means over this much wavelength keep a drawn spectrum readable


@lru_cache(maxsize=16)
def _light_bins(spectrum: str) -> tuple[Array, Array, float]:
    """Narrow bins of a light up to 99 % of its photons: their middles [nm] and photon current a wavelength.

    All is a share of the light's power: [µA nm⁻¹ mW⁻¹], and the current of all its photons [mA mW⁻¹].
    """
    light = light_named(spectrum)
    low, high = light.gap_range
    edges = np.arange(EV_NM / high, min(EV_NM / low, 20_000.0), _STEP_NM)
    shorter = light.photon_current_above(np.clip(EV_NM / edges, low, high)) / light.power
    enough = int(np.searchsorted(shorter, 0.99 * shorter[-1])) + 1
    flux = 1e3 * np.diff(shorter[: enough + 1]) / _STEP_NM
    return edges[: flux.size] + 0.5 * _STEP_NM, flux, float(light.photon_current_above(low)) / light.power


def spectrum_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec:
    """The photons of the light over wavelength: collected, lost above the gap, and below it."""
    ledger, curves = picture.ledger, picture.entry.curves
    q, incident = ledger.quantities, float(ledger.limit.incident)
    wavelength, share, all_photons = _light_bins(picture.entry.spectrum)
    flux, edge = share * incident, EV_NM / float(ledger.limit.gap)
    x = np.insert(wavelength, int(np.searchsorted(wavelength, edge)), [edge, edge])
    y = np.interp(x, wavelength, flux, right=0.0)
    inside = np.arange(x.size) <= int(np.searchsorted(wavelength, edge))
    above, below = np.where(inside, y, np.nan), np.where(inside, np.nan, y)
    limit = float(q.jsc_limit)
    areas: list[tuple[str, str, float, Array, Role]] = [
        ("below", "below the gap", all_photons * incident - limit, below, "muted")
    ]
    if curves.eqe is None or math.isnan(float(q.jsc_eqe)):
        areas.append(("above", "above the gap", limit, above, "spectral"))
        note = "No EQE tells what of the photons above the gap is collected"
    else:
        entering = above
        lost = limit - float(q.jsc_eqe)
        if curves.reflectance is not None:
            areas.append(("reflected", "reflected", float(q.jsc_reflected), above, "limit"))
            lost -= float(q.jsc_reflected)
            entering = above * (1.0 - np.clip(curves.reflectance.at(EV_NM / x), 0.0, 1.0))
        areas.append(("above", "lost above the gap", lost, entering, "spectral"))
        collected = float(q.jsc_eqe) + float(q.jsc_sub_gap)
        areas.append(("collected", "collected", collected, y * np.maximum(curves.eqe.at(EV_NM / x), 0.0), "cell"))
        note = "Collected: light times EQE"
    decimals = max(0, min(3 - math.floor(math.log10(limit)), 6)) if limit > 0 else 2
    shown = [f"{name} {write_number(amount, decimals=decimals)}" for _, name, amount, _, _ in areas]
    for k in range(len(shown)) if captioned else (-1,):  # a live plot has room for the unit once
        shown[k] += f"{THIN}mA cm⁻²"
    drawn = f"{note}; drawn as means over {unbroken(with_unit(_STEP_NM, 'nm'))}"
    return PlotSpec(
        title=f"{cell_name(picture)}: photons of the light",
        x_label="Wavelength (nm)",
        y_label="Photons as current (µA cm⁻² nm⁻¹)",
        y_short="µA cm⁻² nm⁻¹",
        x_range=round_range(float(wavelength[0]), min(2.0 * edge, float(wavelength[-1]))),
        y_range=round_range(0.0, 1.05 * float(flux.max())),
        series=tuple(
            Series(key, label, x, rim, role, filled=True)
            for label, (key, _, _, rim, role) in zip(shown, areas, strict=True)
        ),
        caption=(drawn, *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )
