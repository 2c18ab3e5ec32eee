"""States on (rho, u) for an integration, where each state is close to the one before.

Models that flash on (rho, u) by themselves are asked directly. For the others (blends, IF97) the pressure is found by
a secant from the last one: h = u + p/rho is then known, and rho(p, h) has to be the density. A few (p, h) flashes
take the place of a search over the whole range.
"""

from __future__ import annotations

import math

from service.errors import CaseError
from service.fluids.protocol import Fluid, State

SETTLED = 1e-12
"""Relative to the density."""

MOST = 12


class DensityEnergyFlash:
    """Remembers the last pressure and slope of one vessel; not to be shared between threads."""

    def __init__(self, fluid: Fluid) -> None:
        self.fluid = fluid
        self._direct = not ("IF97" in fluid.provenance.model or "pseudo-pure" in fluid.provenance.model)
        self._p, self._slope = math.nan, math.nan

    def start(self, p: float) -> None:
        """Begin the next search at this pressure [Pa]."""
        self._p, self._slope = p, math.nan

    def state(self, rho: float, u: float) -> State:
        """The state at rho [kg/m3], u [J/kg]. Raises StateOutOfRange."""
        if not self._direct and math.isfinite(self._p):
            found = self._by_secant(rho, u)
            if found is not None:
                return found
        found = self.fluid.state(("rho", "u"), (rho, u))
        self._p, self._slope = found.values["p"], math.nan
        return found

    def _by_secant(self, rho: float, u: float) -> State | None:
        """None where the secant does not settle."""
        p, slope = self._p, self._slope
        before: tuple[float, float] | None = None
        best: tuple[float, State] | None = None
        try:
            for _ in range(MOST):
                found = self.fluid.state(("p", "h"), (p, u + p / rho))
                off = found.values["rho"] - rho
                if best is None or abs(off) < best[0]:
                    best = abs(off), found
                elif best[0] <= 1e3 * SETTLED * rho:
                    break  # the library's own noise
                if before is not None and before[0] != p:
                    slope = (off - before[1]) / (p - before[0])
                if abs(off) <= SETTLED * rho:
                    break
                if not math.isfinite(slope) or slope == 0.0:
                    slope = rho / p
                before = p, off
                p = min(max(p - off / slope, 0.5 * p), 2.0 * p)
        except CaseError:
            return None
        if best is None or best[0] > 1e4 * SETTLED * rho:
            return None
        state = best[1]
        self._p, self._slope = state.values["p"], slope
        state.values["rho"], state.values["u"] = rho, u
        return state
