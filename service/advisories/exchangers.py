"""Rules on the temperatures of exchangers: what an arrangement makes hard, and what physics forbids."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from service.advisories.context import Context, Finding, known
from service.balance.case import Relation
from service.balance.relations import correction_factor
from service.balance.solution import StreamState
from service.errors import CaseError
from service.fluids.protocol import Fluid

PERCEPTIBLE = 1e-9
STEEP = 0.8
"""F below which a small change of temperature ruins the exchanger (common practice)."""
TOUCHING = 0.01
"""[K] by which the hot side has to be colder than the cold one before it is told: look-ups have their own noise."""

ROLES = ("hot_in", "hot_out", "cold_in", "cold_out")


def _exchangers(context: Context) -> Iterator[tuple[Relation, dict[str, StreamState], tuple[float, ...]]]:
    """Rated exchangers with the states by role, and their temperatures in the order of ROLES."""
    for relation in context.built.case.relations:
        if relation.kind not in ("lmtd_UA", "effectiveness"):
            continue
        states = {role: s for role in ROLES if (s := context.state(relation.streams[role])) is not None}
        T = [known(state, "T") for state in states.values()]
        if len(T) == len(ROLES) and None not in T:
            yield relation, states, tuple(t for t in T if t is not None)


def _factor(relation: Relation, T: tuple[float, ...]) -> float:
    """F of one shell pass [-]; 1 for other arrangements, 0 where one shell pass cannot reach these temperatures."""
    hi, ho, ci, co = T
    if relation.arrangement != "shell_and_tube" or not (hi > ho and co > ci and hi > ci):
        return 1.0
    R, P = np.float64((hi - ho) / (co - ci)), np.float64((co - ci) / (hi - ci))  # which divide by zero quietly
    factor = float(correction_factor(R, P))
    return factor if math.isfinite(factor) and factor > 0.0 else 0.0


def _impossible(relation: Relation, T: tuple[float, ...]) -> str:
    """What no exchanger of this arrangement can do, "" where the temperatures are possible."""
    hi, ho, ci, co = T
    if co > hi * (1 + PERCEPTIBLE) or ho < ci * (1 - PERCEPTIBLE):
        return "a stream passes the inlet temperature of the other"
    if relation.arrangement == "parallel_flow" and co > ho * (1 + PERCEPTIBLE):
        return "the cold stream passes the hot one, in parallel flow,"
    if _factor(relation, T) == 0.0:
        return "the temperatures cross by more than one shell pass allows"
    return ""


def temperature_impossible(context: Context) -> Iterator[Finding]:
    """End temperatures that no exchanger of the arrangement can have."""
    for relation, _, T in _exchangers(context):
        what = _impossible(relation, T)
        if what:
            text = (
                f"In {relation.id} {what} (hot {{0}} to {{1}}, cold {{2}} to {{3}}), which no exchanger of this "
                "arrangement can do. Check the readings, the arrangement, and which streams belong together."
            )
            yield Finding(text, relation.id, tuple(("temperature", t) for t in T))


def temperature_cross(context: Context) -> Iterator[Finding]:
    """A cold outlet hotter than the hot outlet, where that is possible at all."""
    for relation, _, T in _exchangers(context):
        _, ho, _, co = T
        if co > ho * (1 + PERCEPTIBLE) and not _impossible(relation, T):
            text = (
                f"In {relation.id} the cold stream leaves hotter ({{0}}) than the hot stream ({{1}}): only true "
                "counterflow does that well; with several tube passes use shells in series."
            )
            yield Finding(text, relation.id, (("temperature", co), ("temperature", ho)))


def low_correction_factor(context: Context) -> Iterator[Finding]:
    """A shell-and-tube exchanger whose F lies where a degree more or less changes everything."""
    for relation, _, T in _exchangers(context):
        factor = _factor(relation, T)
        if 0.0 < factor < STEEP and not _impossible(relation, T):
            text = (
                f"The correction factor of {relation.id} is {{0}}: with one shell pass the duty then hangs on "
                "fractions of a degree. Use several shells, or counterflow."
            )
            yield Finding(text, relation.id, (("dimensionless", factor),))


def internal_cross(context: Context) -> Iterator[Finding]:
    """A hot side colder than the cold side inside of an exchanger whose ends look right: where a phase change begins.

    Both sides are followed in enthalpy at their outlet pressures; the temperatures are compared where either begins or
    ends to boil or to condense.
    """
    for relation, states, T in _exchangers(context):
        if relation.arrangement == "shell_and_tube" or _impossible(relation, T):
            continue
        fluids = {side: context.fluid(states[f"{side}_in"].stream) for side in ("hot", "cold")}
        hot, cold = fluids["hot"], fluids["cold"]
        if hot is None or cold is None or {hot.kind, cold.kind} & {"humid_air"}:
            continue
        try:
            worst = _closest(states, hot, cold, relation.arrangement == "parallel_flow")
        except CaseError:
            continue
        if worst is not None and worst[0] < worst[1] - TOUCHING:
            text = (
                f"Inside of {relation.id}, where a phase change begins, the hot side would be at {{0}} and the cold "
                "side at {1}: heat cannot pass there, although the ends look right. Less duty, another flow or "
                "another pressure is needed."
            )
            yield Finding(text, relation.id, tuple(("temperature", t) for t in worst))


def _closest(states: dict[str, StreamState], hot: Fluid, cold: Fluid, parallel: bool) -> tuple[float, float] | None:
    """The temperatures [K] of both sides at the kink where the cold side comes closest to the hot one."""
    hot_ends = states["hot_in"].properties["h"], states["hot_out"].properties["h"]
    ends = states["cold_in"].properties["h"], states["cold_out"].properties["h"]
    cold_ends = ends if parallel else (ends[1], ends[0])
    p_hot, p_cold = states["hot_out"].properties["p"], states["cold_out"].properties["p"]
    places = [*_kinks(hot, p_hot, hot_ends), *_kinks(cold, p_cold, cold_ends)]
    pairs = []
    for place in places:
        T = [
            fluid.state(("p", "h"), (p, first + place * (last - first))).values["T"]
            for fluid, p, (first, last) in ((hot, p_hot, hot_ends), (cold, p_cold, cold_ends))
        ]
        pairs.append((T[0], T[1]))
    return min(pairs, key=lambda pair: pair[0] - pair[1], default=None)


def _kinks(fluid: Fluid, p: float, ends: tuple[float, float]) -> Iterator[float]:
    """Places from 0 to 1 along the duty where the fluid is saturated liquid or vapour, ends excluded."""
    first, last = ends
    if first == last or fluid.limits.p_critical is None or p >= fluid.limits.p_critical or fluid.kind != "pure":
        return
    for x in (0.0, 1.0):
        place = (fluid.state(("p", "x"), (p, x)).values["h"] - first) / (last - first)
        if 0.0 < place < 1.0:
            yield place
