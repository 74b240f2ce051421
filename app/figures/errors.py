"""The one error of this folder."""

from __future__ import annotations


class FigureError(Exception):
    """A picture could not be made; the message is a plain sentence for the user."""
