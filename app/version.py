"""The version of the program."""

from __future__ import annotations

from importlib.metadata import PackageNotFoundError
from importlib.metadata import version as installed


def version() -> str:
    """Version of the installed program, or "not installed" when run from its source."""
    try:
        return installed("gapledger")
    except PackageNotFoundError:
        return "not installed"
