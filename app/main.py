"""The command `gapledger`: the window, or the headless run over a table of cells."""

from __future__ import annotations

import sys
from collections.abc import Sequence

_USAGE = """\
usage: gapledger                     open the window with an empty cell
       gapledger demo                open the window on the invented demo cells
       gapledger CELLS.csv …         open the window on tables of cells
       gapledger batch CELLS.csv --into DIR [--charts png|svg|pdf] [--attribution log-mean|ladder]
                                     work out every cell of a table, without a window
       gapledger --version | --help
"""


def main(argv: Sequence[str] | None = None) -> int:
    """Run the program.

    Parameters
    ----------
    argv : sequence of str, optional
        Arguments; those of the process if left out.

    Returns
    -------
    int
        Exit status: 0 when all went well, 2 for a usage fault; `batch` has its own.
    """
    arguments = list(sys.argv[1:] if argv is None else argv)
    if arguments[:1] == ["batch"]:
        from app.batch.command import run

        return run(arguments[1:])
    if arguments in (["--help"], ["-h"], ["help"]):
        print(_USAGE, end="")
        return 0
    if arguments == ["--version"]:
        from app.version import version

        print(f"gapledger {version()}")
        return 0
    if any(a.startswith("-") for a in arguments):
        print(_USAGE, end="", file=sys.stderr)
        return 2
    from app.workbench.start import open_window

    return open_window(arguments)


if __name__ == "__main__":
    sys.exit(main())
