"""The largest isentropic mass flux of a real fluid over the throat pressure, followed from call to call.

    G(p) = ρ(p, s1) √(2 (h1 − h(p, s1)))        G* = max over p

Three points of G over ln p around the last throat give a parabola, and G is looked up at its top: an error δ in ln p
costs only δ² in G. Where the isentrope enters the wet region between the points, G has a kink there: its pressure is
found from the saturation line, and the top is the kink itself or lies on one side of it. Below the triple point the
models end: the flux at the triple pressure stands for the largest one then.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from scipy.optimize import brentq, minimize_scalar

from service.balance.restriction import mass_flux
from service.errors import CaseError, StateOutOfRange
from service.fluids.protocol import Fluid

NEAR, NEARER = 1e-2, 3e-3
"""(p1 − p)/p1 between which the enthalpy drop passes over to its integral ∫ v dp: below, it is lost in the digits."""

SPACING, WIDE = 0.004, 0.03
"""Distances in ln p: of the points of a parabola, and of the search on one side of a kink."""

STEP = 2e-5
"""Distance in ln p at which the sides of a kink are told from it."""

MOST = 20
SETTLED = 1e-12


class IsentropicThroat:
    """ratio: last throat pressure over upstream pressure. below_triple: whether the throat wants to be below it."""

    def __init__(self, fluid: Fluid) -> None:
        self.fluid = fluid
        self.ratio: float | None = None
        self.below_triple = False
        self._kink: tuple[float, float, float] | None = None  # branch, place, slope of the edge as last found
        triple = fluid.limits.p_triple
        self._floor = 0.0 if triple is None else triple * (1.0 + 1e-6)

    def at(self, up: Mapping[str, float], p: float) -> tuple[float, float]:
        """(G [kg/(m2 s)], vapour fraction or NaN) in a section at p [Pa]; up: the stagnation state upstream."""
        p1 = up["p"]
        state = self.fluid.state(("p", "s"), (p, up["s"])).values
        rho, fall = state["rho"], (p1 - p) / p1
        drop = up["h"] - state["h"]
        if fall < NEAR:
            integral = 0.5 * (p1 - p) * (1.0 / up["rho"] + 1.0 / rho)
            share = min(max((NEAR - fall) / (NEAR - NEARER), 0.0), 1.0)
            drop += share * (integral - drop)
        return rho * math.sqrt(max(2.0 * drop, 0.0)), state["x"]

    def flux(self, up: Mapping[str, float], p2: float) -> tuple[float, bool]:
        """(G, whether choked) towards p2 [Pa]."""
        r2 = p2 / up["p"]
        if self.ratio is None or r2 > 0.98 * self.ratio:
            free = self._free(up, p2)
            if free is not None:
                return free, False
        flux, throat = self._top(up, p2)
        if throat > p2:
            return flux, True
        return self.at(up, p2)[0], False

    def _free(self, up: Mapping[str, float], p2: float) -> float | None:
        """The flux where it still rises towards lower pressures at p2; None where it is choked before."""
        if p2 < 0.3 * up["p"]:
            return None
        try:
            here = self.at(up, p2)[0]
            if self.ratio is not None and p2 > 1.05 * self.ratio * up["p"]:
                return here
            step = min(1e-3 * p2, 0.1 * (up["p"] - p2))
            return here if here > self.at(up, p2 + step)[0] else None
        except CaseError:
            return None

    def _top(self, up: Mapping[str, float], p2: float) -> tuple[float, float]:
        """The largest flux, and the pressure [Pa] where it occurs."""
        self.below_triple = False
        try:
            found = self._followed(up, math.log(self.ratio)) if self.ratio is not None else None
            flux, x = found or self._searched(up, p2)
        except CaseError:
            if not 0.0 < self._floor < up["p"] or self.ratio is None or self.ratio * up["p"] > 2.0 * self._floor:
                raise
            flux, x = math.nan, -math.inf
        p = up["p"] * math.exp(x)
        if p < self._floor and self._wet_at_floor(up):
            self.below_triple = True
            p = self._floor
            flux = self.at(up, p)[0]
        if not math.isfinite(flux):
            raise StateOutOfRange(f"No flux is found through a throat below the triple point of {self.fluid.name}.")
        self.ratio = p / up["p"]
        return flux, p

    def _searched(self, up: Mapping[str, float], p2: float) -> tuple[float, float]:
        """(G*, ln of the ratio) by a search over all pressures, and from there."""
        lowest = max(p2, 0.2 * up["p"])
        rough = mass_flux(self.fluid, up["p"], up["T"], up["h"], up["s"], up["rho"], lowest)
        self._kink = None
        x = math.log(rough.throat_pressure / up["p"])
        return self._followed(up, x) or (rough.value, x)

    def _wet_at_floor(self, up: Mapping[str, float]) -> bool:
        x = self.at(up, self._floor)[1]
        return x == x

    def _followed(self, up: Mapping[str, float], x: float) -> tuple[float, float] | None:
        """(G*, ln of the throat's pressure ratio), from a start x close by; None where it is not close."""
        if self._kink is not None:
            xk = self._edge_near(up, self._kink)
            found, after = self._around_kink(up, xk) if xk is not None else (None, x)
            if found is not None:
                return found, after
            x = after
        for _ in range(MOST):
            x = min(x, -2.0 * SPACING)
            points = [self.at(up, up["p"] * math.exp(x + d)) for d in (-SPACING, 0.0, SPACING)]
            wet = [quality == quality for _, quality in points]
            if wet[0] != wet[2]:
                xk = self._edge_between(up, x - SPACING, x + SPACING)
                found, x = self._around_kink(up, xk) if xk is not None else (None, x - 3.0 * SPACING)
                if found is not None:
                    return found, x
                continue
            (low, _), (mid, _), (high, _) = points
            shift = _vertex(low, mid, high)
            if shift is None:
                x += math.copysign(5.0 * SPACING, high - low)
            elif abs(shift) <= 1.5 * SPACING:
                return self.at(up, up["p"] * math.exp(x + shift))[0], x + shift
            else:
                x += min(max(shift, -20.0 * SPACING), 20.0 * SPACING)
        return None

    def _around_kink(self, up: Mapping[str, float], xk: float) -> tuple[float | None, float]:
        """(G*, x) where the top is at the kink or next to it; (None, where to look on) where it is farther away."""
        kink, self._kink = self._kink, None
        if xk > -1e-3:
            return None, xk - 3.0 * SPACING
        at_kink = self.at(up, up["p"] * math.exp(xk))[0]
        for side in (1.0, -1.0):
            if self.at(up, up["p"] * math.exp(xk + side * STEP))[0] <= at_kink:
                continue  # falls away from the kink on this side
            low, high = sorted((xk, xk + side * WIDE if side < 0.0 else min(xk + WIDE, -1e-3)))
            best = minimize_scalar(
                lambda x: -self.at(up, up["p"] * math.exp(x))[0],
                bounds=(low, high),
                method="bounded",
                options={"xatol": 1e-7},
            )
            x, flux = float(best.x), -float(best.fun)
            if abs(x - xk) > WIDE - 2.0 * SPACING:
                return None, x
            self._kink = kink
            return flux, x
        self._kink = kink
        return at_kink, xk

    def _off(self, up: Mapping[str, float], quality: float, x: float) -> float:
        """How far the entropy of the saturation line is from that of the isentrope, relative to R·T-sized amounts."""
        return (self.fluid.state(("p", "x"), (up["p"] * math.exp(x), quality)).values["s"] - up["s"]) * 1e-3

    def _edge_between(self, up: Mapping[str, float], low: float, high: float) -> float | None:
        """ln of the pressure ratio at which the isentrope meets the saturation line, between two others."""
        critical = self.fluid.limits.p_critical
        if critical is not None:
            high = min(high, math.log(critical * (1.0 - 1e-9) / up["p"]))
        for quality in (0.0, 1.0):
            try:
                first, last = self._off(up, quality, low), self._off(up, quality, high)
                if first * last <= 0.0:
                    x = float(brentq(lambda x, q=quality: self._off(up, q, x), low, high, xtol=1e-13))
                    slope = (last - first) / (high - low)
                    self._kink = (quality, x, slope)
                    return x
            except CaseError:
                continue
        return None

    def _edge_near(self, up: Mapping[str, float], kink: tuple[float, float, float]) -> float | None:
        """The same by a secant from where it was last."""
        quality, x, slope = kink
        try:
            before: tuple[float, float] | None = None
            for _ in range(MOST):
                off = self._off(up, quality, x)
                if before is not None and x != before[0] and off != before[1]:
                    slope = (off - before[1]) / (x - before[0])
                before = x, off
                step = -off / slope
                x += min(max(step, -SPACING), SPACING)
                if abs(step) <= SETTLED:
                    self._kink = (quality, x, slope)
                    return x
        except CaseError:
            pass
        self._kink = None
        return None


def _vertex(low: float, mid: float, high: float) -> float | None:
    """Where the parabola through three points at −SPACING, 0, SPACING has its top; None where it has none."""
    bend = low - 2.0 * mid + high
    return None if bend >= 0.0 else 0.5 * SPACING * (low - high) / bend
