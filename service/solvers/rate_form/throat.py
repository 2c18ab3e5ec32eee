"""The ideal mass flux of a restriction, as `service.balance.restriction.mass_flux`, but made for an integration.

Two things differ: the throat of a real fluid is followed from where it was last (see `isentropic`: some five look-ups
instead of thirty); and within a ten-thousandth of equal pressures the flux falls smoothly to zero, so that two vessels
come to rest instead of chattering. Liquid, also boiling liquid, passes without flashing, as in `mass_flux`.
"""

from __future__ import annotations

import math

from service.balance.restriction import GAS_CONSTANT
from service.fluids.protocol import Fluid, State
from service.solvers.rate_form.isentropic import IsentropicThroat

REST = 1e-4
"""(p1 − p2)/p1 below which the flux falls off smoothly: flow in a slit so close to rest is laminar anyhow."""


class Throat:
    """One restriction. choked: as last found."""

    def __init__(self, fluid: Fluid) -> None:
        self.fluid = fluid
        self.choked = False
        self._real = IsentropicThroat(fluid)
        self._k, self._R = math.nan, math.nan

    @property
    def below_triple(self) -> bool:
        """Whether the throat's pressure would lie below the triple point, where solid forms."""
        return self._real.below_triple

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
        if kind in ("constant_liquid", "brine") or upstream.phase == "liquid":
            self.choked = False
            return math.sqrt(2.0 * at["rho"] * (at["p"] - p2))
        flux, self.choked = self._real.flux(at, p2)
        return flux

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
