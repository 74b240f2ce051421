"""Reading the equations that lines show as arithmetic."""

from __future__ import annotations

import re
from string import Formatter

import numpy as np
from numpy.typing import NDArray

from physics.quantities import Quantities

Array = NDArray[np.float64]


def names_in(equation: str) -> set[str]:
    """The quantities of an equation."""
    fields = list(Formatter().parse(equation))
    assert all(not spec and not conversion for _, _, spec, conversion in fields)
    return {name for _, name, _, _ in fields if name is not None}


def _log_mean(a: Array, b: Array) -> Array:
    """As text books have it."""
    return (a - b) / np.log(a / b)


def evaluate(equation: str, q: Quantities) -> Array:
    """The text as it stands, with numbers in place of names; Eg/q, in volts, has the number of Eg in eV."""
    text = equation.replace("−", "-").replace("·", "*").replace("/q", "")
    text = re.sub(r"ln \{(\w+)\}", r"ln({\1})", text)
    rest = re.sub(r"\{\w+\}", "", text)
    assert re.fullmatch(r"(?:ln|exp|Λ|[-+*/()0-9., ])*", rest), f"not arithmetic: {rest!r}"
    code = re.sub(r"\{(\w+)\}", r"(\1)", text)
    numbers = {name: q.number(name) for name in names_in(equation)}
    with np.errstate(invalid="ignore"):
        value = eval(code, {"__builtins__": {}, "ln": np.log, "exp": np.exp, "Λ": _log_mean}, numbers)
    return np.broadcast_to(np.asarray(value, dtype=float), q.incident.shape)
