"""Vessels, streams and transfers together: what is integrated, and how fast it changes.

What is integrated, each divided by its scale:

    for each vessel     m, E (internal energy; enthalpy in an open tank), T of its wall
    for each stream     ∫ ṁ dt, ∫ ṁ h dt, ∫ ṁ w²/2 dt, ∫ ṁ s dt
    for each transfer   ∫ Q̇ dt, ∫ Q̇/T dt
    for each wall       ∫ Q̇ from its ambient dt

    dm/dt = Σ ± ṁ        dE/dt = Σ ± ṁ (h + w²/2 + g z − g z of the content) + Σ ± Q̇ + h_i A (T_wall − T)
    m_w c_w dT_wall/dt = h_i A (T − T_wall) + h_o A (T_ambient − T_wall)
"""

from __future__ import annotations

import time
from collections import OrderedDict
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from service.solvers.rate_form.crossings import Carried, Exchange, Flow
from service.solvers.rate_form.vessels import Held, Vessel

Vector = npt.NDArray[np.float64]

PER_FLOW, PER_EXCHANGE = 4, 2
KEPT = 4


class OutOfTime(Exception):
    """The time budget is used up."""


@dataclass(slots=True)
class Moment:
    """Everything at one time; `slope` is d(what is integrated)/dt [1/s], in scaled form."""

    t: float
    held: list[Held]
    carried: list[Carried]
    rates: list[float]
    slope: Vector


class Plant:
    """All vessels, streams and transfers of a case. deadline: a time.monotonic() value or None."""

    def __init__(
        self, vessels: Sequence[Vessel], flows: Sequence[Flow], exchanges: Sequence[Exchange], deadline: float | None
    ) -> None:
        self.vessels, self.flows, self.exchanges, self.deadline = vessels, flows, exchanges, deadline
        self.evaluations = 0
        self.reached = 0.0
        self._moments: OrderedDict[bytes, Moment] = OrderedDict()
        self._place(len(vessels))
        self.scale = self._scales()
        self.within = 0.0

    def _place(self, count: int) -> None:
        self.walls = [i for i, v in enumerate(self.vessels) if v.wall is not None]
        self.wall_at = {n: 2 * count + i for i, n in enumerate(self.walls)}
        self.core = 2 * count + len(self.walls)
        self.flow_at = self.core
        self.exchange_at = self.flow_at + PER_FLOW * len(self.flows)
        self.ambient_at = self.exchange_at + PER_EXCHANGE * len(self.exchanges)
        self.size = self.ambient_at + len(self.walls)

    def _scales(self) -> Vector:
        scale = np.ones(self.size)
        mass = max(v.mass_scale for v in self.vessels)
        energies = []
        for i, v in enumerate(self.vessels):
            scale[2 * i] = v.mass_scale
            scale[2 * i + 1] = max(1e5 * v.mass_scale, abs(v.energy))
            energies.append(scale[2 * i + 1])
        energy = max(energies)
        for n, at in self.wall_at.items():
            wall = self.vessels[n].wall
            scale[at] = wall.start if wall is not None else 1.0
        for i in range(len(self.flows)):
            at = self.flow_at + PER_FLOW * i
            scale[at : at + PER_FLOW] = mass, energy, energy, 1e-2 * energy
        for i in range(len(self.exchanges)):
            at = self.exchange_at + PER_EXCHANGE * i
            scale[at : at + PER_EXCHANGE] = energy, 1e-2 * energy
        scale[self.ambient_at :] = energy
        return scale

    def start(self) -> Vector:
        """What is integrated at time 0, scaled."""
        y = np.zeros(self.size)
        for i, v in enumerate(self.vessels):
            y[2 * i], y[2 * i + 1] = v.mass, v.energy
            if v.wall is not None:
                y[self.wall_at[i]] = v.wall.start
        return y / self.scale

    def slope(self, t: float, y: Vector) -> Vector:
        """d y/dt [1/s]. Raises OutOfTime, and CaseError where a state does not exist."""
        return self.moment(t, y).slope

    def moment(self, t: float, y: Vector, within: float | None = None) -> Moment:
        """Everything at time t [s] with y (scaled); the last few are remembered."""
        middle = self.within if within is None else within
        key = np.array([t, middle]).tobytes() + y[: self.core].tobytes()
        known = self._moments.get(key)
        if known is not None:
            return known
        if self.deadline is not None and time.monotonic() > self.deadline:
            raise OutOfTime
        self.evaluations += 1
        found = self._evaluate(t, middle, y)
        self._moments[key] = found
        if len(self._moments) > KEPT:
            self._moments.popitem(last=False)
        return found

    def _evaluate(self, t: float, within: float, y: Vector) -> Moment:
        values = (y * self.scale).tolist()
        held = []
        for i, v in enumerate(self.vessels):
            wall = values[self.wall_at[i]] if v.wall is not None else float("nan")
            held.append(Held(values[2 * i], v.state(values[2 * i], values[2 * i + 1]), wall))
        slope = [0.0] * self.size
        carried = [flow.at(t, within, held) for flow in self.flows]
        for i, (flow, now) in enumerate(zip(self.flows, carried, strict=True)):
            self._add_flow(slope, flow, now, self.flow_at + PER_FLOW * i)
        rates = [exchange.at(t, within, held) * self._touched(exchange, held) for exchange in self.exchanges]
        for i, (exchange, rate) in enumerate(zip(self.exchanges, rates, strict=True)):
            at = self.exchange_at + PER_EXCHANGE * i
            slope[at] = rate
            slope[at + 1] = rate / exchange.temperature if exchange.temperature else 0.0
            if exchange.source is not None:
                slope[2 * exchange.source + 1] -= rate
            if exchange.target is not None:
                slope[2 * exchange.target + 1] += rate
        for place, n in enumerate(self.walls):
            self._add_wall(slope, n, held[n], self.ambient_at + place)
        return Moment(t, held, carried, rates, np.array(slope) / self.scale)

    def _touched(self, exchange: Exchange, held: Sequence[Held]) -> float:
        """1, or less where a law would heat a vessel that holds nothing yet."""
        if exchange.UA is None:
            return 1.0
        ends = [n for n in (exchange.source, exchange.target) if n is not None]
        return min(self.vessels[n].touched(held[n].mass) for n in ends)

    def _add_flow(self, slope: list[float], flow: Flow, now: Carried, at: int) -> None:
        m = now.mass_flow
        slope[at : at + PER_FLOW] = m, m * now.enthalpy, m * now.kinetic, m * now.state.values["s"]
        for end, sign in ((flow.source, -1.0), (flow.target, 1.0)):
            if end is not None:
                slope[2 * end] += sign * m
                slope[2 * end + 1] += sign * m * (now.enthalpy + now.kinetic + flow.gz - self.vessels[end].gz)

    def _add_wall(self, slope: list[float], n: int, held: Held, at: int) -> None:
        wall = self.vessels[n].wall
        assert wall is not None
        touched = self.vessels[n].touched(held.mass)
        inward = touched * wall.h_inside * wall.area * (held.wall - held.state.values["T"])
        from_ambient = wall.h_outside * wall.area * (wall.ambient - held.wall)
        slope[2 * n + 1] += inward
        slope[self.wall_at[n]] = (from_ambient - inward) / wall.capacity
        slope[at] = from_ambient

    # -- addresses -----------------------------------------------------------------------------------------------

    def value(self, address: str, moment: Moment, y: Vector) -> float:
        """The value [SI] of an address at a moment; NaN where it has no meaning. Raises KeyError."""
        item, _, name = address.partition(".")
        for n, v in enumerate(self.vessels):
            if item in (v.id, v.boundary):
                return self._of_vessel(n, name.removeprefix("final."), moment)
        for i, flow in enumerate(self.flows):
            if item == flow.id:
                return self._of_flow(i, flow, name, moment, y)
        for i, exchange in enumerate(self.exchanges):
            if item == exchange.id and name in ("rate", "energy"):
                at = self.exchange_at + PER_EXCHANGE * i
                return moment.rates[i] if name == "rate" else float(y[at] * self.scale[at])
        raise KeyError(address)

    def _of_vessel(self, n: int, name: str, moment: Moment) -> float:
        held = moment.held[n]
        if name == "volume":
            return self.vessels[n].volume or held.mass / held.state.values["rho"]
        if name in ("superheat", "subcooling"):
            at = held.state.values
            extra = self.vessels[n].fluid.state(("p", "h"), (at["p"], at["h"]), (name,))
            return extra.values.get(name, float("nan"))
        return held.value(name)

    def _of_flow(self, i: int, flow: Flow, name: str, moment: Moment, y: Vector) -> float:
        now = moment.carried[i]
        if name == "mass":
            at = self.flow_at + PER_FLOW * i
            return float(y[at] * self.scale[at])
        if name == "mass_flow":
            return now.mass_flow
        if name == "molar_flow":
            return now.mass_flow / (flow.fluid.molar_mass or float("nan"))
        if name == "volume_flow":
            return now.mass_flow / now.state.values["rho"]
        if name == "velocity":
            return float((2.0 * now.kinetic) ** 0.5)
        return now.state.values.get(name, float("nan"))
