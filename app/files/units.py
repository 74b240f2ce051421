"""When two spellings of a unit are the same unit."""

import re
import unicodedata
from functools import lru_cache

UnitKey = tuple[tuple[str, int], ...]

_DASHES = str.maketrans(dict.fromkeys("\u2010\u2011\u2012\u2013\u2212", "-"))
_FACTOR = r"[^/·⋅*\s]+"
_JOIN = r"(?:\s*[/·⋅*]\s*|\s+)"
_PRODUCT = re.compile(rf"(?:1?\s*/\s*)?{_FACTOR}(?:{_JOIN}{_FACTOR})*")
_TOKEN = re.compile(rf"/|{_FACTOR}")
_POWER = re.compile(r"(.*[^0-9^+\-])(?:\^?([+\-]?[0-9]{1,2}))?")
_LONGEST = 60


@lru_cache(maxsize=1024)
def unit_key(text: str) -> UnitKey:
    """Reduce a unit to its factors and powers, so that equal units compare equal however they are typed.

    "mA/cm²", "mA/cm2", "mA cm^-2" and "mA·cm⁻²" share one key, and so do the micro sign and the Greek mu,
    the ohm sign and the Greek omega. Upper and lower case stay apart ("mV" is not "MV"). A slash holds for
    the one factor behind it. What is not a plain product (brackets, a trailing slash) equals only itself.

    Parameters
    ----------
    text : str
        The unit as typed, without the number.

    Returns
    -------
    tuple of (str, int)
        Symbol and power of each factor, in alphabetic order.
    """
    plain = " ".join(unicodedata.normalize("NFKC", text).translate(_DASHES).split())
    if len(plain) > _LONGEST or set("()[]{}") & set(plain) or not _PRODUCT.fullmatch(plain):
        return ((plain, 1),)
    powers: dict[str, int] = {}
    sign = 1
    for token in _TOKEN.findall(plain):
        if token == "/":
            sign = -1
            continue
        symbol, power = _split_power(token)
        if symbol != "1":
            powers[symbol] = powers.get(symbol, 0) + sign * power
        sign = 1
    return tuple(sorted(powers.items()))


def _split_power(token: str) -> tuple[str, int]:
    match = _POWER.fullmatch(token)
    if match is None:
        return token, 1
    return match[1], int(match[2] or 1)
