"""Random sessions: anything that a user may have on the shelf."""

from __future__ import annotations

from types import MappingProxyType

import numpy as np
from hypothesis import strategies as st
from hypothesis.strategies import DrawFn, SearchStrategy

from app.session.curves import NO_CURVES, Curves, Source, Sweep
from app.session.fields import FIELDS
from app.session.stacks import NO_STACKS, Reading, StackReadings
from app.session.state import TYPED, CellEntry, Choices, State, Unread, Value
from physics.light_series import LightSeries
from physics.quantum import Curve

NUMBERS = st.floats(allow_nan=False, allow_infinity=False)
TEXTS = st.text(st.characters(exclude_categories=["Cs"]), max_size=30)
_SOURCES: SearchStrategy[Source] = st.sampled_from(["sweep", "fit", "inflection", "edge mean", "light series"])


def arrays(size: int, elements: SearchStrategy[float] = NUMBERS) -> SearchStrategy[np.ndarray]:
    return st.lists(elements, min_size=size, max_size=size).map(lambda each: np.array(each, dtype=float))


@st.composite
def values(draw: DrawFn) -> Value:
    return draw(st.one_of(st.none(), NUMBERS, st.builds(Unread, TEXTS, TEXTS)))


@st.composite
def quantum(draw: DrawFn) -> Curve:
    wavelength = draw(st.lists(st.floats(1.0, 1e5), min_size=2, max_size=12, unique=True).map(sorted))
    return Curve(np.array(wavelength), draw(arrays(len(wavelength))))


@st.composite
def sweeps(draw: DrawFn) -> Sweep:
    size = draw(st.integers(0, 20))
    direction = draw(st.sampled_from(["", "forward", "reverse"]))
    return Sweep(draw(TEXTS), draw(arrays(size)), draw(arrays(size)), direction, draw(st.booleans()))


@st.composite
def light(draw: DrawFn) -> LightSeries:
    jsc = draw(st.lists(st.floats(1e-9, 1e5), min_size=0, max_size=9, unique=True).map(sorted))
    return LightSeries(np.array(jsc, dtype=float), draw(arrays(len(jsc), st.floats(1e-9, 5.0))))


@st.composite
def curves(draw: DrawFn) -> Curves:
    if draw(st.booleans()):
        return NO_CURVES
    found = Curves(
        tuple(draw(st.lists(sweeps(), max_size=3))),
        draw(st.none() | quantum()),
        draw(st.none() | quantum()),
        draw(st.none() | light()),
    )
    return found if found.sweeps or found.eqe or found.reflectance or found.series else NO_CURVES


def readings() -> SearchStrategy[Reading | None]:
    suns = st.floats(1e-6, 1e5)
    return st.one_of(
        st.none(),
        st.builds(Reading, st.floats(1e-12, 1.0), st.just("yield"), suns),
        st.builds(Reading, st.floats(1e-3, 5.0), st.just("voltage"), suns),
    )


@st.composite
def stacks(draw: DrawFn) -> StackReadings:
    if draw(st.booleans()):
        return NO_STACKS
    contacts = tuple(draw(st.lists(st.tuples(TEXTS, readings()), max_size=3)))
    return StackReadings(draw(readings()), contacts, draw(readings()), draw(st.none() | st.floats(0.1, 10.0)))


@st.composite
def cells(draw: DrawFn, ident: int = 0) -> CellEntry:
    keys = [field.key for field in FIELDS]
    sources = draw(st.dictionaries(st.sampled_from(keys), _SOURCES, max_size=3))
    return CellEntry(
        ident,
        draw(TEXTS),
        draw(TEXTS),
        draw(st.sampled_from(["am15g", "am0", "blackbody:6000", "nonsense"])),
        MappingProxyType({key: draw(values()) for key in keys}),
        draw(TEXTS),
        draw(curves()),
        MappingProxyType(sources) if sources else TYPED,
        draw(stacks()),
    )


@st.composite
def states(draw: DrawFn) -> State:
    count = draw(st.integers(0, 4))
    made = tuple(draw(cells(ident)) for ident in range(1, count + 1))
    picked = draw(st.none() | st.integers(1, count)) if count else None
    choices = Choices(draw(st.sampled_from(["log-mean", "ladder"])), draw(st.sampled_from([1, 2])))
    return State(made, picked, draw(TEXTS), choices, count + 1)
