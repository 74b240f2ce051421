"""What the facts and titles above a table say of its sweeps: area, light, direction, name."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass

from app.files.measured.cells import number_in
from app.files.measured.model import Block, MeasuredText
from app.files.measured.reading import Direction
from app.files.measured.words import direction_in, is_area, lit_in, names_something, words_of
from app.files.quoting import quote
from app.files.units import unit_key

_NUMBER = re.compile(r"[+\-]?[0-9][0-9.,]{0,20}(?:[eE][+\-]?[0-9]{1,3})?")
_AREAS = {"cm²": 1.0, "mm²": 1e-2, "m²": 1e4, "µm²": 1e-8}
_AREA_KEYS = {unit_key(name): factor for name, factor in _AREAS.items()} | {unit_key("um2"): 1e-8}
_CLOSE_NOTES = 3


@dataclass(frozen=True)
class Area:
    """An area [cm²], or None, and a question about it, or ""."""

    cm2: float | None
    question: str = ""


def area_of(text: MeasuredText, block: Block) -> Area:
    """The area that a block's own facts state, or else those of the whole text."""
    for facts in (block.facts, text.facts):
        stated = [(key, value) for key, value in facts.items() if is_area(key)]
        if stated:
            areas = [_area(key, value) for key, value in stated]
            first = next((area for area in areas if area.cm2 is not None), areas[0])
            different = {area.cm2 for area in areas if area.cm2 is not None}
            if len(different) > 1:
                keys = " and ".join(quote(key) for key, _ in stated[:2])
                return Area(first.cm2, f"There is more than one area, {keys}: the first is used.")
            return first
    return Area(None)


def _area(key: str, value: str) -> Area:
    told = f"The area {quote(f'{key}: {value}')}"
    match = _NUMBER.match(value)
    size = number_in(match[0].rstrip(".,"), ".") if match else None
    if match is None or size is None or not 0 < size < 1e9:
        return Area(None, f"{told} cannot be read: a number such as 0.09 cm² was expected.")
    written = value[match.end() :].strip(" ()[]")
    if not written:
        written = next((part for part in (_in_brackets(key), *words_of(key)) if _factor(part)), "")
    if not written:
        return Area(size, f"{told} has no unit: it is taken as cm².")
    factor = _factor(written)
    if factor is None:
        return Area(None, f"{told} cannot be read: a number with cm², mm² or m² was expected.")
    return Area(float(f"{size * factor:.12g}"))


def _in_brackets(key: str) -> str:
    at = max(key.find(mark) for mark in "([/")
    return key[at + 1 :].strip(" ()[]") if at >= 0 else ""


def _factor(unit: str) -> float | None:
    return _AREA_KEYS.get(unit_key(unit.replace("Â", "").replace("**", "^"))) if unit else None


def sweep_words(block: Block) -> tuple[Direction, bool | None]:
    """Direction and light as the lines just above a block, or its facts, tell them."""
    facts = [f"{key} {value}" for key, value in block.facts.items()]
    direction: Direction = ""
    lit: bool | None = None
    for line in [*reversed(block.notes[-_CLOSE_NOTES:]), *facts]:
        direction = direction or direction_in(line)
        lit = lit_in(line) if lit is None else lit
    return direction, lit


def name_of(facts: Mapping[str, str]) -> str:
    """The name of the sample or sweep that the facts state, or ""."""
    return next((value for key, value in facts.items() if names_something(key)), "")
