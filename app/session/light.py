"""The illuminations that a session knows, by short name."""

from __future__ import annotations

from functools import lru_cache

from physics.spectrum import REFERENCE_NAMES, Illumination, illumination


@lru_cache(maxsize=64)
def light_named(name: str) -> Illumination:
    """The illumination of a short name.

    Raises
    ------
    ValueError
        With a sentence for the user, where there is none of that name.
    """
    try:
        return illumination(name)
    except ValueError as fault:
        known = ", ".join(REFERENCE_NAMES)
        if name.strip().lower().startswith("blackbody:"):
            raise ValueError(
                f"The spectrum {name!r} is no black body: write blackbody: and a temperature between 1000 and 20000 K, "
                "such as blackbody:6000."
            ) from fault
        raise ValueError(
            f"The spectrum {name!r} is not known here: use {known}, or blackbody:6000 for a black body of 6000 K."
        ) from fault
