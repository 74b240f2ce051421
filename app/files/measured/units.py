"""The closed set of units that measured columns can have, and how they are found in the words above a column."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType
from typing import Literal

from app.files.measured.words import word_quantity, word_set
from app.files.units import UnitKey, unit_key
from physics.units import Array

Dimension = Literal["voltage", "current", "density", "wavelength", "energy", "fraction", "responsivity", "irradiance"]


@dataclass(frozen=True)
class Unit:
    """One unit of the set.

    Attributes
    ----------
    name : str
        As the program writes it.
    dimension : str
        Its values become, times `factor`: voltage V, current mA, density mA cm⁻², wavelength nm, energy eV,
        fraction 1, responsivity A W⁻¹, irradiance W m⁻² nm⁻¹.
    factor : float
    """

    name: str
    dimension: Dimension
    factor: float

    def convert(self, values: Array) -> Array:
        """Values in this unit, in the unit of the dimension; rounded once, so that 1150 mV are 1.15 V."""
        return values * self.factor if self.factor >= 1 else values / round(1 / self.factor)


_ALL = (
    Unit("V", "voltage", 1.0),
    Unit("mV", "voltage", 1e-3),
    Unit("µV", "voltage", 1e-6),
    Unit("A", "current", 1e3),
    Unit("mA", "current", 1.0),
    Unit("µA", "current", 1e-3),
    Unit("nA", "current", 1e-6),
    Unit("pA", "current", 1e-9),
    Unit("mA/cm²", "density", 1.0),
    Unit("A/cm²", "density", 1e3),
    Unit("µA/cm²", "density", 1e-3),
    Unit("nA/cm²", "density", 1e-6),
    Unit("A/m²", "density", 0.1),
    Unit("mA/m²", "density", 1e-4),
    Unit("mA/mm²", "density", 1e2),
    Unit("nm", "wavelength", 1.0),
    Unit("µm", "wavelength", 1e3),
    Unit("Å", "wavelength", 0.1),
    Unit("eV", "energy", 1.0),
    Unit("meV", "energy", 1e-3),
    Unit("fraction", "fraction", 1.0),
    Unit("%", "fraction", 1e-2),
    Unit("A/W", "responsivity", 1.0),
    Unit("mA/W", "responsivity", 1e-3),
    Unit("W/m²/nm", "irradiance", 1.0),
    Unit("mW/m²/nm", "irradiance", 1e-3),
    Unit("W/m²/µm", "irradiance", 1e-3),
    Unit("W/cm²/nm", "irradiance", 1e4),
    Unit("mW/cm²/nm", "irradiance", 10.0),
    Unit("µW/cm²/nm", "irradiance", 1e-2),
)
#: Every unit by its name.
UNITS: Mapping[str, Unit] = MappingProxyType({unit.name: unit for unit in _ALL})

_ALIASES = {
    "1": "fraction", "-": "fraction", "abs": "fraction", "percent": "%", "pct": "%", "volt": "V", "volts": "V",
    "ampere": "A", "amps": "A", "amp": "A", "mAcm-2": "mA/cm²", "Acm-2": "A/cm²", "Am-2": "A/m²", "uAcm-2": "µA/cm²",
    "mA/sqcm": "mA/cm²", "micron": "µm", "microns": "µm", "Wm-2nm-1": "W/m²/nm",
}  # fmt: skip
_LONGEST = 40
_OPEN = {"(": ")", "[": "]", "{": "}", "<": ">"}


def units_of(*dimensions: Dimension) -> tuple[Unit, ...]:
    """The units of some dimensions, in the order they should be offered."""
    return tuple(unit for dimension in dimensions for unit in _ALL if unit.dimension == dimension)


def _key(text: str) -> UnitKey:
    """The key of a unit, with u for µ, "**" for "^" and brackets behind a slash understood."""
    plain = text.strip().replace("Â", "").replace("**", "^").replace("_", " ")  # "Â²" is UTF-8 read as another code
    head, slash, inner = plain.partition("/(")
    if slash:
        plain = head + "".join(f"/{part}" for part in inner.replace(")", " ").replace("·", " ").split())
    words = plain.replace(".", " ").replace("/ ", "/").split()
    key = unit_key(" ".join(words))
    return tuple(sorted((f"μ{symbol[1:]}" if _is_micro(symbol) else symbol, power) for symbol, power in key))


def _is_micro(symbol: str) -> bool:
    return len(symbol) > 1 and symbol[0] in "uµμ" and symbol[1] in "AVWmaw"


def _tables() -> tuple[dict[UnitKey, Unit], dict[UnitKey, Unit]]:
    exact = {_key(unit.name): unit for unit in _ALL}
    exact |= {_key(alias): UNITS[name] for alias, name in _ALIASES.items()}
    caseless = {_key(alias.lower()): UNITS[name] for alias, name in _ALIASES.items()}
    return exact, caseless | {_key(unit.name.lower()): unit for unit in _ALL}


_EXACT, _CASELESS = _tables()
_OTHERS = frozenset(
    map(unit_key, word_set("mW W mW/cm2 W/m2 W/cm2 s ms min h °C C K Ω Ohm kΩ Ohm*cm2 Ω*cm2 Hz suns a.u. arb."))
)


@lru_cache(maxsize=4096)
def find_unit(text: str) -> Unit | None:
    """The unit that a text means, whatever its spelling; None where it is none of the set.

    Upper and lower case are told apart only where that makes a difference within the set.
    """
    if not text.strip() or len(text) > _LONGEST:
        return None
    spelt = text.strip()
    for written in (spelt, _underscored(spelt)):
        unit = _EXACT.get(_key(written)) or _CASELESS.get(_key(written.lower()))
        if unit is not None:
            return unit
    return None


def is_unit(text: str) -> bool:
    """Say whether a text is a unit, of the set or another that stands above columns of no use here."""
    return find_unit(text) is not None or unit_key(text) in _OTHERS


def _underscored(text: str) -> str:
    """ "mA_cm2" as "mA/cm2"."""
    return text.replace("_", "/")


@lru_cache(maxsize=4096)
def name_and_unit(cell: str) -> tuple[str, str]:
    """Part the words above a column into the name and the unit, both as written; "" where there is none.

    Understood are "J (mA/cm²)", "J [mA/cm²]", "J / mA cm⁻²", "J in mA/cm2", "J, mA/cm2", "J mA/cm2" and "J_mA_cm2".
    """
    text = " ".join(cell.split())[:200]
    bracketed = _bracketed(text)
    if bracketed is not None:
        return bracketed
    if find_unit(text) is not None:
        return text, text
    for mark in (" in ", "/", ",", ";", ":", " ", "_"):
        at = text.find(mark)
        while at > 0:
            rest = text[at + len(mark) :].strip()
            if find_unit(rest) is not None and _is_meant(mark, text[:at], rest):
                return text[:at].strip(" /,;:_"), rest
            at = text.find(mark, at + 1)
    return text, ""


def _is_meant(mark: str, before: str, unit: str) -> bool:
    """Say whether a unit behind a mere blank is one: the A of "Current A" is, the A of "Sample A" is not."""
    return mark not in " _,;:" or (len(unit) > 1 or unit == "%") or (unit.isalpha() and bool(word_quantity(before)))


def _bracketed(text: str) -> tuple[str, str] | None:
    """Name and unit where the unit stands in brackets: the last known one, or one of no known unit at the end."""
    for at in range(len(text) - 1, -1, -1):
        close = _OPEN.get(text[at])
        for end in (text.rfind(close), text.find(close, at)) if close else ():  # the first for nested brackets
            if end > at + 1 and find_unit(text[at + 1 : end]) is not None:
                return _without(text, at, end)
    if text and text[-1] in ")]}":
        at = max(text.rfind(opening) for opening in "([{")
        inside = text[at + 1 : -1].strip()
        if at >= 0 and inside and (text[-1] == "]" or "/" in inside or "." in inside):
            return _without(text, at, len(text) - 1)
    return None


def _without(text: str, at: int, end: int) -> tuple[str, str]:
    before, unit, after = text[:at], text[at + 1 : end].strip(), text[end + 1 :]
    name = " ".join(f"{before} {after}".split()).strip(" /,;:_")
    return name or unit, unit
