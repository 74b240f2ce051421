"""The one error of reading and writing tables."""


class TableError(ValueError):
    """A table that cannot be used; the message is one sentence: where, what was found, what to do."""
