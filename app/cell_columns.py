"""The columns of a table of cells: which are read, which only travel along, and which must be named better.

A column in a unit that is not known here must never pass as one that merely travels along: its numbers would be
missing from the result without a word. So a name made of nothing but a known quantity and a unit is refused with
the name it must have; any other name is the user's own.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable, Mapping
from types import MappingProxyType

from app.files.quoting import quote
from app.files.table_error import TableError
from app.session.fields import FIELD_BY_COLUMN, FIELDS

NAME, GROUP, SPECTRUM, REFERENCE = "name", "group", "spectrum", "reference"
JV_FILE, EQE_FILE, SERIES_FILE = "jv_file", "eqe_file", "series_file"
UNCERTAINTY = "u_"
STEP = "step"
TEXT_COLUMNS = (NAME, GROUP, SPECTRUM, REFERENCE, JV_FILE, EQE_FILE, SERIES_FILE)
KNOWN = frozenset((*TEXT_COLUMNS, *FIELD_BY_COLUMN))
REQUIRED = (NAME, *(field.column for field in FIELDS if field.required))

#: Columns that need not be there where a curve file holds the figure.
_BY_FILE = {"gap_eV": EQE_FILE, "voc_V": JV_FILE, "jsc_mA_cm2": JV_FILE, "ff_pct": JV_FILE}

#: How else the quantities are called (lower case, nothing but letters), beside their symbol and name on screen.
_OTHER_NAMES = {
    "gap_eV": ("gap", "energygap", "opticalgap"),
    "voc_V": ("uoc",),
    "jsc_mA_cm2": ("jsc",),
    "ff_pct": ("ff",),
    "temperature_C": ("temp", "celltemperature"),
    "irradiance_mW_cm2": ("intensity", "lightintensity", "suns"),
    "ideality": ("idealityfactor", "diodeideality"),
    "rs_ohm_cm2": ("rseries",),
    "rsh_ohm_cm2": ("rshunt",),
    "pseudo_ff_pct": ("pseudoff",),
    "area_cm2": ("cellarea", "activearea", "devicearea"),
}
_LETTER_SYMBOLS = MappingProxyType({field.symbol: field.column for field in FIELDS if len(field.symbol) == 1})
#: What a missing column may hide under, without being it.
_HINTS = {
    NAME: ("sample", "cell", "device", "id", "label", "samplename", "cellname", "sampleid", "cellid", "deviceid"),
    "jsc_mA_cm2": ("isc",),
}
_EFFICIENCIES = ("pce", "eta", "efficiency")

_TOKEN = re.compile(r"[^\W_]+|[%°]")
_UNIT = re.compile(
    r"(?:[mkunμ]?(?:ev|v|a|w|ohms?|ω)|[cm]?m2?|pct|percent|%|°|deg(?:rees?)?|[ckf]|celsius|kelvin"
    r"|fraction|frac|ratio|suns?|per|ppm|lx|lux)*"
)


def _tokens(column: str) -> list[str]:
    return _TOKEN.findall(unicodedata.normalize("NFKC", column))


def _compact(text: str) -> str:
    return "".join(_tokens(text)).casefold()


def _spellings() -> dict[str, str]:
    found = {_compact(column): column for column in TEXT_COLUMNS}
    for field in FIELDS:
        names = (field.title, *(() if len(field.symbol) == 1 else (field.symbol,)))
        found |= dict.fromkeys((*map(_compact, names), *_OTHER_NAMES.get(field.column, ())), field.column)
    return found


_SPELLINGS = MappingProxyType(_spellings())


def meant_by(column: str) -> str:
    """The known column that a name is another spelling or unit of, or an empty text.

    Single letters count in the case of the symbol on screen only ("T", not "t"), and text columns without a unit
    only.
    """
    if column.casefold().startswith(UNCERTAINTY):
        rest = column[len(UNCERTAINTY) :]
        known = meant_by(rest) or (rest if rest in FIELD_BY_COLUMN else "")
        return UNCERTAINTY + known if known else ""
    tokens = _tokens(column)
    for count in range(len(tokens), 0, -1):
        stem, unit = "".join(tokens[:count]), "".join(tokens[count:]).casefold()
        known = _LETTER_SYMBOLS.get(stem, "") or _SPELLINGS.get(stem.casefold(), "")
        if known and _UNIT.fullmatch(unit) and (known in FIELD_BY_COLUMN or not unit):
            return known
    return ""


def check_header(columns: tuple[str, ...], source: str) -> tuple[str, ...]:
    """The columns that travel along: all that are not read.

    Parameters
    ----------
    columns : tuple of str
        The header.
    source : str
        What to call the table.

    Raises
    ------
    TableError
        Where a column is missing, or one looks like a known quantity in another spelling or unit.
    """
    extras = tuple(c for c in columns if c not in KNOWN and not c.startswith(UNCERTAINTY))
    # "U_…" and "u_…" alike: an uncertainty by another spelling must not travel along unread either.
    suspects = {c: meant for c in columns if c not in KNOWN and (meant := meant_by(c)) not in ("", c)}
    missing = [column for column in REQUIRED if column not in columns and _BY_FILE.get(column) not in columns]
    if not missing and not suspects:
        return extras
    sentences = []
    if missing:
        sentences.append(f"{quote(source)} lacks the column{'s' if len(missing) > 1 else ''} {_listed(missing)}.")
    sentences += [_rename(column, meant) for column, meant in suspects.items()]
    sentences += _hints(missing, [c for c in columns if c not in suspects])
    if suspects and not missing:
        sentences[0] = sentences[0].replace("Its column", f"In {quote(source)} the column", 1)
    raise TableError(" ".join(sentences))


def _rename(column: str, meant: str) -> str:
    field = FIELD_BY_COLUMN.get(meant.removeprefix(UNCERTAINTY))
    unit = f" with values in {field.unit}" if field is not None and field.unit else ""
    return (
        f"Its column {quote(column)} looks like {meant}: name it {meant}{unit}, "
        "or give it another name if it is something else."
    )


def _hints(missing: Iterable[str], others: list[str]) -> list[str]:
    sentences = []
    for column in missing:
        near = [c for c in others if _without_unit(c) in _HINTS.get(column, ())]
        sentences += [f"If {quote(c)} is meant, name it {column}{_AMOUNT.get(column, '')}." for c in near[:1]]
    if set(missing) & set(FIELD_BY_COLUMN):
        near = [c for c in others if _without_unit(c) in _EFFICIENCIES]
        sentences += [f"An efficiency ({quote(c)}) does not replace them." for c in near[:1]]
    return sentences


_AMOUNT = {"jsc_mA_cm2": " and divide it by the area"}


def _without_unit(column: str) -> str:
    tokens = _tokens(column)
    while len(tokens) > 1 and _UNIT.fullmatch(tokens[-1].casefold()):
        tokens.pop()
    return "".join(tokens).casefold()


def _listed(names: list[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def not_available(cells: Mapping[str, str]) -> list[tuple[str, str]]:
    """Columns of a row that ask for what this version does not do, each with a sentence.

    Parameters
    ----------
    cells : mapping of str to str
        Text by column name. Empty cells ask for nothing.
    """
    found = []
    reference = cells.get(REFERENCE, "").strip()
    if reference.lower() not in ("", STEP):
        sentence = f"The reference {quote(reference)} is not available in this version: leave it empty or write {STEP}."
        found.append((REFERENCE, sentence))
    for column, text in cells.items():
        sentence = _not_read_yet(column) if text.strip() else ""
        if sentence:
            found.append((column, sentence))
    return found


def _not_read_yet(column: str) -> str:
    """Sentence about a column whose contents this version does not read, or an empty text."""
    if column.startswith(UNCERTAINTY):
        return f"Uncertainties are not read by this version: leave {column} empty."
    return ""
