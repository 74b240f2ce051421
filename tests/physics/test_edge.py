"""The gap and the tail of an EQE, against edges whose answer is known."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy.special import erf

from physics.edge import EdgeFault, edge_of
from physics.quantum import Curve
from physics.units import EV_NM, Array

from .optical_constants import silicon

Shape = Callable[[Array, float, float], Array]


def _gaussian(energy: Array, gap: float, width: float) -> Array:
    return 0.9 * 0.5 * (1 + erf((energy - gap) / (width * np.sqrt(2))))


def _logistic(energy: Array, gap: float, width: float) -> Array:
    return 0.9 / (1 + np.exp(-(energy - gap) / width))


def _edge(shape: Shape, gap: float, width: float, step: float, noise: float = 0.0, seed: int = 0) -> Curve:
    wavelength = np.arange(300.0, EV_NM / gap + 150.0, step)
    value = shape(EV_NM / wavelength, gap, width)
    return Curve(wavelength, value + noise * np.random.default_rng(seed).standard_normal(value.size))


@pytest.mark.parametrize("step", [1.0, 2.0, 5.0])
@pytest.mark.parametrize("width", [0.012, 0.02, 0.03])
@pytest.mark.parametrize("gap", [1.12, 1.6])
@pytest.mark.parametrize("shape", [_gaussian, _logistic])
def test_both_gaps_of_a_clean_edge_are_its_middle(shape: Shape, gap: float, width: float, step: float) -> None:
    edge = edge_of(_edge(shape, gap, width, step))
    assert edge.inflection == pytest.approx(gap, abs=0.0005)
    assert edge.mean == pytest.approx(gap, abs=0.0005)
    assert edge.band[0] < edge.inflection < edge.band[1]


def test_noise_moves_the_gaps_little() -> None:
    """With a thousandth of full scale the gaps scatter by a small part of the edge's width."""
    edges = [edge_of(_edge(_logistic, 1.6, 0.02, 5.0, 0.001, seed)) for seed in range(20)]
    assert np.std([edge.inflection for edge in edges]) < 0.0006
    assert np.std([edge.mean for edge in edges]) < 0.0003


@pytest.mark.parametrize("width", [0.012, 0.015, 0.02])
def test_the_tail_of_a_logistic_edge_is_its_width(width: float) -> None:
    """Far below its middle a logistic edge is exp((E − Eg)/width)."""
    edge = edge_of(_edge(_logistic, 1.6, width, 2.0))
    assert edge.tail is not None
    assert edge.tail.slope == pytest.approx(width, rel=0.01)
    assert edge.faults == ()


def test_a_noisy_tail_lies_within_its_uncertainty() -> None:
    """Points with 5 % noise each, so that the scatter about the line in ln EQE is even."""
    rng = np.random.default_rng(3)
    inside = 0
    for _ in range(100):
        clean = _edge(_logistic, 1.6, 0.015, 2.0)
        near = clean.value < 0.05
        noise = np.where(near, np.exp(0.05 * rng.standard_normal(near.size)), 1.0)
        edge = edge_of(Curve(clean.wavelength, clean.value * noise))
        assert edge.tail is not None
        assert edge.tail_u is not None
        inside += abs(edge.tail.slope - 0.015) < 2 * edge.tail_u + 0.0001  # a logistic edge is not quite exponential
    assert inside >= 88


def test_a_tail_stops_at_the_floor() -> None:
    clean = _edge(_logistic, 1.6, 0.015, 2.0)
    edge = edge_of(Curve(clean.wavelength, clean.value + 3e-5))
    assert edge.tail is not None
    assert edge.tail.slope == pytest.approx(0.015, rel=0.1)
    assert edge.tail.start > 1.4
    assert edge.tail.anchor > 3e-5


def test_the_gap_of_silicon_depends_on_its_thickness() -> None:
    """An indirect edge has no gap of its own in the EQE: the thicker the cell, the lower the inflection.

    With Lambertian light trapping and the constants of Green 2008 it lies within 20 meV of 1.12 eV at 50 µm, and
    34 meV below at 110 µm.
    """
    thin, thick = edge_of(silicon(50.0)), edge_of(silicon(110.0))
    assert thin.inflection == pytest.approx(1.12, abs=0.02)
    assert thin.mean == pytest.approx(1.12, abs=0.02)
    assert 1.07 < thick.inflection < thin.inflection


@pytest.mark.parametrize(
    ("curve", "fault"),
    [
        (Curve(np.linspace(400, 800, 5), np.ones(5)), EdgeFault.TOO_FEW),
        (Curve(np.linspace(400, 800, 50), np.ones(50)), EdgeFault.STOPS_EARLY),
        (Curve(np.arange(300.0, 760.0, 5.0), np.linspace(0.5, 0.8, 92)), EdgeFault.STOPS_EARLY),
        (Curve(np.linspace(400, 800, 50), np.zeros(50)), EdgeFault.NO_SIGNAL),
        (_edge(_logistic, 1.6, 0.04, 2.0), EdgeFault.FLAT_TAIL),
        (_edge(_gaussian, 1.6, 0.01, 20.0), EdgeFault.NO_TAIL),
    ],
)
def test_what_is_missing_is_told(curve: Curve, fault: EdgeFault) -> None:
    edge = edge_of(curve)
    tail, faults = edge.tail_at(298.15)
    assert faults == (fault,)
    assert tail is None
    assert np.isnan(edge.inflection) == (fault not in (EdgeFault.FLAT_TAIL, EdgeFault.NO_TAIL))
