"""Rules on the numbers themselves: the user's own limits, and how far the property models carry."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Protocol, runtime_checkable

from service.advisories.context import Context, Finding, also, known, told_once
from service.balance.case import Limit
from service.balance.solution import SignalWord
from service.fluids.refusals import literal

NEAR_LIMIT = 0.02
ROUND_OFF = 1e-9
"""Relative: a value that lies on its limit has not crossed it."""
DOUBTFUL = 0.05
"""[K] Less than any plant thermometer tells."""
DENSE = 1e6
"""[Pa] From here on common gases differ from ideal ones by percents in density (common practice)."""
INJURING = frozenset({"pressure", "temperature", "temperature_difference", "pressure_difference", "velocity"})
"""Kinds of quantity beyond whose limits things burst, burn or fly."""
FIXING = {"x", "h", "s", "u", "rho", "v", "superheat", "subcooling"}


def limit_crossed(context: Context) -> Iterator[Finding]:
    """A quantity above its `max` or below its `min`; over time, the farthest that it came."""
    for limit in context.built.case.limits:
        for value, bound, word, when in _crossed(context, limit):
            kind = _kind(context, limit.of)
            why = f" ({literal(limit.why)})" if limit.why else ""
            at = ", {2} after the start" if when is not None else ""
            times = (("time", when),) if when is not None else ()
            text = f"{limit.of} is {{0}}{at}, {word} its limit of {{1}}{why}."
            grade: SignalWord = "WARNING" if kind in INJURING else "CAUTION"
            yield Finding(text, limit.of, ((kind, value), (kind, bound), *times), grade)


def limit_not_checked(context: Context) -> Iterator[Finding]:
    """A limit on a quantity that nothing determines."""
    transient = context.solution.transient
    for limit in context.built.case.limits:
        over_time = transient is not None and limit.of in transient.extremes
        if not over_time and context.value(limit.of) is None:
            text = (
                f"{limit.of} was not found, so that its limit could not be checked. Ask for it to see what is missing."
            )
            yield Finding(text, limit.of)


def _kind(context: Context, address: str) -> str:
    transient = context.solution.transient
    if transient is not None and address in transient.kinds:
        return transient.kinds[address]
    return context.kind(address)


def _crossed(context: Context, limit: Limit) -> Iterator[tuple[float, float, str, float | None]]:
    """(value, bound, above or below, time [s]) for each bound that is crossed."""
    transient = context.solution.transient
    if transient is not None and limit.of in transient.extremes:
        least, at_least, most, at_most = transient.extremes[limit.of]
        lowest: tuple[float, float | None] = (least, at_least)
        highest: tuple[float, float | None] = (most, at_most)
    else:
        value = context.value(limit.of)
        if value is None:
            return
        lowest = highest = (value, None)
    for quantity, (reached, when), word, sign in (
        (limit.maximum, highest, "above", 1.0),
        (limit.minimum, lowest, "below", -1.0),
    ):
        bound = quantity.value if quantity is not None else None
        if bound is not None and sign * (reached - bound) > ROUND_OFF * abs(bound):
            yield reached, bound, word, when


def near_model_limit(context: Context) -> Iterator[Finding]:
    """A temperature or pressure within 2 % of the end of its property model."""
    for name, kind in (("T", "temperature"), ("p", "pressure")):
        near = []
        for state, fluid in context.states:
            most, value = (fluid.limits.T_max if name == "T" else fluid.limits.p_max), known(state, name)
            if value is not None and value > (1 - NEAR_LIMIT) * most:
                near.append((state, most))
        for (state, most), others in told_once(near, lambda pair: pair[0].fluid):
            text = (
                f"{state.stream}.{name} is {{0}}{also(s for s, _ in others)}, near the end of the property model at "
                "{1}, where its uncertainty grows. Check against another source."
            )
            amounts = ((kind, state.properties[name]), (kind, most))
            yield Finding(text, f"{state.stream}.{name}", amounts)


def dense_ideal_gas(context: Context) -> Iterator[Finding]:
    """A gas taken as ideal where common gases are not. Each fluid is told once, at its highest pressure."""
    dense = [
        state
        for state, fluid in context.states
        if fluid.kind in ("ideal_gas", "gas_mixture") and "ideal gas" in fluid.provenance.model
        and (known(state, "p") or 0.0) > DENSE
    ]  # fmt: skip
    dense.sort(key=lambda state: -state.properties["p"])
    for state, others in told_once(dense, lambda s: s.fluid):
        text = (
            f"{state.fluid} is taken as an ideal gas at {{0}} in {state.stream}{also(others)}: density is off by "
            "percents there, and throttling does not cool it. Take the real-gas model, or a pure fluid, to see "
            "whether it matters."
        )
        yield Finding(text, f"{state.stream}.p", (("pressure", state.properties["p"]),))


def doubtful_phase(context: Context) -> Iterator[Finding]:
    """A state told by p and T so close to saturation that its phase hangs on the last digit."""
    for stream in context.built.case.streams:
        told = {name for name, quantity in stream.quantities.items() if quantity.value is not None}
        fluid, state = context.fluid(stream.id), context.state(stream.id)
        if fluid is None or not {"p", "T"} <= told or told & FIXING:
            continue
        p, T = context.value(f"{stream.id}.p"), context.value(f"{stream.id}.T")
        critical = fluid.limits.T_critical
        if p is None or T is None or critical is None or critical + DOUBTFUL < T:
            continue
        boiling = fluid.saturation(p=p)
        if boiling is not None and abs(T - boiling) < DOUBTFUL:
            phase = state.phase if state is not None else "one phase"
            text = (
                f"{stream.id} at {{0}} is within {{1}} of boiling and was taken as {phase}; the other is as likely. "
                "Give x, or saturated, instead of T."
            )
            amounts = (("temperature", T), ("temperature_difference", abs(T - boiling)))
            yield Finding(text, f"{stream.id}.T", amounts)


def stopped_early(context: Context) -> Iterator[Finding]:
    """A calculation over time that could not go on to what was asked."""
    transient = context.solution.transient
    if transient is not None and transient.stopped:
        text = (
            f"The calculation stopped {{0}} after the start, before what was asked: {literal(transient.stopped)} The "
            "numbers hold up to then."
        )
        yield Finding(text, "until", (("time", transient.end_time),))


@runtime_checkable
class _HasDewPoint(Protocol):
    def dew_point(self, p: float) -> float | None:
        """T [K] at which the first component condenses at p [Pa]."""


def gas_below_dew_point(context: Context) -> Iterator[Finding]:
    """A gas mixture whose water would condense, in a model that keeps it a gas."""
    for state, fluid in context.states:
        p, T = known(state, "p"), known(state, "T")
        if p is None or T is None or "ideal gas" not in fluid.provenance.model or not isinstance(fluid, _HasDewPoint):
            continue
        dew = fluid.dew_point(p)
        if dew is not None and dew > T:
            text = (
                f"{state.stream} is at {{0}}, below its water dew point of {{1}}: water condenses and corrodes, and "
                "the heat that this sets free is not in the balance, since the model keeps it a gas."
            )
            yield Finding(text, f"{state.stream}.T", (("temperature", T), ("temperature", dew)))
