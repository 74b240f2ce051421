"""The ledger as rows of text and numbers, for the table on screen, the clipboard and CSV. No Qt."""

from __future__ import annotations

from functools import lru_cache
from typing import NamedTuple

from app.files.table_output import tab_separated, write_table
from app.session.outcome import Picture
from app.wording import DELTA_SHOWN, basis_text, delta_text, loss_text, percent
from physics.ledger import Entry
from physics.lines import Section

COLUMNS = ("line", "amount", "change", "basis")


class LedgerRow(NamedTuple):
    """A line or a total of a ledger.

    Parameters
    ----------
    key, line, short : str
        Identity, name, and name for narrow places.
    family, section : str
        Where it belongs; empty for totals.
    amount, change, basis : str
        As shown. The amount is signed as seen from the sunlight: a loss is negative.
    power : float
        Amount [mW cm⁻²], signed likewise.
    share : float
        Amount [% of the incident power], signed likewise.
    delta : float or None
        Change of the line's own figure [delta_unit], signed likewise; None for totals.
    delta_unit : str
    total : bool
    """

    key: str
    line: str
    short: str
    family: str
    section: str
    amount: str
    change: str
    basis: str
    power: float
    share: float
    delta: float | None
    delta_unit: str
    total: bool


def ledger_rows(picture: Picture) -> tuple[LedgerRow, ...]:
    """All lines that the cell has, with the totals between them."""
    ledger = picture.ledger
    incident = float(ledger.limit.incident)
    rows = [_total("sunlight", "Sunlight", incident, incident, "")]
    for entry in ledger.entries:
        if entry.line.section is Section.LIMIT_TO_CELL and rows[-1].section == Section.SUN_TO_LIMIT.value:
            power = float(ledger.limit.power)
            rows.append(_total("detailed_balance", "Limit", power, incident, "calculated"))
        if entry.present:
            rows.append(_row(entry, incident))
    rows.append(_total("cell", picture.entry.name or "Cell", float(ledger.cell.power), incident, "measured"))
    return tuple(rows)


def _total(key: str, name: str, power: float, incident: float, basis: str) -> LedgerRow:
    share = power / incident
    return LedgerRow(key, name, name, "", "", percent(share), "", basis, power, 100 * share, None, "", True)


@lru_cache(maxsize=64)  # the lines down to the limit stay while the cell's figures change
def _row(entry: Entry, incident: float) -> LedgerRow:
    factor, unit, _ = DELTA_SHOWN[entry.line.factor.unit]
    loss = float(entry.loss)
    power_line = entry.line.factor.unit == "mW cm⁻²"
    return LedgerRow(
        key=entry.line.key,
        line=entry.line.title,
        short=entry.line.short,
        family=entry.line.family.value,
        section=entry.line.section.value,
        amount=loss_text(loss, incident),
        change="" if power_line else delta_text(entry),
        basis=basis_text(entry.form_at()),
        power=-loss,
        share=-100 * loss / incident,
        delta=-factor * float(entry.delta),
        delta_unit=unit,
        total=False,
    )


_FILE_COLUMNS = ("line", "family", "section", "share_pct", "power_mW_cm2", "change", "change_unit", "basis")


def _file_rows(picture: Picture) -> list[tuple[str | float | None, ...]]:
    return [
        (r.line, r.family, r.section, r.share, r.power, r.delta, r.delta_unit, r.basis) for r in ledger_rows(picture)
    ]


def ledger_csv(picture: Picture) -> str:
    """The ledger as comma-separated text with numbers in full."""
    return write_table(_FILE_COLUMNS, _file_rows(picture))


def ledger_tsv(picture: Picture) -> str:
    """The ledger as tab-separated text for a spreadsheet, with numbers in full."""
    return tab_separated(_FILE_COLUMNS, _file_rows(picture))
