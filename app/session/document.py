"""A session as one open JSON text, and back. The form is described in `resources/session-1.schema.json`.

Numbers are written so that they read back to the last bit. What is read is data from anywhere: everything is checked
for its kind, its size and its sense before any of it is used, and the first fault is told with the place of it.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from types import MappingProxyType
from typing import Any, get_args

import numpy as np

from app.session.curves import NO_CURVES, Curves, Source, Sweep
from app.session.document_reader import DocumentError, Part
from app.session.fields import FIELDS
from app.session.stacks import NO_STACKS, Quantity, Reading, StackReadings
from app.session.state import TYPED, CellEntry, Choices, State, Unread, Value
from physics.attribution import ATTRIBUTIONS
from physics.light_series import LightSeries
from physics.quantum import Curve
from physics.units import Array

FORMAT = "gapledger session"
VERSION = 1
_MOST_CELLS = 100_000
_NAME, _TEXT = 1_000, 100_000  # characters
_PER_LINE = 8  # numbers of a curve, so that a changed point changes one line


# ------------------------------------------------------------------ writing


def to_text(state: State, program: str = "") -> str:
    """A session as text, ending in a line feed.

    Parameters
    ----------
    state : State
    program : str
        Version of the program that writes, for a person who looks into the file.
    """
    document: dict[str, Any] = {
        "format": FORMAT,
        "version": VERSION,
        "program": program,
        "choices": {"attribution": state.choices.attribution, "faces": state.choices.faces},
        "picked": None if state.picked is None else state.position(state.picked),
        "line": state.line,
        "cells": [_cell(cell) for cell in state.cells],
    }
    return f"{_written(document, '')}\n"


def _cell(cell: CellEntry) -> dict[str, Any]:
    written: dict[str, Any] = {"name": cell.name, "group": cell.group, "spectrum": cell.spectrum, "note": cell.note}
    written["values"] = {key: _value(value) for key, value in cell.values.items()}
    written["sources"] = dict(cell.sources)
    curves = cell.curves
    if curves.sweeps:
        written["sweeps"] = [_sweep(sweep) for sweep in curves.sweeps]
    for name, curve in (("eqe", curves.eqe), ("reflectance", curves.reflectance)):
        if curve is not None:
            written[name] = {"wavelength_nm": curve.wavelength.tolist(), "fraction": curve.value.tolist()}
    if curves.series is not None:
        written["light_series"] = {"jsc_mA_cm2": curves.series.jsc.tolist(), "voc_V": curves.series.voc.tolist()}
    if cell.stacks != NO_STACKS:
        written["stacks"] = _stacks(cell.stacks)
    return written


def _value(value: Value) -> Any:
    return {"typed": value.text, "fault": value.fault} if isinstance(value, Unread) else value


def _sweep(sweep: Sweep) -> dict[str, Any]:
    return {
        "label": sweep.label,
        "direction": sweep.direction,
        "lit": sweep.lit,
        "voltage_V": sweep.voltage.tolist(),
        "current_mA_cm2": sweep.current.tolist(),
    }


def _stacks(stacks: StackReadings) -> dict[str, Any]:
    return {
        "bare": _reading(stacks.bare),
        "contacts": [{"name": name, "reading": _reading(reading)} for name, reading in stacks.contacts],
        "finished": _reading(stacks.finished),
        "ideality": stacks.ideality,
    }


def _reading(reading: Reading | None) -> dict[str, Any] | None:
    if reading is None:
        return None
    return {"value": reading.value, "quantity": reading.quantity, "suns": reading.suns}


def _written(value: Any, indent: str) -> str:
    """JSON with one entry a line, and numbers of a curve in lines of a few."""
    deeper = f"{indent} "
    if isinstance(value, Mapping) and value:
        entries = (f"{deeper}{_scalar(key)}: {_written(each, deeper)}" for key, each in value.items())
        return "{\n" + ",\n".join(entries) + f"\n{indent}}}"
    if isinstance(value, list) and value:
        if isinstance(value[0], float):
            lines = (value[at : at + _PER_LINE] for at in range(0, len(value), _PER_LINE))
            return "[\n" + ",\n".join(deeper + ", ".join(map(_scalar, line)) for line in lines) + f"\n{indent}]"
        return "[\n" + ",\n".join(f"{deeper}{_written(each, deeper)}" for each in value) + f"\n{indent}]"
    return _scalar(value)


def _scalar(value: Any) -> str:
    return json.dumps(value, ensure_ascii=False, allow_nan=False)


# ------------------------------------------------------------------ reading


def from_text(text: str) -> State:
    """A session from text that `to_text` wrote, in this version of the form or an earlier one.

    Raises
    ------
    DocumentError
        With a sentence: what is wrong, and where.
    """
    whole = Part.of_text(text)
    form = whole.get("format")
    if form.value != FORMAT:
        raise DocumentError("This is no session of Gapledger.")
    version = whole.get("version").whole(1, 10**6)
    if version > VERSION:
        raise DocumentError(
            f"This session was written by a newer version of Gapledger (form {version}; this one reads up to "
            f"{VERSION}): update the program, and open it there."
        )
    whole.only(("format", "version", "program", "choices", "picked", "line", "cells"))
    whole.get("program").text(_NAME)
    choices = whole.get("choices")
    choices.only(("attribution", "faces"))
    cells = [_read_cell(part, ident) for ident, part in enumerate(whole.get("cells").items(_MOST_CELLS), 1)]
    picked = whole.get("picked")
    return State(
        cells=tuple(cells),
        picked=None if picked.value is None else picked.whole(0, len(cells) - 1) + 1,
        line=whole.get("line").text(_NAME),
        choices=Choices(
            attribution=choices.get("attribution").one_of(ATTRIBUTIONS),
            faces=choices.get("faces").one_of((1, 2)),
        ),
        next_ident=len(cells) + 1,
    )


def _read_cell(part: Part, ident: int) -> CellEntry:
    must = ("name", "group", "spectrum", "note", "values", "sources")
    part.only((*must, "sweeps", "eqe", "reflectance", "light_series", "stacks"))
    values = part.get("values")
    values.only([field.key for field in FIELDS])
    read: dict[str, Value] = {field.key: _read_value(values.get(field.key)) for field in FIELDS}
    sources = part.get("sources")
    sources.only([field.key for field in FIELDS])
    origins = {key: each.one_of(get_args(Source)) for key, each in sources.members()}
    return CellEntry(
        ident,
        part.get("name").text(_NAME),
        part.get("group").text(_NAME),
        part.get("spectrum").text(_NAME),
        MappingProxyType(read),
        part.get("note").text(_TEXT),
        _read_curves(part),
        MappingProxyType(origins) if origins else TYPED,
        _read_stacks(part.get("stacks")) if part.has("stacks") else NO_STACKS,
    )


def _read_value(part: Part) -> Value:
    if part.value is None:
        return None
    if isinstance(part.value, dict):
        part.only(("typed", "fault"))
        return Unread(part.get("typed").text(_NAME), part.get("fault").text(_NAME))
    return part.number()


def _read_curves(part: Part) -> Curves:
    sweeps = tuple(map(_read_sweep, part.get("sweeps").items(_MOST_CELLS))) if part.has("sweeps") else ()
    eqe, reflectance = (_read_curve(part.get(n)) if part.has(n) else None for n in ("eqe", "reflectance"))
    series = _read_series(part.get("light_series")) if part.has("light_series") else None
    found = Curves(sweeps, eqe, reflectance, series)
    return found if sweeps or eqe or reflectance or series else NO_CURVES


def _read_sweep(part: Part) -> Sweep:
    part.only(("label", "direction", "lit", "voltage_V", "current_mA_cm2"))
    voltage, current = _pair(part, "voltage_V", "current_mA_cm2")
    return Sweep(
        part.get("label").text(_NAME),
        voltage,
        current,
        part.get("direction").one_of(("", "forward", "reverse")),
        part.get("lit").one_of((True, False)),
    )


def _read_curve(part: Part) -> Curve:
    part.only(("wavelength_nm", "fraction"))
    wavelength, fraction = _pair(part, "wavelength_nm", "fraction")
    try:
        return Curve(wavelength, fraction)
    except ValueError as fault:
        raise part.wrong(str(fault)) from fault


def _read_series(part: Part) -> LightSeries:
    part.only(("jsc_mA_cm2", "voc_V"))
    jsc, voc = _pair(part, "jsc_mA_cm2", "voc_V")
    if not (np.all(jsc > 0) and np.all(voc > 0) and np.all(np.diff(jsc) > 0)):
        raise part.wrong("Jsc and Voc must be positive, and Jsc must rise from level to level")
    return LightSeries(jsc, voc)


def _pair(part: Part, first: str, second: str) -> tuple[Array, Array]:
    a, b = part.get(first).numbers(), part.get(second).numbers()
    if a.size != b.size:
        raise part.wrong(f"{first} and {second} must be of one length, not {a.size} and {b.size}")
    return a, b


def _read_stacks(part: Part) -> StackReadings:
    part.only(("bare", "contacts", "finished", "ideality"))
    contacts = []
    for each in part.get("contacts").items(1000):
        each.only(("name", "reading"))
        contacts.append((each.get("name").text(_NAME), _read_reading(each.get("reading"))))
    ideality = part.get("ideality")
    return StackReadings(
        _read_reading(part.get("bare")),
        tuple(contacts),
        _read_reading(part.get("finished")),
        None if ideality.value is None else ideality.number(0.1, 10.0),
    )


def _read_reading(part: Part) -> Reading | None:
    if part.value is None:
        return None
    part.only(("value", "quantity", "suns"))
    quantity: Quantity = part.get("quantity").one_of(get_args(Quantity))
    value = part.get("value").number(1e-300, 1.0 if quantity == "yield" else 5.0)
    return Reading(value, quantity, part.get("suns").number(1e-300, 1e5))
