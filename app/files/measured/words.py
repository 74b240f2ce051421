"""The words that laboratories write above columns and sweeps, in English and some neighbours' languages."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import Literal

Quantity = Literal[
    "voltage", "current", "density", "jsc", "voc", "wavelength", "energy", "eqe", "reflectance", "responsivity",
    "irradiance", "other", "",
]  # fmt: skip

# Spelt out without blanks, hyphens and underscores; whole words, or beginnings where they end in "*".
_WORDS: dict[Quantity, str] = {
    "other": "time date temperature temp power pmax mpp ff fillfactor pce efficiency eff iqe resistance rs rsh point "
    "no nr index number std stdev sd sigma error uncertainty cycle area zeit leistung transmittance absorptance "
    "photonflux phase status flag noise",
    "jsc": "jsc isc shortcircuitcurrent* shortcircuit kurzschlussstrom*",
    "voc": "voc uoc opencircuitvoltage* opencircuit leerlaufspannung*",
    "wavelength": "wavelength* lambda λ wl wellenlänge* wavelen longueurdonde* longitudedeonda* lunghezzadonda*",
    "energy": "energy photonenergy* energie photonenenergie* hv hν ħω ephoton",
    "eqe": "eqe* ipce* qe externalquantumefficiency* quantumefficiency* quanteneffizienz* quantenausbeute* "
    "externequanteneffizienz* rendementquantique* extqe",
    "reflectance": "reflectance* reflection* reflectivity* reflexion* refl r",
    "responsivity": "responsivity* spectralresponse* spectralresponsivity* sr spektraleempfindlichkeit*",
    "irradiance": "irradiance* spectralirradiance* bestrahlungsstärke* spektralebestrahlungsstärke* spectrum*",
    "density": "j jd currentdensity* stromdichte* densitédecourant* jmeas jlight jdark jfwd jrev densidad*",
    "voltage": "v u voltage* volt volts bias potential* spannung* tension* vbias vmeas vapp vapplied vset vcell "
    "tensión* tensione*",
    "current": "i current* strom courant* amps imeas ilight idark corriente* corrente*",
}  # fmt: skip
_SPLIT = re.compile(r"[^\w%]+|_+")


def word_set(words: str) -> frozenset[str]:
    """The words of a list, written with blanks between them."""
    return frozenset(words.split())


# What says nothing of the quantity: "External Quantum Efficiency" and "measured EQE" are both an EQE.
_PADDING = word_set("measured meas applied cell device the of at in and corrected raw mean average avg set")

_FORWARD = word_set("forward forwards fwd fw vorwärts hin aller up")
_REVERSE = word_set("reverse reversed rev rv backward backwards bwd rückwärts zurück retour down")
_DARK = word_set("dark dunkel obscurité noir darkness")
_LIGHT = word_set("light lit illuminated illumination hell beleuchtet lumière sun suns am15 am15g lamp")
_OFF = word_set("off no none without aus ohne 0 false sans")


def words_of(text: str) -> list[str]:
    """The words of a text in lower case."""
    return [word for word in _SPLIT.split(text.lower().replace("am1.5", "am15")) if word]


def _tables() -> tuple[dict[str, Quantity], dict[str, Quantity]]:
    whole: dict[str, Quantity] = {}
    begun: dict[str, Quantity] = {}
    for quantity, names in _WORDS.items():
        for name in names.split():
            (begun if name.endswith("*") else whole)[name.rstrip("*")] = quantity
    return whole, begun


_WHOLE, _BEGUN = _tables()
_LONGEST_BEGUN = max(map(len, _BEGUN))
_SHORTEST_BEGUN = min(map(len, _BEGUN))
_AREAS = word_set("area fläche zellfläche aktivefläche aperture surface superficie área")
_NAMES = word_set("sample device cell name label id probe zelle échantillon pixel scan sweep")


@lru_cache(maxsize=4096)
def word_quantity(name: str) -> Quantity:
    """The quantity that the words of a name stand for: "" for none known, "other" for one of no use here."""
    words = [word for word in words_of(name[:200]) if word not in _PADDING][:12]
    for start in range(len(words)):
        for end in range(len(words), start, -1):
            joined = "".join(words[start:end])
            found = _looked_up(joined) or _looked_up(joined.rstrip("0123456789"))
            if found:
                return found
    return ""


def _looked_up(joined: str) -> Quantity:
    if joined in _WHOLE:
        return _WHOLE[joined]
    for length in range(min(len(joined), _LONGEST_BEGUN), _SHORTEST_BEGUN - 1, -1):
        if joined[:length] in _BEGUN:
            return _BEGUN[joined[:length]]
    return ""


def names_something(key: str) -> bool:
    """Say whether a key introduces the name of a sample or sweep."""
    return not _NAMES.isdisjoint(words_of(key)) and _AREAS.isdisjoint(words_of(key))


def is_area(key: str) -> bool:
    """Say whether a key introduces an area."""
    return not _AREAS.isdisjoint(words_of(key))


def direction_in(text: str) -> Literal["forward", "reverse", ""]:
    """The direction of a sweep that a text tells; "" where it tells none or both."""
    words = frozenset(words_of(text))
    forward, reverse = bool(words & _FORWARD), bool(words & _REVERSE)
    if forward == reverse:
        return ""
    return "forward" if forward else "reverse"


def lit_in(text: str) -> bool | None:
    """Whether a text says that a sweep was taken under light; None where it says nothing or both."""
    words = frozenset(words_of(text))
    dark, light = bool(words & _DARK), bool(words & _LIGHT)
    if light and not dark and words & _OFF:
        return False
    return None if dark == light else light
