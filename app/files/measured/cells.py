"""What a cell of a measurement says: a number, nothing, or words."""

from __future__ import annotations

import math
import re

from app.files.measured.model import DecimalMark
from app.files.measured.units import find_unit
from app.files.measured.words import word_set
from app.files.numbers import NumberError, read_number

_EXPONENT = r"(?:[eEdD][+\-]?[0-9]{1,4})?"
_PLAIN = re.compile(rf"[+\-]?(?:[0-9]+(?:\.[0-9]*|,[0-9]+)?|[.,][0-9]+){_EXPONENT}")
_COMMA_GROUPS = re.compile(r"[+\-]?[1-9][0-9]{0,2}(?:,[0-9]{3})+(?:\.[0-9]*)?")
_DOT_GROUPS = re.compile(r"[+\-]?[1-9][0-9]{0,2}(?:\.[0-9]{3})+(?:,[0-9]+)?")
_OTHER_GROUPS = re.compile(r"[+\-]?[1-9][0-9]{0,2}(?:([ '’\u00a0\u2009\u202f])[0-9]{3})(?:\1[0-9]{3})*(?:[.,][0-9]*)?")
_DOUBTFUL = re.compile(r"[+\-]?[1-9][0-9]{0,2}([.,])[0-9]{3}")
_LONGEST = 60

_MINUSES = str.maketrans(dict.fromkeys("\u2010\u2011\u2012\u2013\u2212\ufe63\uff0d", "-"))
_RAISED = frozenset("×·⋅^⁻⁰¹²³⁴⁵⁶⁷⁸⁹*")
_BLANK = word_set(
    " - -- --- — – ? . nan -nan nan(ind) -nan(ind) n/a na #n/a #na null none inf +inf -inf infinity "
    "-infinity ∞ -∞ #num! #div/0! #value! #ref! 1.#qnan -1.#ind 1.#ind 1.#inf -1.#inf 1.#qnb ovf overflow"
)


def number_in(cell: str, decimal: DecimalMark) -> float | None:
    """The number a cell holds, NaN where it is blank, None where it is words.

    A comma or a dot is the decimal mark where it cannot part thousands; where it can ("1,234"), `decimal` decides.
    """
    text = cell.strip()
    if not text or text.lower() in _BLANK:
        return math.nan
    if len(text) > _LONGEST:
        return None
    text = text.translate(_MINUSES)
    if _PLAIN.fullmatch(text):
        doubtful = _DOUBTFUL.fullmatch(text)
        if doubtful and doubtful[1] != decimal:
            return _finite(text.replace(doubtful[1], ""))
        return _finite(text.replace(",", ".").replace("d", "e").replace("D", "e"))
    if _COMMA_GROUPS.fullmatch(text):
        return _finite(text.replace(",", ""))
    if _DOT_GROUPS.fullmatch(text):
        return _finite(text.replace(".", "").replace(",", "."))
    groups = _OTHER_GROUPS.fullmatch(text)
    if groups:
        return _finite(text.replace(groups[1], "").replace(",", "."))
    if not _RAISED.isdisjoint(text):
        try:
            return read_number(text, decimal_comma=decimal == ",")
        except NumberError:
            return None
    return None


def number_and_unit(cell: str, decimal: DecimalMark) -> tuple[float, str] | None:
    """Number and unit of a cell such as "85 %" or "0.5 V"; None where it is not that."""
    text = cell.strip()
    if len(text) > _LONGEST:
        return None
    text = text.translate(_MINUSES)
    match = _PLAIN.match(text)
    if match is None:
        return None
    unit = text[match.end() :].strip()
    value = number_in(match[0], decimal)
    if not (unit[:1].isalpha() or unit == "%") or value is None or find_unit(unit) is None:
        return None
    return value, unit


def _finite(plain: str) -> float:
    value = float(plain)
    return value if math.isfinite(value) else math.nan


def decimal_evidence(cell: str) -> str:
    """What a cell tells of the decimal mark: "," or "." where it can be no other, "?" where "1,234" stands, else ""."""
    text = cell.strip()
    if len(text) > _LONGEST or ("," not in text and "." not in text):
        return ""
    text = text.translate(_MINUSES)
    doubtful = _DOUBTFUL.fullmatch(text)
    if doubtful:
        # By the rule of the house a lone dot is a decimal point; it says nothing against commas, though.
        return "?" if doubtful[1] == "," else ""
    if _PLAIN.fullmatch(text):
        return "," if "," in text else "."
    if _COMMA_GROUPS.fullmatch(text):
        return "."
    if _DOT_GROUPS.fullmatch(text):
        return ","
    if _OTHER_GROUPS.fullmatch(text):
        return "," if "," in text else "."
    return ""
