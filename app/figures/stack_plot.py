"""The splitting of the quasi-Fermi levels from stack to stack, down to Voc. No Qt, no physics."""

from __future__ import annotations

import numpy as np

from app.figures.plot_parts import STALE, caption_of, cell_name, round_range
from app.figures.spec import Mark, PlotSpec, Series
from app.session.outcome import Picture
from app.wording import THIN, with_unit

_LONGEST = 18


def stack_plot_of(picture: Picture, stale: bool = False, *, captioned: bool = True) -> PlotSpec | None:
    """Radiative voltage, splitting of each stack, and Voc [V], from top to bottom; None without partial stacks."""
    ledger = picture.ledger
    q = ledger.quantities
    if not q.more:
        return None
    radiative, vt, voc = float(q.voc_rad), float(q.vt), float(q.voc)
    contacts = [
        entry.line.key.partition(":")[2] for entry in ledger.entries if entry.line.key.startswith("nonradiative_interf")
    ]
    contacts = [name for name in contacts if name]
    levels = [("radiative", radiative), ("bare absorber", radiative + vt * float(np.log(q.number("yield_bare"))))]
    for k, name in enumerate(contacts, 1):
        levels.append((f"with {name}", radiative + vt * float(np.log(q.number(f"yield_{k}")))))
    measured = picture.entry.stacks.finished is not None
    whole = radiative + vt * float(np.log(q.number("yield_stack")))
    levels.append(("finished stack" if measured else "contacts added up", whole))
    levels.append(("Voc", voc))
    places = np.array([level for _, level in levels])
    rows = np.arange(len(levels), 0.0, -1.0)
    low, high = round_range(float(places.min()) - 0.02, float(places.max()) + 0.02)
    return PlotSpec(
        title=f"{cell_name(picture)}: splitting from stack to stack",
        x_label="Quasi-Fermi-level splitting (V)",
        y_label="",
        x_range=(low, high),
        y_range=(0.3, len(levels) + 0.7),
        y_names=tuple((float(row), _short(name)) for row, (name, _) in zip(rows, levels, strict=True)),
        series=(Series("path", "", places, rows, "non-radiative", "dotted"),),
        marks=tuple(
            Mark(
                f"level {at}", f"{level:.3f}{THIN}V", level, float(rows[at]),
                "cell" if name == "Voc" else "limit" if at == 0 else "non-radiative",
                side="e" if level < 0.5 * (low + high) else "w",
            )
            for at, (name, level) in enumerate(levels)
        ),
        caption=(_note(picture), *caption_of(picture)) if captioned else (),
        stale=STALE if stale else "",
    )


def _short(name: str) -> str:
    return name if len(name) <= _LONGEST else f"{name[: _LONGEST - 1].rstrip()}…"


def _note(picture: Picture) -> str:
    stacks = picture.entry.stacks
    note = "Splitting at one sun: radiative voltage + Vt ln of the luminescence yield"
    if any(reading.suns != 1.0 for reading in stacks.readings):
        note += f"; readings at other light levels brought there with n = {with_unit(stacks.ideality or 1.0, '', 3)}"
    return note
