"""Hand-written scripts of the ready transients in rate form: property calls and solve_ivp, nothing of the service.

Each repeats the numbers of its case and gives what the case asks, in SI. The tests compare the results; the benchmark
compares the times, at the same integrator and tolerance.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import CoolProp
from CoolProp.CoolProp import PropsSI
from scipy.integrate import solve_ivp
from scipy.optimize import brentq, minimize_scalar

C = 273.15
ATM = 1.002e5  # [Pa] of the works
RTOL, ATOL = 1e-8, 1e-10
Answers = dict[str, float]


def fluid(name: str) -> Any:
    return CoolProp.AbstractState("HEOS", name)


def at(state: Any, pair: int, a: float, b: float) -> Any:
    state.update(pair, a, b)
    return state


def flux(state: Any, h: float, s: float, p1: float, p2: float) -> float:
    """Largest isentropic mass flux between p1 and p2 [kg/(m2 s)]; none against the pressure."""
    if p2 >= p1:
        return 0.0

    def negative(p: float) -> float:
        state.update(CoolProp.PSmass_INPUTS, p, s)
        return -float(state.rhomass() * math.sqrt(max(2 * (h - state.hmass()), 0.0)))

    best = minimize_scalar(negative, bounds=(p2, p1), method="bounded", options={"xatol": 1e-6 * p1})
    return max(-float(best.fun), -negative(p2))


def integrate(
    rate: Callable[[float, Any], list[float]], start: list[float], scale: list[float], end: float, stop: Any = None
) -> tuple[float, list[float]]:
    """(time, state) at the end or at the event `stop`; variables are integrated in units of their scale."""

    def scaled(t: float, y: Any) -> list[float]:
        return [r / s for r, s in zip(rate(t, [v * s for v, s in zip(y, scale, strict=True)]), scale, strict=True)]

    event = None
    if stop is not None:

        def event(t: float, y: Any) -> float:  # type: ignore[misc]
            return float(stop([v * s for v, s in zip(y, scale, strict=True)]))

        event.terminal = True  # type: ignore[attr-defined]
    first = [v / s for v, s in zip(start, scale, strict=True)]
    done = solve_ivp(scaled, (0.0, end), first, method="DOP853", rtol=RTOL, atol=ATOL, events=event)
    return float(done.t[-1]), [float(v * s) for v, s in zip(done.y[:, -1], scale, strict=True)]


def batch_jacket_time() -> Answers:
    return {"until.time": 2400 * 3100 / 2100 * math.log((120 - 18) / (120 - 80))}


def batch_jacket_temperature() -> Answers:
    left = math.exp(-900 * 7200 / (2400 * 3100))
    return {"jacket.source_temperature": (80 - 18 * left) / (1 - left) + C}


def stirred_tank_coil() -> Answers:
    rest = 8 + 1200 / 1700
    return {"liquid.final.T": rest + (75 - rest) * math.exp(-1700 * 1800 / (1500 * 2600)) + C}


def tank_with_make_up() -> Answers:
    make_up, drawn, c = 3.2 / 3.6, 4 / 3.6, 4190.0

    def rate(_: float, y: Any) -> list[float]:
        return [make_up - drawn, (make_up * (12 - y[1]) + 120e3 / c) / y[0]]

    _, (mass, T) = integrate(rate, [6000.0, 85.0], [1e3, 10.0], 3600.0)
    return {"water.final.T": T + C, "water.final.mass": mass}


def isolated_boiler() -> Answers:
    water = at(fluid("Water"), CoolProp.PQ_INPUTS, 14e5, 0.008)
    rho, u = water.rhomass(), water.umass()
    return {"until.time": 6 * rho * (PropsSI("U", "P", 18e5, "D", rho, "Water") - u) / 180e3}


def steam_accumulator() -> Answers:
    water, vapour = fluid("Water"), fluid("Water")
    at(water, CoolProp.PQ_INPUTS, 12e5, 0.001)
    mass, u, flow, V = 20 * water.rhomass(), water.umass(), 1800 / 3600, 20.0

    def pressure(y: Any) -> float:
        return float(at(water, CoolProp.DmassUmass_INPUTS, y[0] / V, y[1] / y[0]).p())

    def rate(_: float, y: Any) -> list[float]:
        h = at(vapour, CoolProp.PQ_INPUTS, pressure(y), 1.0).hmass()
        return [-flow, -flow * h]

    t, _ = integrate(rate, [mass, mass * u], [mass, mass * 1e6], 2e4, lambda y: pressure(y) - 4e5)
    return {"until.time": t}


def receiver_by_compressor() -> Answers:
    air, line, V, A = fluid("Air"), fluid("Air"), 3.0, 11.0
    h = at(line, CoolProp.PT_INPUTS, 10e5, 60 + C).hmass()
    at(air, CoolProp.PT_INPUTS, 1.1e5, 20 + C)
    mass = V * air.rhomass()

    def look(y: Any) -> Any:
        return at(air, CoolProp.DmassUmass_INPUTS, y[0] / V, y[1] / y[0])

    def rate(_: float, y: Any) -> list[float]:
        inside = 12 * A * (y[2] - look(y).T())
        outside = 8 * A * (20 + C - y[2])
        return [0.11, 0.11 * h + inside, (outside - inside) / (620 * 480)]

    start = [mass, mass * air.umass(), 20 + C]
    t, end = integrate(rate, start, [mass, mass * 1e5, 100.0], 1800.0, lambda y: look(y).p() - 9e5)
    return {"until.time": t, "air.final.T": look(end).T()}


def receiver_through_orifice() -> Answers:
    air, line, V = fluid("Air"), fluid("Air"), 1.5
    at(line, CoolProp.PT_INPUTS, 9e5, 25 + C)
    h, s = line.hmass(), line.smass()
    at(air, CoolProp.PT_INPUTS, 1e5, 20 + C)
    mass, area = V * air.rhomass(), math.pi / 4 * 0.012**2 * 0.7

    def look(y: Any) -> Any:
        return at(air, CoolProp.DmassUmass_INPUTS, y[0] / V, y[1] / y[0])

    def rate(_: float, y: Any) -> list[float]:
        flow = area * flux(line, h, s, 9e5, look(y).p())
        return [flow, flow * h]

    start = [mass, mass * air.umass()]
    t, end = integrate(rate, start, [mass, mass * 1e5], 300.0, lambda y: look(y).p() - 8.8e5)
    return {"until.time": t, "air.final.T": look(end).T()}


def _blowdown(
    name: str, V: float, first: tuple[int, float, float], wall: tuple[float, float, float, float], outside: float,
    area: float, behind: float, until: float, vapour: bool,
) -> tuple[float, float, float]:  # fmt: skip
    """(time, T, wall temperature) at the end; wall: mass·cp, area·h inside, area·h outside, ambient temperature."""
    inside, leaving, throat = fluid(name), fluid(name), fluid(name)
    at(inside, *first)
    mass, capacity, hi, ho = V * inside.rhomass(), wall[0], wall[1], wall[2]

    def look(y: Any) -> Any:
        return at(inside, CoolProp.DmassUmass_INPUTS, y[0] / V, y[1] / y[0])

    def rate(_: float, y: Any) -> list[float]:
        p, T = look(y).p(), inside.T()
        source = at(leaving, CoolProp.PQ_INPUTS, p, 1.0) if vapour else inside
        h, s = source.hmass(), source.smass()
        flow = area * flux(throat, h, s, p, behind)
        warms = hi * (y[2] - T)
        return [-flow, -flow * h + warms, (ho * (wall[3] - y[2]) - warms) / capacity]

    start = [mass, mass * inside.umass(), outside]
    t, end = integrate(rate, start, [mass, mass * 1e5, 100.0], 1800.0, lambda y: look(y).p() - until)
    return t, look(end).T(), end[2]


def nitrogen_blowdown() -> Answers:
    first = (CoolProp.PT_INPUTS, 60e5, 15 + C)
    wall = (5200 * 460.0, 18 * 90.0, 18 * 6.0, 15 + C)
    area = math.pi / 4 * 0.018**2 * 0.85
    t, T, metal = _blowdown("Nitrogen", 5.0, first, wall, 15 + C, area, 1.1e5, 2e5, False)
    return {"until.time": t, "gas.final.T": T, "gas.wall.T": metal}


def propane_blowdown() -> Answers:
    first = (CoolProp.QT_INPUTS, 0.02, 18 + C)
    wall = (2600 * 460.0, 15 * 150.0, 15 * 7.0, 18 + C)
    area = math.pi / 4 * 0.025**2 * 0.85
    t, T, metal = _blowdown("Propane", 4.0, first, wall, 18 + C, area, 1.2e5, 2.5e5, True)
    return {"until.time": t, "propane.final.T": T, "propane.wall.T": metal}


def two_bottles() -> Answers:
    """Until the pressures are level within a ten-thousandth; what follows changes nothing."""
    one, other, throat, V = fluid("Nitrogen"), fluid("Nitrogen"), fluid("Nitrogen"), 0.05
    at(one, CoolProp.PT_INPUTS, 150e5, 20 + C), at(other, CoolProp.PT_INPUTS, 5e5, 20 + C)
    m1, m2, area = V * one.rhomass(), V * other.rhomass(), math.pi / 4 * 0.002**2 * 0.7

    def look(y: Any) -> tuple[float, float]:
        at(one, CoolProp.DmassUmass_INPUTS, y[0] / V, y[1] / y[0])
        at(other, CoolProp.DmassUmass_INPUTS, y[2] / V, y[3] / y[2])
        return one.p(), other.p()

    def rate(_: float, y: Any) -> list[float]:
        p1, p2 = look(y)
        h = one.hmass()
        flow = area * flux(throat, h, one.smass(), p1, p2) if p1 > p2 else 0.0
        return [-flow, -flow * h, flow, flow * h]

    def level(y: Any) -> float:
        p1, p2 = look(y)
        return p1 - p2 - 1e-4 * p1

    start = [m1, m1 * one.umass(), m2, m2 * other.umass()]
    _, end = integrate(rate, start, [m1, m1 * 1e5, m1, m1 * 1e5], 600.0, level)
    look(end)
    return {"giver.final.T": one.T(), "taker.final.T": other.T(), "giver.final.p": one.p()}


BY_HAND: dict[str, Callable[[], Answers]] = {
    f.__name__.replace("_", "-"): f
    for f in (
        batch_jacket_time, batch_jacket_temperature, stirred_tank_coil, tank_with_make_up, isolated_boiler,
        steam_accumulator, receiver_by_compressor, receiver_through_orifice, nitrogen_blowdown, propane_blowdown,
        two_bottles,
    )
}  # fmt: skip
"""What the ready cases come to; closed forms where there are any."""


def _stirred(UA: float, source: float, work: float, capacity: float, first: float, end: float, stop: float) -> float:
    """Time at which a stirred tank reaches `stop`, or its temperature at `end` where that is never."""
    t, (T,) = integrate(
        lambda _, y: [(UA * (source - y[0]) + work) / capacity], [first], [10.0], end, lambda y: y[0] - stop
    )
    return t if t < end else T


def _jacket() -> float:
    def off(source: float) -> float:
        return _stirred(900.0, source, 0.0, 2400 * 3100.0, 18.0, 7200.0, 1e9) - 80.0

    return float(brentq(off, 81.0, 250.0, xtol=1e-9))


def _boiler() -> float:
    water = at(fluid("Water"), CoolProp.PQ_INPUTS, 14e5, 0.008)
    rho, u, mass = water.rhomass(), water.umass(), 6 * water.rhomass()

    def pressure(y: Any) -> float:
        return float(at(water, CoolProp.DmassUmass_INPUTS, rho, y[0] / mass).p())

    return integrate(lambda _, y: [180e3], [mass * u], [mass * 1e6], 1e4, lambda y: pressure(y) - 18e5)[0]


SCRIPTS: dict[str, Callable[[], object]] = {
    **BY_HAND,
    "batch-jacket-time": lambda: _stirred(2100.0, 120.0, 0.0, 2400 * 3100.0, 18.0, 2e4, 80.0),
    "batch-jacket-temperature": _jacket,
    "stirred-tank-coil": lambda: _stirred(1700.0, 8.0, 1200.0, 1500 * 2600.0, 75.0, 1800.0, -1e9),
    "isolated-boiler": _boiler,
}
"""Each ready case as an integration, for its time; the carbon dioxide vessel has none, since a bare solve_ivp runs into
the solid and breaks off there."""
