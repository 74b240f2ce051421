"""The one reader and the one writer of numbers in typed fields and tables.

No locale is consulted anywhere: a text means the same number on every desktop. What could mean two numbers
is refused rather than guessed, and no character is ever skipped. Only the digits 0 to 9 count as digits;
Arabic-Indic, full-width and other digits are refused with the advice to write 0 to 9, because their decimal
marks would need rules of their own.
"""

import math
import re
import unicodedata
from collections.abc import Mapping
from decimal import MAX_EMAX, MAX_PREC, MIN_EMIN, Context, Decimal
from types import MappingProxyType
from typing import Literal

from app.files.quoting import quote, visible
from app.files.units import unit_key

_NO_UNITS: Mapping[str, float] = MappingProxyType({})

# Ordinary, no-break, figure, thin and narrow no-break space.
_SPACES = " \u00a0\u2007\u2009\u202f"
_APOSTROPHES = "'\u2019"
# Hyphens, figure dash, en dash, minus and the two compatibility hyphens. An em dash is left out: alone it
# marks an empty cell, in front it is as likely a bullet as a sign.
_MINUSES = "\\-\u2010\u2011\u2012\u2013\u2212\ufe63\uff0d"
_LOWER = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺", "0123456789-+")
_RAISE = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")

_PLAIN = re.compile(r"[+\-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+\-]?[0-9]+)?")
_SIGN = re.compile(f"[+{_MINUSES}]")
_BODY = re.compile(rf"[.,]?[0-9]+(?:[.,{_SPACES}{_APOSTROPHES}][0-9]+)*[.,]?")
_POWER_OF_TEN = rf"10(?:\^(?P<caret>[+{_MINUSES}]?[0-9]+)|(?P<raised>[⁻⁺]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+))"
_BARE_POWER = re.compile(_POWER_OF_TEN)
_EXPONENT = re.compile(rf"[eE](?P<letter>[+{_MINUSES}]?[0-9]+)|[{_SPACES}]?[×·⋅*x][{_SPACES}]?{_POWER_OF_TEN}")
_BROKEN_EXPONENT = re.compile(rf"[eE][\s+{_MINUSES}]*[0-9]*|[×·⋅*x]\s*10.*", re.DOTALL)
_NOT_FINITE = re.compile(r"(?:nan|infinity|inf|∞)(?![a-z])", re.IGNORECASE)
_HEXADECIMAL = re.compile(r"0[xX][0-9a-fA-F]+")


class NumberError(ValueError):
    """A text that is not one clear number; the message is one sentence for the person who wrote it."""


def read_number(
    text: str,
    units: Mapping[str, float] = _NO_UNITS,
    plausible: tuple[float, float] | None = None,
    *,
    decimal_comma: bool = False,
) -> float:
    """Read one number exactly, or refuse it with a sentence.

    Dot and comma both serve as decimal mark; where both occur, the last is the decimal mark and the other
    must part groups of three. Spaces and apostrophes part groups of three only. "1.234" is a decimal;
    "1,234" is read as the one of its two meanings that is plausible, and refused where that does not
    decide. Exponents are written 1e-3, 1×10^-3, 1·10⁻³ or 10⁻³. Nothing that rounds to infinity, or from
    non-zero to zero, is accepted.

    Parameters
    ----------
    text : str
        What was typed or stood in the table.
    units : mapping of str to float
        Accepted unit suffixes, each with the factor that brings it to the field's own unit. A number without
        a suffix is in the field's own unit. See `app.files.units.unit_key` for spellings that are equal.
    plausible : tuple of (float, float), optional
        Range [the field's own unit], ends included, consulted only to decide between the meanings of "1,234".
    decimal_comma : bool, optional
        True where the text comes from a table known to write decimals with a comma. Then "1,234" is a
        decimal, and it is "1.234" that has two meanings.

    Returns
    -------
    float
        The nearest floating-point number to what was written, in the field's own unit.

    Raises
    ------
    NumberError
        Where the text is not one clear finite number with an accepted unit.
    """
    trimmed = text.strip()
    if _PLAIN.fullmatch(trimmed) and not (decimal_comma and "." in trimmed):
        return _to_float(trimmed, 1.0, trimmed)
    if not trimmed:
        raise NumberError("Nothing is written here: write a number such as 1.5.")
    if any(letter.isdecimal() and letter not in "0123456789" for letter in trimmed):
        raise NumberError(f"{quote(trimmed)} has digits other than 0 to 9: write it with the digits 0 to 9.")
    sign, unsigned = _take_sign(trimmed)
    body, exponent, tail = _take_number(unsigned, trimmed)
    mantissas = _mantissas(body, trimmed, "." if decimal_comma else ",")
    factor = _factor(tail.strip(), units, trimmed)
    values = [_to_float(f"{sign}{mantissa}{exponent}", factor, trimmed) for mantissa in mantissas]
    if len(values) == 1:
        return values[0]
    if plausible is not None:
        likely = [value for value in values if plausible[0] <= value <= plausible[1]]
        if len(likely) == 1:
            return likely[0]
    rest = trimmed[len(trimmed) - len(unsigned) + len(body) :]
    first, second = (f"“{sign}{mantissa}{visible(rest)}”" for mantissa in mantissas)
    if decimal_comma:
        first = first.replace(".", ",")
    raise NumberError(f"{quote(trimmed)} can mean two numbers: write {first} or {second}.")


def _take_sign(trimmed: str) -> tuple[str, str]:
    """Split off one leading sign, as "", "+" or "-"."""
    match = _SIGN.match(trimmed)
    unsigned = trimmed[match.end() :] if match else trimmed
    first = unsigned[:1] or "?"
    odd = first.isspace() or first in "+−±" or unicodedata.category(first) == "Pd"
    if odd and any(letter.isdecimal() for letter in unsigned):
        raise NumberError(f"{quote(trimmed)} has a sign that cannot be read: write one - just before the digits.")
    if match is None:
        return "", unsigned
    return ("+" if match[0] == "+" else "-"), unsigned


def _take_number(unsigned: str, trimmed: str) -> tuple[str, str, str]:
    """Split into the digits with their separators, the exponent as "" or "e-3", and what follows."""
    if _HEXADECIMAL.match(unsigned):
        raise NumberError(f"{quote(trimmed)} is a hexadecimal number: write it as a decimal number such as 1.5.")
    power = _BARE_POWER.match(unsigned)
    if power is not None:
        return "1", f"e{_exponent_digits(power)}", unsigned[power.end() :]
    match = _BODY.match(unsigned)
    if match is None:
        what = "is not a finite number" if _NOT_FINITE.match(unsigned) else "is not a number"
        raise NumberError(f"{quote(trimmed)} {what}: write a number such as 1.5.")
    exponent = _EXPONENT.match(unsigned, match.end())
    if exponent is None:
        return match[0], "", unsigned[match.end() :]
    return match[0], f"e{_exponent_digits(exponent)}", unsigned[exponent.end() :]


def _exponent_digits(match: re.Match[str]) -> str:
    digits = "".join(part for part in match.groupdict().values() if part).translate(_LOWER)
    return digits if digits[0] == "+" or digits[0].isdecimal() else f"-{digits[1:]}"


def _mantissas(body: str, trimmed: str, doubtful: str) -> tuple[str, ...]:
    """Give the meanings of digits and separators as plain decimals: one, or two for the likes of "1,234"."""
    marks = [letter for letter in body if not letter.isdecimal()]
    kinds = list(dict.fromkeys(marks))
    decimal = _decimal_mark(marks, kinds)
    whole, fraction = body, ""
    if decimal:
        whole, fraction = body.rsplit(decimal, 1)
    grouping = [mark for mark in kinds if mark in whole]
    if not grouping and fraction.isdecimal():
        if decimal == doubtful and len(fraction) == 3 and _is_first_group(whole):
            return f"{whole}.{fraction}", f"{whole}{fraction}"
        return (f"{whole or '0'}.{fraction}",)
    if not grouping and not fraction:
        return (whole,)
    groups = whole.split(grouping[0]) if len(grouping) == 1 else []
    grouped = bool(groups) and _is_first_group(groups[0]) and all(len(group) == 3 for group in groups[1:])
    if not grouped or (decimal and not fraction.isdecimal()):
        if any(mark in _SPACES for mark in marks):
            raise NumberError(f"{quote(trimmed)} reads as more than one number: write one, without spaces in it.")
        raise NumberError(
            f"{quote(trimmed)} does not have its digits in groups of three: "
            "write it with one decimal point and nothing between the other digits."
        )
    return (f"{''.join(groups)}.{fraction or '0'}",)


def _decimal_mark(marks: list[str], kinds: list[str]) -> str:
    """Say which of dot and comma is the decimal mark, or "" for none."""
    last = next((mark for mark in reversed(marks) if mark in ".,"), "")
    if not last:
        return ""
    # Two dots and nothing else cannot hold a decimal mark: they part groups.
    return "" if marks.count(last) > 1 and len(kinds) == 1 else last


def _is_first_group(digits: str) -> bool:
    return digits.isdecimal() and len(digits) <= 3 and not digits.startswith("0")


def _factor(unit: str, units: Mapping[str, float], trimmed: str) -> float:
    if not unit:
        return 1.0
    key = unit_key(unit)
    for known, factor in units.items():
        if unit_key(known) == key:
            return factor
    if _BROKEN_EXPONENT.fullmatch(unit):
        raise NumberError(f"{quote(trimmed)} has an exponent that cannot be read: write it like 1.5e-3.")
    advice = f"write the number alone or with {_listed(units)}" if units else "write the number alone"
    if (unit[0].isalpha() or unit[0] in "%‰°/") and not re.match(r"/\s*[0-9]", unit):
        raise NumberError(f"{quote(trimmed)} has the unit {quote(unit)}, not known here: {advice}.")
    if any(letter.isdecimal() for letter in unit):
        raise NumberError(f"{quote(trimmed)} reads as more than one number: write one number.")
    raise NumberError(f"{quote(trimmed)} has {quote(unit)} after the number: {advice}.")


def _listed(units: Mapping[str, float]) -> str:
    names = list(units)
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} or {names[-1]}"


def _to_float(plain: str, factor: float, trimmed: str) -> float:
    """Round once: the product is formed in decimal, so that 35.3 mV is the float nearest to 0.0353 V."""
    value = float(plain)
    if factor != 1.0 and value != 0.0 and math.isfinite(value):
        exact = Context(prec=min(len(plain) + 40, MAX_PREC), Emax=MAX_EMAX, Emin=MIN_EMIN)
        value = float(exact.multiply(Decimal(plain), Decimal(repr(float(factor)))))
    if math.isinf(value):
        raise NumberError(f"{quote(trimmed)} is too large to hold: write a number below 1.7e308.")
    if value == 0.0 and re.search("[1-9]", re.split("[eE]", plain)[0]):
        raise NumberError(f"{quote(trimmed)} is too small to tell from zero: write 0 or a number above 5e-324.")
    return value


def write_exact(value: float) -> str:
    """Write the shortest plain text that reads back as the same float, with a dot and an ASCII minus.

    Raises
    ------
    NumberError
        Where the value is not finite.
    """
    number = float(value)
    if not math.isfinite(number):
        raise NumberError(f"{number} is not a finite number, so it cannot be written: leave the cell empty.")
    mantissa, letter, exponent = repr(number).partition("e")
    mantissa = mantissa.removesuffix(".0")
    return f"{mantissa}e{int(exponent)}" if letter else mantissa


def write_number(
    value: float,
    digits: int | None = None,
    *,
    decimals: int | None = None,
    minus: Literal["−", "-"] = "−",
) -> str:
    """Write a number for display, with a decimal dot and no thousands separators, whatever the locale.

    Parameters
    ----------
    value : float
        A finite number.
    digits : int, optional
        Significant digits, trailing zeros kept; the digits before the dot are always shown in full (298.15
        with two digits is "298"). Below 0.0001 and from a million on, powers of ten are used. Without it
        and without `decimals` the text is exact.
    decimals : int, optional
        Digits after the dot instead, never with powers of ten: for columns that must line up.
    minus : {"−", "-"}
        The typographic minus, with "×10⁻⁷" for powers; or the ASCII hyphen, with "e-7".

    Raises
    ------
    NumberError
        Where the value is not finite.
    ValueError
        Where both `digits` and `decimals` are given, or fewer digits than one, or fewer decimals than none.
    """
    if digits is not None and decimals is not None:
        raise ValueError("Give digits or decimals, not both.")
    if (digits is not None and digits < 1) or (decimals is not None and decimals < 0):
        raise ValueError("Give at least one digit, or no fewer than zero decimals.")
    number = float(value)
    if not math.isfinite(number) or (decimals is None and digits is None):
        text = write_exact(number)
    else:
        text = f"{number:.{decimals}f}" if decimals is not None else _significant(number, digits or 1)
    if text[0] == "-" and float(text) == 0.0:
        text = text[1:]
    if minus == "-" or not ("e" in text or "-" in text):
        return text
    mantissa, letter, exponent = text.partition("e")
    power = f"×10{exponent.translate(_RAISE)}" if letter else ""
    return f"{mantissa.replace('-', '−')}{power}"


def _significant(value: float, digits: int) -> str:
    if value == 0.0:
        return f"{value:.{digits - 1}f}"
    mantissa, _, exponent = f"{value:.{digits - 1}e}".partition("e")
    power = int(exponent)
    if -4 <= power < 6 or (power == 6 and abs(round(value)) < 1_000_000):
        return f"{value:.{max(digits - 1 - power, 0)}f}"
    return f"{mantissa}e{power}"
