"""Pairs of properties that the property library does not flash, found as a bracketed root over a pair that it does.

Each function returns the pair and the values from which to take the state. Where two states fit, the one at the lower
pressure is taken (vapour before the wet region before liquid), which the messages say.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from scipy.optimize import brentq

from service.errors import CaseError, NotConverged, StateAmbiguous, StateOutOfRange
from service.fluids.refusals import literal, refusal

if TYPE_CHECKING:
    from service.fluids.two_phase_fluid import TwoPhaseFluid

SETTLED = 1e-6  # a residual of this part of the fluid's span of the property is zero

Found = tuple[tuple[str, str], tuple[float, float]]
Function = Callable[[float], float]

LOWEST_PRESSURE = 1e-3  # [Pa] searches over pressure start here: a gas is ideal far above it
_AT_EDGE = 1e-10  # how near to an end of a branch counts as its end, relative to the fluid's span of the property


def root(
    function: Function, low: float, at_low: float, high: float, at_high: float, scale: float = math.inf
) -> float | None:
    """x in [low, high] where the function is zero, None where it has one sign at both ends (whose values are given).

    scale: size of the function; a jump over zero that leaves more than a millionth of it is no root.
    R. P. Brent's method, as scipy has it.
    """
    if at_low == 0.0:
        return low
    if at_high == 0.0:
        return high
    if not (math.isfinite(at_low) and math.isfinite(at_high)) or (at_low > 0.0) == (at_high > 0.0):
        return None
    known = {low: at_low, high: at_high}
    try:
        x = float(brentq(lambda x: known[x] if x in known else function(x), low, high, xtol=1e-300, rtol=1e-14))
    except (RuntimeError, ValueError) as exc:
        raise NotConverged("A property of state did not converge.") from exc
    return x if scale == math.inf or abs(function(x)) <= SETTLED * scale else None


def _value(fluid: TwoPhaseFluid, inputs: tuple[str, str], a: float, b: float, name: str) -> float:
    return fluid.state(inputs, (a, b)).values[name]


def _residual(fluid: TwoPhaseFluid, name: str, y: float, p: float, T: float, side: float) -> float:
    """name(p, T) - y; on the saturation line the value of the given side (x = 0 or 1)."""
    try:
        return _value(fluid, ("p", "T"), p, T, name) - y
    except StateAmbiguous:
        return _value(fluid, ("p", "x"), p, side, name) - y


def _span(fluid: TwoPhaseFluid, name: str) -> float:
    low, high = fluid.spans[name]
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
    sections = [(coldest, hottest, 0.0, 0.0)]
    reach: list[float] = []
    if boiling is not None and dew is not None:
        liquid = _value(fluid, ("p", "x"), p, 0.0, name)
        vapour = _value(fluid, ("p", "x"), p, 1.0, name)
        if min(liquid, vapour) <= y <= max(liquid, vapour) and liquid != vapour:
            return ("p", "x"), (p, _quality(name, y, liquid, vapour))
        sections = [(dew, hottest, 1.0, 1.0), (coldest, boiling, 0.0, 0.0)]
    elif (critical := fluid.limits.T_critical) is not None and coldest < critical < hottest:
        sections = [(critical, hottest, 0.0, 0.0), (coldest, critical, 0.0, 0.0)]
    for low, high, side, _ in sections:
        if not low < high:
            continue

        def function(T: float, side: float = side) -> float:
            return _residual(fluid, name, y, p, T, side)

        ends = (function(low), function(high))
        reach += [end + y for end in ends]
        T = root(function, low, ends[0], high, ends[1], _span(fluid, name))
        if T is not None:
            return ("p", "T"), (p, T)
    raise _none(fluid, "p", p, name, y, reach)


def _quality(name: str, y: float, liquid: float, vapour: float) -> float:
    if name == "rho":
        y, liquid, vapour = 1.0 / y, 1.0 / liquid, 1.0 / vapour
    return min(max((y - liquid) / (vapour - liquid), 0.0), 1.0)


def at_temperature(fluid: TwoPhaseFluid, name: str, T: float, y: float) -> Found:
    """From T and one of x, h, s, u, rho: vapour, then wet, then liquid, by roots over ln p and in between straight."""
    low, high = max(LOWEST_PRESSURE, fluid.limits.p_min), fluid.highest_pressure(T)
    bubble, dew = fluid.boiling_pressure(T, 0.0), fluid.boiling_pressure(T, 1.0)
    reach: list[float] = []
    if bubble is None or dew is None:
        p = _along_isotherm(fluid, name, T, y, low, high, 0.0, reach)
    else:
        p = _along_isotherm(fluid, name, T, y, low, dew, 1.0, reach)
        if p is None:
            wet = _wet_at_temperature(fluid, name, T, y, dew, bubble)
            if wet is not None:
                return ("p", "x"), wet
            p = _along_isotherm(fluid, name, T, y, bubble, high, 0.0, reach)
    if p is None:
        raise _none(fluid, "T", T, name, y, reach)
    return ("p", "T"), (p, T)


def _along_isotherm(
    fluid: TwoPhaseFluid, name: str, T: float, y: float, low: float, high: float, side: float, reach: list[float]
) -> float | None:
    """The lowest pressure [Pa] of a single-phase state at T with this property, None where there is none."""
    if not 0.0 < low < high:
        return None

    def function(log_p: float) -> float:
        return _residual(fluid, name, y, min(max(math.exp(log_p), low), high), T, side)

    steps = 1 if name == "rho" else 24  # rho rises with p throughout
    start, end = math.log(low), math.log(high)
    try:
        before, at_before = start, function(start)
        span = _span(fluid, name)
        flat = abs(at_before) <= _AT_EDGE * span
        reach.append(at_before + y)
        for step in range(1, steps + 1):
            here = end if step == steps else start + (end - start) * step / steps
            at_here = function(here)
            reach.append(at_here + y)
            flat = flat and abs(at_here) <= _AT_EDGE * span
            if flat and step > steps // 2:
                raise StateAmbiguous(
                    f"T and {name} do not fix the pressure: {fluid.name} is nearly an ideal gas there.",
                    hint="Give p in place of one of them.",
                )
            found = root(function, before, at_before, here, at_here, span)
            if found is not None:
                return min(max(math.exp(found), low), high)
            before, at_before = here, at_here
    except StateOutOfRange:
        return None  # solid, or beyond the model, from here upwards
    return None


def _wet_at_temperature(
    fluid: TwoPhaseFluid, name: str, T: float, y: float, dew: float, bubble: float
) -> tuple[float, float] | None:
    """(p, x) of a wet state at T; bubble and dew pressure differ for a pseudo-pure blend only."""
    liquid = _value(fluid, ("p", "x"), bubble, 0.0, name) if name != "x" else 0.0
    vapour = _value(fluid, ("p", "x"), dew, 1.0, name) if name != "x" else 1.0
    if not min(liquid, vapour) <= y <= max(liquid, vapour) or liquid == vapour:
        return None
    if abs(bubble - dew) <= 1e-9 * bubble:
        return bubble, y if name == "x" else _quality(name, y, liquid, vapour)

    def quality(p: float) -> float:
        cold, warm = fluid.boiling(p, 0.0), fluid.boiling(p, 1.0)
        if cold is None or warm is None or cold == warm:
            return 0.5
        return min(max((T - cold) / (warm - cold), 0.0), 1.0)

    def function(p: float) -> float:
        return (quality(p) if name == "x" else _value(fluid, ("p", "x"), p, quality(p), name)) - y

    p = root(function, dew, vapour - y, bubble, liquid - y)
    return None if p is None else (p, quality(p))


def at_density(fluid: TwoPhaseFluid, name: str, rho: float, y: float) -> Found:
    """From rho and one of h, s, u: each rises with T at constant volume, so that one root over T does."""
    low, high = fluid.limits.T_min, fluid.limits.T_max
    reach: list[float] = []

    def function(T: float) -> float:
        return _value(fluid, ("T", "rho"), T, rho, name) - y

    grid = [low + (high - low) * (part / 16.0) ** 2 for part in range(17)]
    grid[-1] = high
    before: tuple[float, float] | None = None
    for T in grid:
        try:
            here = (T, function(T))
        except CaseError:
            continue
        reach.append(here[1] + y)
        if before is not None and (found := root(function, *before, *here, _span(fluid, name))) is not None:
            return ("T", "rho"), (found, rho)
        before = here
    raise _none(fluid, "rho", rho, name, y, reach)


def at_entropy(fluid: TwoPhaseFluid, name: str, s: float, y: float) -> Found:
    """From s and h or u: both rise with p at constant s, (dh/dp)_s = v, so that one root over ln p does."""
    triple = fluid.limits.p_triple or LOWEST_PRESSURE
    low, high = math.log(max(LOWEST_PRESSURE, fluid.limits.p_min)), math.log(fluid.limits.p_max)

    def function(log_p: float) -> float:
        return _value(fluid, ("p", "s"), _pressure(fluid, log_p), s, name) - y

    reach: list[float] = []
    steps, span = 32, _span(fluid, name)
    grid = sorted({*(low + (high - low) * part / steps for part in range(steps + 1)), math.log(triple * 1.0000001)})
    before: tuple[float, float] | None = None
    for log_p in grid:
        try:
            here = (log_p, function(log_p))
        except CaseError:
            before = None  # cold water has a gap here: it freezes, and melts again at a higher pressure
            continue
        reach.append(here[1] + y)
        if here[1] >= 0.0 and before is None:
            before = _first_below(function, log_p - (high - low) / steps, *here)
        if before is not None and (found := root(function, *before, *here, span)) is not None:
            return ("p", "s"), (_pressure(fluid, found), s)
        before = here
    raise _none(fluid, "s", s, name, y, reach)


def _first_below(function: Function, low: float, here: float, at_here: float) -> tuple[float, float] | None:
    """A point left of `here` where the function exists and is not positive; states end somewhere right of `low`."""
    if at_here == 0.0:
        return here, at_here
    for _ in range(40):
        middle = 0.5 * (low + here)
        try:
            value = function(middle)
        except CaseError:
            low = middle
            continue
        if value <= 0.0:
            return middle, value
        here = middle
    return None


def from_h_u(fluid: TwoPhaseFluid, h: float, u: float) -> Found:
    """From h and u, h - u = p v: a root over ln p of p v(p, h) - (h - u)."""
    low, high = math.log(max(LOWEST_PRESSURE, fluid.limits.p_min)), math.log(fluid.limits.p_max)

    def function(log_p: float) -> float:
        return _value(fluid, ("p", "h"), _pressure(fluid, log_p), h, "u") - u

    span = _span(fluid, "u")
    before: tuple[float, float] | None = None
    reach: list[float] = []
    for part in range(49):
        log_p = low + (high - low) * part / 48.0
        try:
            here = (log_p, function(log_p))
        except CaseError:
            before = None
            continue
        reach.append(here[1] + u)
        if before is not None:
            if abs(before[1]) < _AT_EDGE * span and abs(here[1]) < _AT_EDGE * span:
                raise StateAmbiguous(
                    f"h and u do not fix the pressure: {fluid.name} is nearly an ideal gas there.",
                    hint="Give p or T in place of one of them.",
                )
            if (found := root(function, *before, *here, span)) is not None:
                return ("p", "h"), (_pressure(fluid, found), h)
        before = here
    raise _none(fluid, "h", h, "u", u, reach)


def at_quality(fluid: TwoPhaseFluid, name: str, x: float, y: float) -> Found:
    """From x and one of h, s, u, rho: every root along the saturation line; two of them are an error that says so."""
    limits = fluid.limits
    if limits.p_triple is None or limits.p_critical is None:
        raise StateAmbiguous(f"{fluid.name} has no saturation line.")
    low, high = math.log(limits.p_triple * (1 + 1e-9)), math.log(limits.p_critical * (1 - 1e-6))

    def function(log_p: float) -> float:
        return _value(fluid, ("p", "x"), math.exp(log_p), x, name) - y

    found: list[float] = []
    reach: list[float] = []
    before: tuple[float, float] | None = None
    for part in range(65):
        log_p = low + (high - low) * part / 64.0
        try:
            here = (log_p, function(log_p))
        except CaseError:
            before = None
            continue
        reach.append(here[1] + y)
        if before is not None and before[1] != 0.0 and (p := root(function, *before, *here)) is not None:
            found.append(math.exp(p))
        before = here
    if len(found) == 1:
        return ("p", "x"), (found[0], x)
    if found:
        raise refusal(
            StateAmbiguous, f"x and {name} fit two states of {literal(fluid.name)}, at {{0}} and at {{1}}.",
            ("p", found[0]), ("p", found[-1]), hint="Give p or T in place of one of them.", of=name,
        )  # fmt: skip
    raise _none(fluid, "x", x, name, y, reach)
