"""The lines that luminescence of partial stacks puts in the place of the one for non-radiative recombination."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from physics.attribution import Attribution
from physics.lines import LINES, VOLTAGE, Basis, Family, Form, Implied, Line, Section
from physics.quantities import Quantities
from physics.stacks import Stacks
from physics.units import Array

REPLACED = "nonradiative"
_ROSS = "Ross 1967, doi:10.1063/1.1840606"
_RESCALED = "brought to one sun with the ideality given"

Delta = Callable[[Quantities], Array]


def _edge_forms(equation: str, delta: Delta, reason: str, implied: Implied | None = None) -> tuple[Form, ...]:
    """A Δ that is counted from the radiative voltage is known as that is: the forms of the line that is replaced."""
    of_edge = next(line for line in LINES if line.key == REPLACED).forms
    return tuple(Form(equation, delta, f.basis, f"{reason}, {f.reason}", f.applies, implied) for f in of_edge)


def _forms(
    stacks: Stacks, equation: str, delta: Delta, reason: str, implied: Implied | None = None
) -> tuple[Form, ...]:
    if stacks.rescaled:
        return (Form(equation, delta, Basis.ASSUMED, f"{reason}, {_RESCALED}", implied=implied),)
    return (Form(equation, delta, Basis.MEASURED, reason, implied=implied),)


def _line(key: str, title: str, short: str, forms: tuple[Form, ...]) -> Line:
    return Line(key, title, short, Family.NONRADIATIVE, Section.LIMIT_TO_CELL, VOLTAGE, forms, _ROSS)


def _bulk(stacks: Stacks) -> Line:
    equation, reason = "−{vt} · ln {yield_bare}", "luminescence of the bare absorber"

    def delta(q: Quantities) -> Array:
        return -q.vt * np.log(q.number("yield_bare"))

    with_edge = stacks.by_voltage and not stacks.rescaled
    forms = _edge_forms(equation, delta, reason) if with_edge else _forms(stacks, equation, delta, reason)
    return _line("nonradiative_bulk", "Non-radiative, in the absorber", "absorber", forms)


def _contact(stacks: Stacks, attribution: Attribution, k: int, name: str) -> Line:
    """The line of contact k, counted from 1."""
    if attribution == "ladder":
        equation = f"{{vt}} · ln({{recombination_{k}}} / {{recombination_{k - 1}}})"
    else:
        equation = f"{{vt}} · (1/{{yield_{k}}} − 1/{{yield_bare}}) / Λ(1/{{yield_bare}}, 1/{{yield_stack}})"
    alone = Implied(
        "alone", f"{{vt}} · ln({{yield_bare}} / {{yield_{k}}})",
        lambda q: q.vt * np.log(q.number("yield_bare") / q.number(f"yield_{k}")), "V",
    )
    forms = _forms(stacks, equation, lambda q: q.number(f"share_{k}"), "luminescence with one contact", alone)
    return _line(f"nonradiative_interface:{name}", f"Non-radiative, at {name}", name, forms)


def _others(stacks: Stacks) -> Line:
    """What the finished stack recombines beyond absorber and single contacts, or all of it where none were measured."""
    more = bool(stacks.contacts)
    forms = _forms(
        stacks, "{vt} · ln({yield_bare} / {yield_stack})" + (" − {contacts}" if more else ""),
        lambda q: q.vt * np.log(q.number("yield_bare") / q.number("yield_stack")) - q.number("contacts"),
        "luminescence of the finished cell",
    )
    title = "Non-radiative, beyond the single contacts" if more else "Non-radiative, at the interfaces"
    return _line("nonradiative_interface", title, "other interfaces" if more else "interfaces", forms)


def _to_voc(stacks: Stacks) -> Line:
    equation = "{nonradiative} + {vt} · ln {yield_stack}"
    splitting = Implied(
        "splitting", "{voc_rad} + {vt} · ln {yield_stack}",
        lambda q: q.voc_rad + q.vt * np.log(q.number("yield_stack")), "V",
    )

    def delta(q: Quantities) -> Array:
        return q.number("nonradiative") + q.vt * np.log(q.number("yield_stack"))

    reason = "from the splitting in the finished stack to Voc"
    if stacks.finished is None:
        reason = "no luminescence of the finished cell: absorber and contacts added up"
        forms: tuple[Form, ...] = (Form(equation, delta, Basis.ASSUMED, reason, implied=splitting),)
    elif stacks.rescaled or stacks.by_voltage:
        forms = _forms(stacks, equation, delta, reason, splitting)
    else:
        forms = _edge_forms(equation, delta, reason, splitting)
    return _line("nonradiative_contact", "Non-radiative, between stack and Voc", "stack to Voc", forms)


def lines_with(stacks: Stacks, attribution: Attribution) -> tuple[Line, ...]:
    """All lines of the ledger of a cell whose partial stacks were measured."""
    parts = [_bulk(stacks)]
    parts += [_contact(stacks, attribution, k, name) for k, (name, _) in enumerate(stacks.contacts, 1)]
    if stacks.finished is not None:
        parts.append(_others(stacks))
    parts.append(_to_voc(stacks))
    at = next(k for k, line in enumerate(LINES) if line.key == REPLACED)
    return (*LINES[:at], *parts, *LINES[at + 1 :])
