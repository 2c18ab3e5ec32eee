"""Pairs of properties that the property library does not flash, found as a bracketed root over a pair that it does.

Each function returns the pair and the values from which to take the state. Where two states fit, the one at the lower
pressure is taken (vapour before the wet region before liquid), which the messages say.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import pairwise
from typing import TYPE_CHECKING, NamedTuple

from service.errors import CaseError, StateAmbiguous, StateOutOfRange
from service.fluids.bracketing import Function, Point, first_root, root, with_turning_points
from service.fluids.refusals import literal, refusal

if TYPE_CHECKING:
    from service.fluids.two_phase_fluid import TwoPhaseFluid


TOO_NEAR = 1e-7  # relative distance in T from boiling within which no flash on (p, T) is asked for

Found = tuple[tuple[str, str], tuple[float, float]]

LOWEST_PRESSURE = 1e-3  # [Pa] searches over pressure start here: a gas is ideal far above it
_AT_EDGE = 1e-10  # how near to an end of a branch counts as its end, relative to the fluid's span of the property


class Edge(NamedTuple):
    """Where a single phase meets the saturation line: p [Pa], T [K], x of the side, and the property there."""

    p: float
    T: float
    x: float
    y: float


def _value(fluid: TwoPhaseFluid, inputs: tuple[str, str], a: float, b: float, name: str) -> float:
    return fluid.state(inputs, (a, b)).values[name]


def _residual(fluid: TwoPhaseFluid, name: str, y: float, p: float, T: float, edge: Edge | None) -> float:
    """name(p, T) - y; on the saturation line the value on the given side of it."""
    if edge is not None and (abs(p - edge.p) <= 20.0 * TOO_NEAR * p and abs(T - edge.T) <= TOO_NEAR * T):
        return edge.y - y
    return _value(fluid, ("p", "T"), p, T, name) - y


def _span(fluid: TwoPhaseFluid, name: str) -> float:
    low, high = fluid.bounds(name)
    return high - low


def _pressure(fluid: TwoPhaseFluid, log_p: float) -> float:
    """exp(log_p), which rounding must not carry over the limits."""
    return min(max(math.exp(log_p), fluid.limits.p_min), fluid.limits.p_max)


def _none(fluid: TwoPhaseFluid, at: str, value: float, name: str, y: float, reach: Sequence[float]) -> StateOutOfRange:
    """The error for a property that no state at the given p, T, rho or x has; reach: some values that it does have."""
    finite = [v for v in reach if math.isfinite(v)]
    text = f"{literal(fluid.name)} at {at} = {{0}} has no state with {name} = {{1}}"
    amounts = [(at, value), (name, y)]
    if finite:
        text += f": {name} goes from {{2}} to {{3}} there"
        amounts += [(name, min(finite)), (name, max(finite))]
    return refusal(StateOutOfRange, f"{text}.", *amounts, hint=f"Check {name} and {at}, and their units.", of=name)


def at_pressure(fluid: TwoPhaseFluid, name: str, p: float, y: float) -> Found:
    """From p and one of h, s, u, rho: the wet region straight, single phases by a root over T."""
    coldest, hottest = fluid.coldest(p), fluid.hottest(p)
    boiling, dew = fluid.boiling(p, 0.0), fluid.boiling(p, 1.0)
    span, reach = _span(fluid, name), list[float]()
    sections: list[tuple[float, float, Edge | None]] = [(coldest, hottest, None)]
    if boiling is not None and dew is not None:
        liquid = Edge(p, boiling, 0.0, _value(fluid, ("p", "x"), p, 0.0, name))
        vapour = Edge(p, dew, 1.0, _value(fluid, ("p", "x"), p, 1.0, name))
        x = _quality_between(name, y, liquid.y, vapour.y, span)
        if x is not None:
            return ("p", "x"), (p, x)
        sections = [(dew, hottest, vapour), (coldest, boiling, liquid)]
    elif (critical := fluid.limits.T_critical) is not None and coldest < critical < hottest:
        sections = [(critical, hottest, None), (coldest, critical, None)]
    for low, high, edge in sections:

        def function(T: float, edge: Edge | None = edge) -> float:
            return _residual(fluid, name, y, p, T, edge)

        T = first_root(function, (low, high), span, reach) if low < high else None
        if T is not None:
            near = edge is not None and abs(T - edge.T) <= TOO_NEAR * T
            return (("p", "x"), (p, edge.x)) if near and edge is not None else (("p", "T"), (p, T))
    raise _none(fluid, "p", p, name, y, [v + y for v in reach])


def _quality_between(name: str, y: float, liquid: float, vapour: float, span: float) -> float | None:
    """x of a wet state, 0 or 1 for one that is on the line but for rounding, None for one that is not wet."""
    near = _AT_EDGE * span
    if not min(liquid, vapour) - near <= y <= max(liquid, vapour) + near or liquid == vapour:
        return None
    return _quality(name, y, liquid, vapour)


def _quality(name: str, y: float, liquid: float, vapour: float) -> float:
    if name == "rho":
        y, liquid, vapour = 1.0 / y, 1.0 / liquid, 1.0 / vapour
    return min(max((y - liquid) / (vapour - liquid), 0.0), 1.0)


def at_temperature(fluid: TwoPhaseFluid, name: str, T: float, y: float) -> Found:
    """From T and one of x, h, s, u, rho: vapour, then wet, then liquid, by roots over ln p and in between straight."""
    low, high = max(LOWEST_PRESSURE, fluid.limits.p_min), fluid.highest_pressure(T)
    bubble, dew = fluid.boiling_pressure(T, 0.0), fluid.boiling_pressure(T, 1.0)
    reach: list[float] = []
    p: float | None
    if bubble is None or dew is None:
        if name == "x":
            raise fluid.no_saturation("T", T, "x")
        p = _along_isotherm(fluid, name, T, y, (low, high), None, reach)
    else:
        vapour = Edge(dew, T, 1.0, _value(fluid, ("p", "x"), dew, 1.0, name))
        liquid = Edge(bubble, T, 0.0, _value(fluid, ("p", "x"), bubble, 0.0, name))
        for edge in (vapour, liquid):
            if abs(y - edge.y) <= _AT_EDGE * _span(fluid, name):
                return ("p", "x"), (edge.p, edge.x)
        p = None if name == "x" else _along_isotherm(fluid, name, T, y, (low, dew), vapour, reach)
        if p is None:
            wet = _wet_at_temperature(fluid, name, T, y, vapour, liquid)
            if wet is not None:
                return ("p", "x"), wet
            p = _along_isotherm(fluid, name, T, y, (max(bubble, low), high), liquid, reach)
        for edge in (vapour, liquid):
            if p is not None and abs(p - edge.p) <= 20.0 * TOO_NEAR * edge.p:
                return ("p", "x"), (edge.p, edge.x)
    if p is None:
        raise _none(fluid, "T", T, name, y, [v + y for v in reach])
    return ("p", "T"), (p, T)


def _along_isotherm(
    fluid: TwoPhaseFluid, name: str, T: float, y: float, section: Point, edge: Edge | None, reach: list[float]
) -> float | None:
    """The lowest pressure [Pa] of a single-phase state at T with this property, None where there is none."""
    low, high = section
    if not 0.0 < low < high:
        return None

    def function(log_p: float) -> float:
        return _residual(fluid, name, y, min(max(math.exp(log_p), low), high), T, edge)

    steps = 1 if name == "rho" else 24  # rho rises with p throughout
    start, end, span = math.log(low), math.log(high), _span(fluid, name)
    if name in ("h", "u") and abs(_or_nan(function, start)) <= _AT_EDGE * span:
        raise StateAmbiguous(
            f"T and {name} do not fix the pressure: {fluid.name} is nearly an ideal gas there.",
            hint="Give p in place of one of them.",
        )
    grid = [start + (end - start) * step / steps for step in range(steps)]
    found = first_root(function, [*grid, end], span, reach)
    return None if found is None else min(max(math.exp(found), low), high)


def _or_nan(function: Function, x: float) -> float:
    try:
        return function(x)
    except CaseError:
        return math.nan


def _wet_at_temperature(
    fluid: TwoPhaseFluid, name: str, T: float, y: float, vapour: Edge, liquid: Edge
) -> tuple[float, float] | None:
    """(p, x) of a wet state at T; bubble and dew pressure differ for a pseudo-pure blend only."""
    x = _quality_between(name, y, liquid.y, vapour.y, _span(fluid, name))
    if x is None:
        return None
    if abs(liquid.p - vapour.p) <= 1e-9 * liquid.p:
        return liquid.p, x

    def quality(p: float) -> float:
        cold, warm = fluid.boiling(p, 0.0), fluid.boiling(p, 1.0)
        if cold is None or warm is None or cold == warm:
            return 0.5
        return min(max((T - cold) / (warm - cold), 0.0), 1.0)

    def function(p: float) -> float:
        return (quality(p) if name == "x" else _value(fluid, ("p", "x"), p, quality(p), name)) - y

    p = root(function, vapour.p, vapour.y - y, liquid.p, liquid.y - y, _span(fluid, name))
    return None if p is None else (p, quality(p))


def at_density(fluid: TwoPhaseFluid, name: str, rho: float, y: float) -> Found:
    """From rho and one of h, s, u: each rises with T at constant volume, so that one root over T does."""
    low, high = fluid.limits.T_min, fluid.limits.T_max
    reach: list[float] = []

    def function(T: float) -> float:
        return _value(fluid, ("T", "rho"), T, rho, name) - y

    grid = [low + (high - low) * (part / 16.0) ** 2 for part in range(16)]
    T = first_root(function, [*grid, high], _span(fluid, name), reach)
    if T is None:
        raise _none(fluid, "rho", rho, name, y, [v + y for v in reach])
    return ("T", "rho"), (T, rho)


def at_entropy(fluid: TwoPhaseFluid, name: str, s: float, y: float) -> Found:
    """From s and h or u: both rise with p at constant s, (dh/dp)_s = v, so that one root over ln p does."""
    triple = fluid.limits.p_triple or LOWEST_PRESSURE
    low, high = math.log(max(LOWEST_PRESSURE, fluid.limits.p_min)), math.log(fluid.limits.p_max)
    reach: list[float] = []

    def function(log_p: float) -> float:
        return _value(fluid, ("p", "s"), _pressure(fluid, log_p), s, name) - y

    steps = 32
    grid = {*(low + (high - low) * part / steps for part in range(steps + 1)), math.log(triple * 1.0000001)}
    log_p = first_root(function, sorted(grid), _span(fluid, name), reach)
    if log_p is None:
        raise _none(fluid, "s", s, name, y, [v + y for v in reach])
    return ("p", "s"), (_pressure(fluid, log_p), s)


def from_h_u(fluid: TwoPhaseFluid, h: float, u: float) -> Found:
    """From h and u, h - u = p v: a root over ln p of u(p, h) - u, which bends where h meets the saturation line."""
    low, high = math.log(max(LOWEST_PRESSURE, fluid.limits.p_min)), math.log(fluid.limits.p_max)
    span = _span(fluid, "u")
    reach: list[float] = []

    def function(log_p: float) -> float:
        return _value(fluid, ("p", "h"), _pressure(fluid, log_p), h, "u") - u

    bends = [math.log(p) for x in (0.0, 1.0) for p in _on_the_line(fluid, "h", x, h, [])]
    for bend in bends:
        if abs(_or_nan(function, bend)) <= 1e-12 * span:
            return ("p", "h"), (_pressure(fluid, bend), h)
    grid = sorted([*bends, *(low + (high - low) * part / 48.0 for part in range(49))])
    flat = sum(abs(_or_nan(function, log_p)) <= _AT_EDGE * span for log_p in grid)
    if flat > 2:
        raise StateAmbiguous(
            f"h and u do not fix the pressure: {fluid.name} is nearly an ideal gas there.",
            hint="Give p or T in place of one of them.",
        )
    log_p = first_root(function, grid, span, reach)
    if log_p is None:
        raise _none(fluid, "h", h, "u", u, [v + u for v in reach])
    return ("p", "h"), (_pressure(fluid, log_p), h)


def at_quality(fluid: TwoPhaseFluid, name: str, x: float, y: float) -> Found:
    """From x and one of h, s, u, rho: every root along the saturation line; two of them are an error that says so."""
    reach: list[float] = []
    found = _on_the_line(fluid, name, x, y, reach)
    if len(found) == 1:
        return ("p", "x"), (found[0], x)
    if found:
        raise refusal(
            StateAmbiguous, f"x and {name} fit two states of {literal(fluid.name)}, at {{0}} and at {{1}}.",
            ("p", found[0]), ("p", found[-1]), hint="Give p or T in place of one of them.", of=name,
        )  # fmt: skip
    raise _none(fluid, "x", x, name, y, reach)


def _on_the_line(fluid: TwoPhaseFluid, name: str, x: float, y: float, reach: list[float]) -> list[float]:
    """Every pressure [Pa] at which the saturation line at this x has this property."""
    limits = fluid.limits
    if limits.p_triple is None or limits.p_critical is None:
        raise StateAmbiguous(f"{fluid.name} has no saturation line.")
    low = math.log(max(limits.p_triple, limits.p_min) * (1 + 1e-12))
    high = math.log(limits.p_critical * (1 - 1e-6))

    def function(log_p: float) -> float:
        return _value(fluid, ("p", "x"), math.exp(log_p), x, name) - y

    points: list[Point] = []
    for part in range(65):
        log_p = low + (high - low) * part / 64.0
        try:
            points.append((log_p, function(log_p)))
        except CaseError:
            continue
    reach += [value + y for _, value in points]
    points = with_turning_points(function, points)
    found = []
    for before, here in pairwise(points):
        if before[1] != 0.0 or before is points[0]:
            p = root(function, *before, *here)
            if p is not None:
                found.append(math.exp(p))
    return found
