"""A fingerprint of how a text is laid out, by which a choice of reading is remembered for the next of its kind."""

from __future__ import annotations

import hashlib
import json

from app.files.measured.model import MeasuredText
from app.files.measured.words import words_of


def shape_key(text: MeasuredText) -> str:
    """A text of 32 hexadecimal digits, the same for texts that differ in their numbers only.

    It counts the delimiter, the different widths of tables with the words above their columns, and the names of the
    facts; not how many tables and rows there are, what stands in them, what the facts say, or the source.
    """
    tables = {tuple((_numberless(column.name), column.unit) for column in block.columns) for block in text.blocks}
    facts = sorted({_numberless(key) for key in text.facts})
    shape = json.dumps([text.delimiter, sorted(tables), facts])
    return hashlib.blake2b(shape.encode("utf-8", "surrogatepass"), digest_size=16).hexdigest()


def _numberless(name: str) -> str:
    """The words of a name without digits, which number samples and light levels."""
    return " ".join("".join(letter for letter in word if not letter.isdecimal()) for word in words_of(name)).strip()
