"""What a user gives of partial stacks, and what the ledger makes of it."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from app.files.numbers import NumberError, read_number, write_number
from physics.stacks import Luminescence, Stacks, voltage_at_one_sun, yield_at_one_sun

Quantity = Literal["yield", "voltage"]
_YIELD_UNITS = {"%": 0.01, "ppm": 1e-6}
_VOLTAGE_UNITS = {"V": 1.0, "mV": 1e-3}
_LONGEST_NAME = 40


@dataclass(frozen=True)
class Reading:
    """Luminescence of one stack at a light level.

    Parameters
    ----------
    value : float
        Yield (0 to 1), or implied voltage [V].
    quantity : {"yield", "voltage"}
    suns : float
        Light level, in units of one sun's generation in the cell.
    """

    value: float
    quantity: Quantity = "yield"
    suns: float = 1.0

    @property
    def text(self) -> str:
        """The value as it is typed."""
        return f"{write_number(self.value)} V" if self.quantity == "voltage" else write_number(self.value)


@dataclass(frozen=True)
class StackReadings:
    """Luminescence of a cell's partial stacks.

    Parameters
    ----------
    bare : Reading or None
        Of the absorber alone.
    contacts : tuple of (str, Reading or None)
        By name of the contact: of the absorber with that one alone.
    finished : Reading or None
        Of the finished cell.
    ideality : float or None
        By which readings at other light levels are brought to one sun.
    """

    bare: Reading | None = None
    contacts: tuple[tuple[str, Reading | None], ...] = ()
    finished: Reading | None = None
    ideality: float | None = None

    @property
    def readings(self) -> tuple[Reading, ...]:
        """All that are there."""
        every = (self.bare, *(reading for _, reading in self.contacts), self.finished)
        return tuple(reading for reading in every if reading is not None)

    @property
    def fault(self) -> str:
        """Why these split nothing, or an empty text."""
        if not self.readings:
            return ""
        if self.bare is None:
            return "Give the luminescence of the bare absorber: without it the non-radiative line cannot be split."
        if len(self.readings) < 2:
            return "Give one stack more than the bare absorber: one with a contact, or the finished cell."
        if self.ideality is None and any(reading.suns != 1.0 for reading in self.readings):
            return "Give the ideality by which readings at other light levels are brought to one sun."
        return ""

    def with_contact(self, at: int, name: str, reading: Reading | None) -> StackReadings:
        """The same with one contact exchanged."""
        return replace(self, contacts=(*self.contacts[:at], (name, reading), *self.contacts[at + 1 :]))


NO_STACKS = StackReadings()


def read_reading(text: str, suns: float = 1.0) -> Reading | None:
    """A yield ("0.012", "1.2 %") or an implied voltage ("1.18 V") as typed; None for an empty text.

    Raises
    ------
    NumberError
        Where it is neither.
    """
    trimmed = text.strip()
    if not trimmed:
        return None
    if trimmed.endswith("V"):
        volts = read_number(trimmed, _VOLTAGE_UNITS, (0.0, 5.0))
        if not 0.0 < volts <= 5.0:
            raise NumberError("An implied voltage lies above 0 and at most at 5 V.")
        return Reading(volts, "voltage", suns)
    fraction = read_number(trimmed, _YIELD_UNITS, (0.0, 1.0))
    if not 0.0 < fraction <= 1.0:
        raise NumberError("A yield lies above 0 and at most at 1: type 0.012, 1.2 %, or an implied voltage as 1.18 V.")
    return Reading(fraction, "yield", suns)


def read_suns(text: str) -> float:
    """A light level as typed; an empty text means one sun.

    Raises
    ------
    NumberError
        Where it is no light level.
    """
    if not text.strip():
        return 1.0
    suns = read_number(text, {"suns": 1.0, "sun": 1.0, "%": 0.01}, (1e-3, 1e3))
    if not 0.0 < suns <= 1e5:
        raise NumberError("A light level lies above 0 and at most at 100000 suns.")
    return suns


def stacks_of(given: StackReadings, temperature: float) -> Stacks | None:
    """What the ledger takes of these readings at a temperature [K]; None where they split nothing."""
    if not given.readings or given.fault or given.bare is None:
        return None
    names = _names([name for name, reading in given.contacts if reading is not None])
    contacts = [reading for _, reading in given.contacts if reading is not None]
    of = [_at_one_sun(reading, given.ideality, temperature) for reading in contacts]
    return Stacks(
        _at_one_sun(given.bare, given.ideality, temperature),
        tuple(zip(names, of, strict=True)),
        None if given.finished is None else _at_one_sun(given.finished, given.ideality, temperature),
        any(reading.suns != 1.0 for reading in given.readings),
    )


def _at_one_sun(reading: Reading, ideality: float | None, temperature: float) -> Luminescence:
    value, n = np.float64(reading.value), np.float64(1.0 if ideality is None else ideality)
    if reading.quantity == "voltage":
        return Luminescence(voltage=voltage_at_one_sun(value, reading.suns, n, temperature))
    return Luminescence(fraction=yield_at_one_sun(value, reading.suns, n))


def _names(typed: list[str]) -> list[str]:
    """Names that can stand in a sentence and a file, each once."""
    names: list[str] = []
    for k, text in enumerate(typed, 1):
        plain = " ".join("".join(c if c.isprintable() else " " for c in text).split())[:_LONGEST_NAME]
        name = plain or f"contact {k}"
        while name in names:
            name += "′"
        names.append(name)
    return names
