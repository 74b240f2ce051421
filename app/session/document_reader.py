"""Looking into a JSON document that may come from anywhere, part by part, with the place of whatever is wrong."""

from __future__ import annotations

import json
import math
import re
from collections.abc import Iterator, Sequence
from typing import Any, NoReturn

import numpy as np

from app.files.quoting import quote
from physics.units import Array

_LONGEST = 256 << 20  # characters of a document
_DEEPEST = 20  # brackets within brackets; ours has seven
_MOST_NUMBERS = 5_000_000  # of one curve


class DocumentError(ValueError):
    """A document that cannot be used; the message is one sentence."""


class Part:
    """A value in a document, and where it stands.

    Parameters
    ----------
    value : object
        As the JSON reader gives it.
    place : str
        Where it stands, such as "cells[2].name".
    """

    def __init__(self, value: Any, place: str) -> None:
        self.value = value
        self.place = place

    @classmethod
    def of_text(cls, text: str) -> Part:
        """The object that a text holds.

        Raises
        ------
        DocumentError
            Where it holds none, or one that no program of ours would write.
        """
        if len(text) > _LONGEST:
            raise DocumentError("This file is too large to be a session.")
        if _depth(text) > _DEEPEST:
            raise DocumentError("This is no session: its brackets are nested too deep.")
        try:
            value = json.loads(text, parse_constant=_refuse, object_pairs_hook=_object)
        except DocumentError:
            raise
        except (ValueError, RecursionError) as fault:
            where = f" (line {fault.lineno})" if isinstance(fault, json.JSONDecodeError) else ""
            raise DocumentError(f"This is no session, or a damaged one: its JSON cannot be read{where}.") from fault
        if not isinstance(value, dict):
            raise DocumentError("This is no session of Gapledger.")
        return cls(value, "")

    def wrong(self, what: str) -> DocumentError:
        """The error to raise about this part; `what` goes on a sentence."""
        return DocumentError(f"The session cannot be read: at {self.place or 'its start'}, {what}.")

    def has(self, name: str) -> bool:
        """Whether an object has a member."""
        return name in self._object()

    def get(self, name: str) -> Part:
        """A member of an object."""
        members = self._object()
        if name not in members:
            raise self.wrong(f"{quote(name)} is missing")
        return Part(members[name], f"{self.place}.{name}" if self.place else name)

    def members(self) -> Iterator[tuple[str, Part]]:
        """All members of an object."""
        for name in self._object():
            yield name, self.get(name)

    def only(self, names: Sequence[str]) -> None:
        """Refuse members that are not known."""
        for name in self._object():
            if name not in names:
                raise self.wrong(f"{quote(name)} is not known here")

    def _object(self) -> dict[str, Any]:
        if not isinstance(self.value, dict):
            raise self.wrong("an object was expected")
        return self.value

    def items(self, most: int) -> list[Part]:
        """The entries of a list of at most so many."""
        if not isinstance(self.value, list):
            raise self.wrong("a list was expected")
        if len(self.value) > most:
            raise self.wrong(f"there are more than {most} entries")
        return [Part(each, f"{self.place}[{at}]") for at, each in enumerate(self.value)]

    def text(self, longest: int) -> str:
        """A text of at most so many characters, without half surrogate pairs."""
        value = self.value
        if not isinstance(value, str):
            raise self.wrong("a text was expected")
        if len(value) > longest:
            raise self.wrong(f"the text is longer than {longest} characters")
        if any(0xD800 <= ord(c) <= 0xDFFF for c in value):
            raise self.wrong("the text holds half a character")
        return value

    def number(self, low: float = -math.inf, high: float = math.inf) -> float:
        """A finite number within bounds."""
        value = self.value
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise self.wrong("a number was expected")
        try:
            number = float(value)
        except OverflowError:
            number = math.inf
        if not math.isfinite(number) or not low <= number <= high:
            raise self.wrong("the number is out of range")
        return number

    def whole(self, low: int, high: int) -> int:
        """A whole number within bounds."""
        value = self.value
        if type(value) is not int or not low <= value <= high:
            raise self.wrong("a whole number was expected" if type(value) is not int else "the number is out of range")
        return value

    def one_of(self, choices: Sequence[Any]) -> Any:
        """One of some values, of the same kind as it."""
        for choice in choices:
            if type(choice) is type(self.value) and choice == self.value:
                return choice
        raise self.wrong(f"one of {', '.join(map(repr, choices))} was expected")

    def numbers(self) -> Array:
        """A list of finite numbers as an array."""
        value = self.value
        if not isinstance(value, list):
            raise self.wrong("a list of numbers was expected")
        if len(value) > _MOST_NUMBERS:
            raise self.wrong(f"there are more than {_MOST_NUMBERS} numbers")
        if not all(type(each) is float or type(each) is int for each in value):
            raise self.wrong("a list of numbers was expected")
        try:
            array = np.array(value, dtype=float)
        except OverflowError:
            array = np.array([math.inf])
        if not np.all(np.isfinite(array)):
            raise self.wrong("a number is out of range")
        return array


def _refuse(name: str) -> NoReturn:
    raise DocumentError(f"The session cannot be read: {name} is no number that it may hold.")


def _object(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    members = dict(pairs)
    if len(members) != len(pairs):
        raise DocumentError("The session cannot be read: a name stands twice in one object.")
    return members


def _depth(text: str) -> int:
    """How deep brackets are nested, those within texts left out; stops counting where it is too deep."""
    deep = deepest = 0
    for token in _TOKENS.finditer(text):
        sign = token[0]
        if sign in "[{":
            deep += 1
            deepest = max(deepest, deep)
            if deepest > _DEEPEST:
                break
        elif sign in "]}":
            deep -= 1
    return deepest


_TOKENS = re.compile(r'"(?:[^"\\]|\\.)*"|[\[\]{}]', re.DOTALL)
