"""Where a fluid freezes, as far as the property library knows."""

from __future__ import annotations

import math
from typing import Any

import CoolProp.CoolProp as CoolPropLibrary
import numpy as np

from service.fluids.protocol import Column

POINTS = 60


def melting_temperature(backend: Any, p: float) -> float | None:
    """Temperature [K] at which the fluid freezes at p [Pa], None where the library does not know it."""
    try:
        T = float(backend.melting_line(CoolPropLibrary.iT, CoolPropLibrary.iP, p))
    except ValueError:
        return None
    return T if math.isfinite(T) and T > 0.0 else None


def melting_pressure(backend: Any, T: float) -> float | None:
    """Pressure [Pa] at which the fluid freezes at T [K], None where the library does not know it."""
    try:
        p = float(backend.melting_line(CoolPropLibrary.iP, CoolPropLibrary.iT, T))
    except ValueError:
        return None
    return p if math.isfinite(p) and p > 0.0 else None


class MeltingLine:
    """The melting line of one fluid; where the library has none, the lowest temperature of its equation of state."""

    def __init__(self, backend: Any, T_min: float, p_triple: float, p_max: float) -> None:
        self.T_min, self.p_triple, self.p_max = T_min, p_triple, p_max
        points: list[tuple[float, float]] = []
        if backend.has_melting_line():
            grid = (p_triple * (p_max / p_triple) ** (part / POINTS) for part in range(POINTS + 1))
            points = [(p, T) for p in grid if (T := melting_temperature(backend, p)) is not None]
        self.known = len(points) > 1
        self._p, self._T = np.array(points).reshape(-1, 2).T
        self.lowest = min([T_min, *(T for _, T in points)])
        self.cold = max([T_min, *(1.0001 * T for _, T in points)])
        """Below this temperature [K] a state has to be held against the line."""

    def temperature(self, backend: Any, p: float) -> float:
        """Lowest temperature [K] of the fluid at p [Pa]."""
        if not self.known or p < self.p_triple:
            return self.T_min
        return melting_temperature(backend, p) or self.T_min

    def pressure(self, backend: Any, T: float) -> float:
        """Highest pressure [Pa] of the fluid at T [K]."""
        p = melting_pressure(backend, T) if self.known and self.cold >= T else None
        return self.p_max if p is None else min(p, self.p_max)

    def surely_fluid_above(self, p: Column) -> Column:
        """Temperatures [K] above which rows at p [Pa] are not frozen: the line between its points, rounded up."""
        if not self.known:
            return np.full(len(p), self.cold)
        cell = np.clip(np.searchsorted(self._p, p), 1, len(self._p) - 1)
        upper = np.maximum(np.maximum(self._T[cell - 1], self._T[cell]), self.T_min) * (1 + 1e-6)
        bound: Column = np.where(p <= self._p[-1], upper, self.cold)
        return bound
