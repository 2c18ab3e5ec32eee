"""The ideal mass flux of a restriction, as `service.balance.restriction.mass_flux`, but made for an integration.

Three things differ: the throat is sought from where it was last (a parabola through three points of the flux over
ln p, and the flux at its top: four look-ups instead of some thirty); close to equal pressures the enthalpy drop is
taken from ∫ v dp, since the difference of two enthalpies there is lost in the digits; and within a ten-thousandth of
equal pressures the flux falls smoothly to zero, so that two vessels come to rest instead of chattering.
"""

from __future__ import annotations

import math

from service.balance.restriction import GAS_CONSTANT, mass_flux
from service.errors import CaseError
from service.fluids.protocol import Fluid, State

REST = 1e-4
"""(p1 − p2)/p1 below which the flux falls off smoothly: flow in a slit so close to rest is laminar anyhow."""

NEAR, NEARER = 1e-2, 3e-3
"""(p1 − p2)/p1 between which the enthalpy drop passes over to its integral."""

SPACING = 0.01
"""Distance in ln p of the points of the parabola."""

MOST = 12


class Throat:
    """One restriction. ratio: throat pressure over upstream pressure, as last found."""

    def __init__(self, fluid: Fluid) -> None:
        self.fluid = fluid
        self.ratio: float | None = None
        self.choked = False
        self._k, self._R = math.nan, math.nan

    def flux(self, upstream: State, p2: float) -> float:
        """G [kg/(m2 s)] from the stagnation state upstream to p2 [Pa]; 0 where p2 is not below."""
        p1 = upstream.values["p"]
        fall = (p1 - p2) / p1
        if fall <= 0.0:
            self.choked = False
            return 0.0
        if fall < REST:
            x = fall / REST
            return (1.25 - 0.25 * x * x) * x * self._flux(upstream, p1 * (1.0 - REST))
        return self._flux(upstream, p2)

    def _flux(self, upstream: State, p2: float) -> float:
        at = upstream.values
        kind = self.fluid.kind
        if kind == "ideal_gas":
            return self._ideal_gas(at["p"], at["T"], p2)
        # saturated liquid flashes in the throat; liquid below its boiling point is let through as it is
        subcooled = upstream.phase == "liquid" and at["x"] != at["x"]
        if kind in ("constant_liquid", "brine") or subcooled:
            self.choked = False
            return math.sqrt(2.0 * at["rho"] * (at["p"] - p2))
        return self._isentropic(at, p2)

    def _ideal_gas(self, p1: float, T1: float, p2: float) -> float:
        if not math.isfinite(self._k):
            assert self.fluid.molar_mass is not None
            self._R = GAS_CONSTANT / self.fluid.molar_mass
            cp = self.fluid.state(("p", "T"), (p1, T1), ("cp",)).values["cp"]
            self._k = cp / (cp - self._R)
        k, R = self._k, self._R
        critical = (2 / (k + 1)) ** (k / (k - 1))
        self.choked = p2 / p1 <= critical
        r = max(p2 / p1, critical)
        return p1 * math.sqrt(2 * k / ((k - 1) * R * T1) * (r ** (2 / k) - r ** ((k + 1) / k)))

    # -- real fluids ---------------------------------------------------------------------------------------------

    def _at(self, at: dict[str, float], p: float) -> float:
        """Flux through a section at p [Pa], isentropic from upstream."""
        p1 = at["p"]
        state = self.fluid.state(("p", "s"), (p, at["s"])).values
        rho, fall = state["rho"], (p1 - p) / p1
        drop = at["h"] - state["h"]
        if fall < NEAR:
            integral = 0.5 * (p1 - p) * (1.0 / at["rho"] + 1.0 / rho)
            share = min(max((NEAR - fall) / (NEAR - NEARER), 0.0), 1.0)
            drop += share * (integral - drop)
        return rho * math.sqrt(max(2.0 * drop, 0.0))

    def _isentropic(self, at: dict[str, float], p2: float) -> float:
        p1 = at["p"]
        r2 = p2 / p1
        if self.ratio is None or r2 > 0.98 * self.ratio:
            free = self._free(at, p2)
            if free is not None:
                self.choked = False
                return free
        flux, throat = self._top(at, p2)
        self.choked = throat > p2
        return flux if self.choked else self._at(at, p2)

    def _free(self, at: dict[str, float], p2: float) -> float | None:
        """The flux where it still rises towards lower pressures at p2; None where it is choked before."""
        if p2 < 0.3 * at["p"]:
            return None
        try:
            here = self._at(at, p2)
        except CaseError:
            return None
        if self.ratio is not None and p2 > 1.05 * self.ratio * at["p"]:
            return here
        step = min(1e-3 * p2, 0.1 * (at["p"] - p2))
        return here if here > self._at(at, p2 + step) else None

    def _top(self, at: dict[str, float], p2: float) -> tuple[float, float]:
        """The largest flux and the pressure [Pa] where it occurs."""
        found = self._by_parabola(at) if self.ratio is not None else None
        if found is None:
            found = self._by_search(at, p2)
        self.ratio = found[1] / at["p"]
        return found

    def _by_search(self, at: dict[str, float], p2: float) -> tuple[float, float]:
        lowest = max(p2, 0.2 * at["p"])
        found = mass_flux(self.fluid, at["p"], at["T"], at["h"], at["s"], at["rho"], lowest)
        return found.value, found.throat_pressure

    def _by_parabola(self, at: dict[str, float]) -> tuple[float, float] | None:
        """None where the top is not a smooth one (at the edge of the wet region)."""
        assert self.ratio is not None
        p1, x = at["p"], math.log(self.ratio)
        try:
            for _ in range(MOST):
                x = min(x, -2.0 * SPACING)
                low, mid, high = (self._at(at, p1 * math.exp(x + d)) for d in (-SPACING, 0.0, SPACING))
                bend = low - 2.0 * mid + high
                if bend >= 0.0:
                    return None
                shift = 0.5 * SPACING * (low - high) / bend
                if abs(shift) <= SPACING:
                    p = p1 * math.exp(x + shift)
                    return self._at(at, p), p
                x += min(max(shift, -20.0 * SPACING), 20.0 * SPACING)
        except CaseError:
            return None
        return None
