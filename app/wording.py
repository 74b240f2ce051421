"""Numbers and ledger lines as text, for the screen, the charts and the tables. No Qt."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache

from app.files.numbers import write_number
from app.session.fields import FIELDS
from app.session.light import light_named
from app.session.state import CellEntry, Choices
from physics.ledger import Entry, Ledger
from physics.lines import Basis, Form
from physics.quantities import Quantities

MINUS = "−"
THIN = "\u2009"  # between a number and its unit


@lru_cache(maxsize=256)
def shown_name(name: str) -> str:
    """A name as it may stand inside a sentence: without control signs, and kept from turning what is beside it.

    Signs that reverse the writing would print "30.6" as "6.03"; a name in a script from right to left is set apart.
    """
    plain = "".join(c if c.isprintable() or unicodedata.category(c) == "Zs" else " " for c in name)
    plain = " ".join(plain.split())
    turns = any(unicodedata.bidirectional(c) in ("R", "AL", "AN") for c in plain)
    return f"\u2068{plain}\u2069" if turns else plain


def unbroken(text: str) -> str:
    """A text that no line break may part."""
    return text.replace(" ", "\u00a0")


@lru_cache(maxsize=512)  # while one number moves, most others are asked for again
def percent(fraction: float, decimals: int = 2) -> str:
    """A fraction as a percentage ("26.72 %")."""
    return f"{write_number(100.0 * fraction, decimals=decimals)}{THIN}%"


def signed(value: float, decimals: int) -> str:
    """A number with its sign, also where it is positive; zero has none."""
    text = write_number(value, decimals=decimals)
    zero = not text.strip("0.")
    return text if zero or text.startswith(MINUS) else f"+{text}"


@lru_cache(maxsize=512)
def with_unit(value: float, unit: str, digits: int = 5) -> str:
    """A number to some significant digits, without trailing zeros, with its unit."""
    if value != value:
        return "unknown"
    if value in (float("inf"), float("-inf")):
        return "∞" if value > 0 else f"{MINUS}∞"
    text = f"{value + 0.0:.{digits}g}".replace("-", MINUS)  # no "−0"
    if "e" in text:  # very large or very small: written with a power of ten
        head, power, tail = write_number(value, digits).partition("×")
        head = head.rstrip("0").rstrip(".") if "." in head else head
        text = f"{head}{power}{tail}"
    return f"{text}{THIN}{unit}" if unit else text


#: How Δ is shown by its unit in physics: factor, unit on screen, decimals.
DELTA_SHOWN = {
    "V": (1e3, "mV", 1),
    "mA cm⁻²": (1.0, "mA cm⁻²", 2),
    "": (1e2, "% FF", 2),
    "mW cm⁻²": (1.0, "mW cm⁻²", 2),
}


@lru_cache(maxsize=64)  # chart, table and explanation ask for the same texts in turn
def loss_text(loss: float, incident: float) -> str:
    """What a line takes off the efficiency, signed: a loss is negative ("−5.22 %")."""
    return f"{signed(-100.0 * loss / incident, 2)}{THIN}%"


@lru_cache(maxsize=64)
def delta_text(entry: Entry) -> str:
    """How far the cell falls short in the line's own figure, signed as seen from the limit ("−140.2 mV")."""
    factor, unit, decimals = DELTA_SHOWN[entry.line.factor.unit]
    return f"{signed(-factor * float(entry.delta), decimals)}{THIN}{unit}"


def basis_text(form: Form | None) -> str:
    """How a line is known ("assumed: step edge")."""
    if form is None:
        return ""
    return f"{form.basis.value}: {form.reason}" if form.reason else form.basis.value


_NAME = re.compile(r"\{(\w+)\}")


def symbols_in(equation: str, q: Quantities) -> str:
    """An equation with the symbols of its quantities."""
    return "".join(q.meaning(piece).symbol if k % 2 else piece for k, piece in enumerate(_pieces(equation)))


@lru_cache(maxsize=256)
def _pieces(equation: str) -> tuple[str, ...]:
    """An equation cut at its quantities: text and names by turns."""
    return tuple(_NAME.split(equation))


def _names(equation: str) -> tuple[str, ...]:
    """The quantities of an equation."""
    return _pieces(equation)[1::2]


def _number(q: Quantities, name: str) -> str:
    """A quantity of one cell with its unit."""
    return with_unit(float(q.number(name)), q.meaning(name).unit)


def numbers_in(equation: str, q: Quantities) -> str:
    """An equation with the numbers of one cell and their units."""
    return "".join(_number(q, piece) if k % 2 else piece for k, piece in enumerate(_pieces(equation)))


@dataclass(frozen=True)
class Given:
    """A number that enters an equation."""

    symbol: str
    value: str
    title: str


@dataclass(frozen=True)
class Explanation:
    """How one amount of the ledger was found, ready to show.

    Parameters
    ----------
    title, amount : str
        Name of the line and what it takes.
    steps : tuple of str
        The calculation: an equation in symbols and the same with its numbers, alternating.
    given : tuple of Given
        The numbers that enter.
    basis, source : str
        How the line is known, and where the formula comes from.
    """

    title: str
    amount: str
    steps: tuple[str, ...]
    given: tuple[Given, ...]
    basis: str
    source: str


_WEIGHTS = {
    ("log-mean", "weight_current"): "Λ({power_limit}, {power}) / Λ({jsc_limit}, {jsc})",
    ("log-mean", "weight_voltage"): "Λ({power_limit}, {power}) / Λ({voc_limit}, {voc})",
    ("log-mean", "weight_fill"): "Λ({power_limit}, {power}) / Λ({ff_limit}, {ff})",
    ("ladder", "weight_current"): "{voc_limit} · {ff_limit}",
    ("ladder", "weight_voltage"): "{jsc} · {ff_limit}",
    ("ladder", "weight_fill"): "{jsc} · {voc}",
}


def explain(ledger: Ledger, key: str, spectrum: str = "") -> Explanation | None:
    """How an amount was found.

    Parameters
    ----------
    ledger : Ledger
        Ledger of one cell (shape ()).
    key : str
        Key of a line, or "sunlight", "detailed_balance" or "cell" for the totals.

    spectrum : str
        Short name of the light.

    Returns
    -------
    Explanation or None
        None where the ledger has no such line.
    """
    q = ledger.quantities
    if key == "detailed_balance":
        return _total(
            "Detailed-balance limit", ledger, "{jsc_limit} · {voc_limit} · {ff_limit}", "power_limit",
            Basis.CALCULATED.value, "Shockley and Queisser 1961, doi:10.1063/1.1736034",
        )
    if key == "sunlight":
        title = light_named(spectrum).title if spectrum else "the light"
        given = _given(("incident",), q)
        return Explanation("Sunlight", f"{title}, taken as 100 %", (), given, "", "the irradiance of the measurement")
    if key == "cell":
        return _total("The cell", ledger, "{jsc} · {voc} · {ff}", "power", Basis.MEASURED.value, "measured figures")
    if key not in ledger:
        return None
    entry = ledger[key]
    form = entry.form_at()
    if form is None:
        return Explanation(entry.line.title, "not in this ledger", (), (), "", entry.line.source)
    unit = entry.line.factor.unit
    delta, loss = with_unit(float(entry.delta), unit), with_unit(float(entry.loss), "mW cm⁻²")
    steps = [f"Δ = {symbols_in(form.equation, q)}", f"= {numbers_in(form.equation, q)} = {delta}"]
    names = [*_names(form.equation)]
    weight = entry.line.factor.weight_equation
    if weight:
        steps += [f"loss = {symbols_in(weight, q)} · Δ", f"= {numbers_in(weight, q)} · Δ = {loss}"]
        inner = _WEIGHTS.get((ledger.attribution, weight.strip("{}")))
        if inner:
            steps += [f"{symbols_in(weight, q)} = {symbols_in(inner, q)}", f"= {numbers_in(inner, q)}"]
            if "Λ" in inner:
                steps.append("with Λ(a, b) = (a − b) / ln(a / b), the logarithmic mean")
            names += _names(inner)
        else:
            names += _names(weight)
    if form.implied is not None:
        value = with_unit(float(form.implied.value(q)), form.implied.unit)
        steps += [
            f"{form.implied.symbol} = {symbols_in(form.implied.equation, q)}",
            f"= {numbers_in(form.implied.equation, q)} = {value}",
        ]
        names += _names(form.implied.equation)
    return Explanation(
        entry.line.title,
        f"{loss_text(float(entry.loss), float(q.incident))} of the incident power",
        tuple(steps),
        _given(names, q),
        basis_text(form),
        entry.line.source,
    )


def _total(title: str, ledger: Ledger, equation: str, name: str, basis: str, source: str) -> Explanation:
    q = ledger.quantities
    power = float(getattr(q, name))
    which = 0 if name == "power_limit" else 1
    factors = {title: float(pair[which]) for title, pair in ledger.factors().items()}
    steps = (
        f"{q.meaning(name).symbol} = {symbols_in(equation, q)}",
        f"= {numbers_in(equation, q)} = {with_unit(power, 'mW cm⁻²')}",
        f"Efficiency = {' × '.join(factors)}",
        f"= {' × '.join(percent(value, 1) for value in factors.values())} = {percent(power / float(q.incident))}",
    )
    amount = f"{percent(power / float(q.incident))} of the incident power"
    return Explanation(title, amount, steps, _given(_names(equation), q), basis, source)


def _given(names: Iterable[str], q: Quantities) -> tuple[Given, ...]:
    return tuple(Given(q.meaning(n).symbol, _number(q, n), q.meaning(n).title) for n in dict.fromkeys(names))


def inputs_text(entry: CellEntry) -> str:
    """The inputs of a cell on one line ("Eg 1.12 eV · Voc 0.738 V · …")."""
    parts = []
    for field in FIELDS:
        value = entry.values.get(field.key)
        if isinstance(value, float | int):
            parts.append(unbroken(f"{field.symbol} {with_unit(float(value), field.unit, 6)}"))
    return " · ".join(parts)


def conventions_text(choices: Choices) -> str:
    """The conventions on one line."""
    faces = "front face only" if choices.faces == 1 else "both faces"
    return f"Limit with emission from the {faces}; shares by {choices.attribution}"
