"""Points of a local fit that are sought rather than given, and values that carry what each datum does to them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from physics.local_fit import LocalFit
from physics.units import Array


@dataclass(frozen=True, eq=False)
class Linear:
    """A value and how one standard deviation of each point's noise moves it: shared points then correlate rightly."""

    value: float
    moves: Array

    def times(self, factor: float) -> Linear:
        """The value times an exact factor."""
        return Linear(self.value * factor, self.moves * factor)

    def over(self, other: Linear) -> Linear:
        """The quotient, to first order."""
        value = self.value / other.value
        return Linear(value, (self.moves - value * other.moves) / other.value)


def root(fit: LocalFit, at: float) -> float | None:
    """Voltage [V] at which the fitted current crosses zero, from a start; None where the current does not fall."""
    for _ in range(40):
        value, slope, _ = fit.at(at)
        if not slope < 0:
            return None
        step = -value / slope
        at += float(np.clip(step, -fit.half, fit.half))
        if abs(step) < 1e-13 * abs(at) + 1e-300:
            break
    return at


def top(fit: LocalFit, at: float) -> float | None:
    """Voltage [V] at which V·J is highest, J + V J′ = 0; None where it curves upwards."""
    for _ in range(40):
        value, slope, bend = fit.at(at)
        curvature = 2.0 * slope + at * bend
        if not curvature < 0:
            return None
        step = -(value + at * slope) / curvature
        at += float(np.clip(step, -0.5 * fit.half, 0.5 * fit.half))
        if abs(step) < 1e-12 * abs(at):
            break
    return at
