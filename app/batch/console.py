"""Words to the terminal, whatever it is."""

from __future__ import annotations

import os
import sys
import time
from typing import TextIO

_SECONDS = 2.0


def say(text: str, stream: TextIO | None) -> None:
    """Print a line; what the stream's encoding lacks is spelled out, and a reader who has gone is no fault."""
    if stream is None:  # a program without a console
        return
    encoding = stream.encoding or "utf-8"
    try:
        stream.write(text.encode(encoding, "backslashreplace").decode(encoding) + "\n")
        stream.flush()
    except OSError:
        # The results are saved and the exit status tells; only the interpreter's own flush must not fail as well.
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream.fileno())
        os.close(nowhere)


class Progress:
    """Tells on the error stream how far a long run is, every two seconds."""

    def __init__(self, what: str, total: int) -> None:
        self._what, self._total = what, total
        self._told = time.monotonic()

    def at(self, done: int) -> None:
        """So many are done."""
        now = time.monotonic()
        if now - self._told >= _SECONDS:
            self._told = now
            say(f"{done} of {self._total} {self._what} done", sys.stderr)
