"""What the arguments of the headless command ask for."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal, NoReturn, get_args

from app.files.quoting import quote
from physics.attribution import ATTRIBUTIONS, Attribution

ChartKind = Literal["png", "svg", "pdf"]
CHART_KINDS: tuple[ChartKind, ...] = get_args(ChartKind)
HELP_FLAGS = ("-h", "--help")


class UsageError(ValueError):
    """Arguments that cannot be followed; the message is one sentence for the person who typed them."""


@dataclass(frozen=True)
class Options:
    """What is to be done.

    Parameters
    ----------
    cells : Path
        Table of cells.
    into : Path
        Folder for the results.
    charts : {"png", "svg", "pdf"} or None
        Form of the charts; None for no charts.
    attribution : {"log-mean", "ladder"}
        How the power is shared among the lines.
    """

    cells: Path
    into: Path
    charts: ChartKind | None
    attribution: Attribution


class _Parser(argparse.ArgumentParser):
    """Raises its faults instead of ending the process."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"The arguments cannot be read ({message}): see gapledger batch --help.")


def _parser() -> _Parser:
    # Everything is optional and text to argparse, so that every refusal is one of our own sentences.
    parser = _Parser(
        prog="gapledger batch",
        description="Work out the loss ledger of every cell in a table, without a window.",
        epilog="Exit status: 0 every row was computed, 1 some were refused (see DIR/problems.csv), 2 nothing was done.",
        usage="gapledger batch CELLS.csv --into DIR [--charts png|svg|pdf] [--attribution log-mean|ladder]",
        add_help=False,
        allow_abbrev=False,
    )
    parser.add_argument("cells", nargs="?", metavar="CELLS.csv", help="table of cells, a row for each")
    parser.add_argument("--into", metavar="DIR", help="folder for ledger.csv, summary.csv and problems.csv")
    parser.add_argument("--charts", metavar="KIND", help="also a waterfall chart for each cell")
    parser.add_argument(
        "--attribution",
        default=ATTRIBUTIONS[0],
        metavar="NAME",
        help="how the power is shared among the lines (default: log-mean, which is free of any order)",
    )
    parser.add_argument("--draws", help=argparse.SUPPRESS)
    parser.add_argument("--seed", help=argparse.SUPPRESS)
    parser.add_argument(*HELP_FLAGS, action="store_true", help="show this text")
    return parser


def help_text() -> str:
    """The help of the command."""
    return _parser().format_help()


def read_options(argv: Sequence[str]) -> Options:
    """Read the arguments behind `gapledger batch`.

    Raises
    ------
    UsageError
        Where they cannot be followed.
    """
    given, surplus = _parser().parse_known_args(list(argv))
    if surplus:
        raise UsageError(f"{quote(surplus[0])} is not understood: see gapledger batch --help.")
    if given.draws is not None or given.seed is not None:
        raise UsageError(
            "--draws and --seed are for uncertainties, which this version does not work out: leave them out."
        )
    if not given.cells:
        raise UsageError("Name the table of cells: gapledger batch CELLS.csv --into DIR.")
    if not given.into:
        raise UsageError("Name the folder for the results: gapledger batch CELLS.csv --into DIR.")
    if given.charts is not None and given.charts not in CHART_KINDS:
        raise UsageError(f"Charts can be png, svg or pdf, not {quote(given.charts)}.")
    if given.attribution not in ATTRIBUTIONS:
        raise UsageError(f"The attribution can be log-mean or ladder, not {quote(given.attribution)}.")
    return Options(Path(given.cells), Path(given.into), given.charts, given.attribution)
