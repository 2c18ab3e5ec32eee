"""The relations of a case as equations: ties between addresses, machine efficiencies, exchanger ratings.

Sources
    isentropic efficiency   enthalpy ratio at the end pressure, as in ISO 5389:2005 (value from memory)
    polytropic efficiency   Mallen and Saville, Polytropic processes in the performance prediction of centrifugal
                            compressors, IMechE C183/77, 1977 (value from memory): exact for an ideal gas of constant cp
    LMTD, F                 Bowman, Mueller and Nagle, Mean temperature difference in design, Trans. ASME 62, 1940
    effectiveness           duty over the largest duty that either stream allows (Kays and London), in enthalpies
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from service.balance.builder import Builder
from service.balance.case import Relation
from service.balance.properties import RELATION, STATE, Trait
from service.balance.restriction import add_restriction
from service.engine.model import Function, OtherForm, Polynomial, Term, Value, Values
from service.errors import NoSolution, SchemaViolation


def add_relation(builder: Builder, relation: Relation) -> None:
    """Append the equation of a relation, and whatever auxiliary states it needs, to the builder's model."""
    _WRITERS[relation.kind](builder, relation)


# -- ties between addresses ------------------------------------------------------------------------------------


def _tied_value(builder: Builder, relation: Relation, kind: str) -> int:
    return builder.variable(relation.id, "value", Trait(kind, 1.0))


def _equal(builder: Builder, relation: Relation) -> None:
    first, *others = (builder.address(a) for a in relation.addresses)
    for address, other in zip(relation.addresses[1:], others, strict=True):
        name = f"equality {relation.id} of {relation.addresses[0]} and {address}"
        builder.model.equations.append(Polynomial.of(name, [Term(1.0, ((first, 1),)), Term(-1.0, ((other, 1),))]))


def _difference(builder: Builder, relation: Relation) -> None:
    a, b = (builder.address(address) for address in relation.addresses)
    value = _tied_value(builder, relation, relation.quantities["value"].kind)
    terms = [Term(1.0, ((a, 1),)), Term(-1.0, ((b, 1),)), Term(-1.0, ((value, 1),))]
    builder.model.equations.append(Polynomial.of(f"difference {relation.id}", terms))


def _ratio(builder: Builder, relation: Relation) -> None:
    a, b = (builder.address(address) for address in relation.addresses)
    value = _tied_value(builder, relation, "dimensionless")
    terms = [Term(1.0, ((a, 1),)), Term(-1.0, ((value, 1), (b, 1)))]
    builder.model.equations.append(Polynomial.of(f"ratio {relation.id}", terms))


def _sum(builder: Builder, relation: Relation) -> None:
    value = _tied_value(builder, relation, relation.quantities["value"].kind)
    terms = [Term(1.0, ((builder.address(a), 1),)) for a in relation.addresses]
    builder.model.equations.append(Polynomial.of(f"sum {relation.id}", [*terms, Term(-1.0, ((value, 1),))]))


# -- machines --------------------------------------------------------------------------------------------------


def _ends(builder: Builder, relation: Relation) -> tuple[dict[str, int], dict[str, int]]:
    """Variables p, T, h, s of the two streams of a machine."""
    start, end = (builder.streams[relation.streams[role]] for role in ("from", "to"))
    if builder.fluid(start) is not builder.fluid(end):
        raise SchemaViolation(
            f"{relation.id} joins two streams of different fluids.", address=f"{relation.id}.value",
            hint="`from` and `to` must be the inlet and the outlet of one machine.",
        )  # fmt: skip
    first = {name: builder.state(start, name) for name in ("p", "T", "h", "s")}
    last = {name: builder.state(end, name) for name in ("p", "T", "h", "s")}
    return first, last


def _pick(condition: Value, yes: Value, no: Value) -> Value:
    return np.where(condition, yes, no) if isinstance(condition, np.ndarray) else (yes if condition else no)


def _isentropic(builder: Builder, relation: Relation) -> None:
    first, last = _ends(builder, relation)
    eta = builder.variable(relation.id, "value", RELATION[relation.kind])
    start = builder.streams[relation.streams["from"]]
    fluid = builder.fluid(start)
    hs = builder.property_variable(relation.id, "h", fluid)
    members = {"p": last["p"], "s": first["s"], "h": hs}
    if fluid.kind == "humid_air":
        members["humidity_ratio"] = builder.state(start, "humidity_ratio")
    builder.auxiliary_state(f"ideal end state of {relation.id}", relation.id, fluid, members)
    order = (eta, first["h"], last["h"], hs, first["p"], last["p"])

    def compresses(v: Values) -> Value:
        return v[order[5]] > v[order[4]]

    def residual(v: Values) -> Value:
        actual, ideal = v[order[2]] - v[order[1]], v[order[3]] - v[order[1]]
        # signed so that it does not jump where the pressures meet and the machine changes its direction
        return _pick(compresses(v), v[order[0]] * actual - ideal, actual - v[order[0]] * ideal)

    def efficiency(v: Values) -> Value:
        actual, ideal = v[order[2]] - v[order[1]], v[order[3]] - v[order[1]]
        up = compresses(v)
        return _pick(up, ideal, actual) / _pick(up, actual, ideal)

    def end_enthalpy(v: Values) -> Value:
        ideal = v[order[3]] - v[order[1]]
        return v[order[1]] + ideal * _pick(compresses(v), 1 / v[order[0]], v[order[0]])

    def ideal_enthalpy(v: Values) -> Value:
        actual = v[order[2]] - v[order[1]]
        return v[order[1]] + actual * _pick(compresses(v), v[order[0]], 1 / v[order[0]])

    forms = {
        eta: (efficiency, "({3} − {1})/({2} − {1})"),
        last["h"]: (end_enthalpy, "{1} + ({3} − {1})/{0}"),
        hs: (ideal_enthalpy, "{1} + {0}·({2} − {1})"),
    }
    expansion = OtherForm(
        lambda v: not compresses(v),
        "{0}·({1} − {3}) = {1} − {2}",
        {
            eta: "({1} − {2})/({1} − {3})",
            last["h"]: "{1} − {0}·({1} − {3})",
            hs: "{1} − ({1} − {2})/{0}",
        },
    )
    name, magnitude = f"isentropic efficiency {relation.id}", _enthalpy_rise(order)
    template = "{0}·({2} − {1}) = {3} − {1}"
    builder.model.equations.append(Function(name, order, residual, magnitude, template, forms, expansion))


def _enthalpy_rise(order: tuple[int, ...]) -> Callable[[Values], Value]:
    """Magnitude of an efficiency equation: the ideal or actual enthalpy change, whichever is larger."""

    def magnitude(v: Values) -> Value:
        return np.maximum(abs(v[order[2]] - v[order[1]]), abs(v[order[3]] - v[order[1]]))

    return magnitude


def _log_mean(a: Value, b: Value) -> Value:
    """(a − b)/ln(a/b), continued through a = b; for floats and columns of one sign."""
    ratio = a / b
    near = abs(ratio - 1.0) < 1e-6
    safe = _pick(near, 2.0, ratio)
    return _pick(near, 0.5 * (a + b), b * (safe - 1.0) / np.log(safe))


def _polytropic(builder: Builder, relation: Relation) -> None:
    first, last = _ends(builder, relation)
    eta = builder.variable(relation.id, "value", RELATION[relation.kind])
    order = (eta, first["h"], last["h"], first["s"], last["s"], first["T"], last["T"], first["p"], last["p"])

    def work_and_friction(v: Values) -> tuple[Value, Value]:
        rise = v[order[2]] - v[order[1]]
        return rise, (v[order[4]] - v[order[3]]) * _log_mean(v[order[6]], v[order[5]])

    def efficiency(v: Values) -> Value:
        rise, friction = work_and_friction(v)
        up = v[order[8]] > v[order[7]]
        return _pick(up, rise - friction, rise) / _pick(up, rise, rise - friction)

    def residual(v: Values) -> Value:
        rise, friction = work_and_friction(v)
        ideal = rise - friction
        return _pick(v[order[8]] > v[order[7]], v[eta] * rise - ideal, rise - v[eta] * ideal)

    def magnitude(v: Values) -> Value:
        return abs(v[order[2]] - v[order[1]])

    mean = "({6} − {5})/ln({6}/{5})"
    ideal = f"({{2}} − {{1}} − ({{4}} − {{3}})·{mean})"
    forms = {eta: (efficiency, f"{ideal}/({{2}} − {{1}})")}
    expansion = OtherForm(
        lambda v: bool(v[order[8]] <= v[order[7]]),
        f"{{0}}·{ideal} = {{2}} − {{1}}",
        {eta: f"({{2}} − {{1}})/{ideal}"},
    )
    name, template = f"polytropic efficiency {relation.id}", f"{{0}}·({{2}} − {{1}}) = {ideal}"
    builder.model.equations.append(Function(name, order, residual, magnitude, template, forms, expansion))


# -- exchangers ------------------------------------------------------------------------------------------------


def correction_factor(R: Value, P: Value) -> Value:
    """F of the logarithmic mean temperature difference, one shell pass and an even number of tube passes [-].

    R: temperature range of the hot over that of the cold stream, P: range of the cold stream over the difference of the
    inlets. NaN where this arrangement cannot do the duty. Source: Bowman, Mueller and Nagle 1940.
    """
    with np.errstate(all="ignore"):
        root = np.sqrt(R * R + 1.0)
        equal = abs(R - 1.0) < 1e-9
        safe = _pick(equal, 2.0, R)
        top = _pick(equal, P / (1.0 - P), np.log((1.0 - P) / (1.0 - P * safe)) / (safe - 1.0))
        return root * top / np.log((2.0 - P * (R + 1.0 - root)) / (2.0 - P * (R + 1.0 + root)))


def _exchanger(builder: Builder, relation: Relation) -> tuple[dict[str, int], dict[str, int], int, int]:
    """T and h variables by role, and the carrying flows of the hot and the cold side."""
    streams = {role: builder.streams[stream] for role, stream in relation.streams.items()}
    T = {role: builder.state(stream, "T") for role, stream in streams.items()}
    h = {role: builder.state(stream, "h") for role, stream in streams.items()}
    return T, h, builder.carrier(streams["hot_in"]), builder.carrier(streams["cold_in"])


def _lmtd(builder: Builder, relation: Relation) -> None:
    T, h, hot_flow, _ = _exchanger(builder, relation)
    ua = builder.variable(relation.id, "value", RELATION[relation.kind])
    order = (ua, T["hot_in"], T["hot_out"], T["cold_in"], T["cold_out"], hot_flow, h["hot_in"], h["hot_out"])
    parallel = relation.arrangement == "parallel_flow"
    shell = relation.arrangement == "shell_and_tube"

    def mean_difference(v: Values) -> Value:
        hi, ho, ci, co = (v[i] for i in order[1:5])
        one, other = (hi - ci, ho - co) if parallel else (hi - co, ho - ci)
        good = (one > 0) & (other > 0)
        if not isinstance(good, np.ndarray):
            if not good:
                raise NoSolution(
                    f"{relation.id}: the temperatures cross: the ends of the exchanger differ by {one:.4g} K and "
                    f"{other:.4g} K, hot minus cold.", address=f"{relation.id}.value",
                    hint="Check which streams are hot and cold, the arrangement, and the outlet temperatures.",
                )  # fmt: skip
        else:
            one, other = np.where(good, one, np.nan), np.where(good, other, np.nan)
        mean = _log_mean(one, other)
        if shell:
            factor = correction_factor((hi - ho) / (co - ci), (co - ci) / (hi - ci))
            if not isinstance(good, np.ndarray) and not factor > 0:
                raise NoSolution(
                    f"{relation.id}: one shell pass cannot reach these temperatures.", address=f"{relation.id}.value",
                    hint="The cold stream leaves too hot for this arrangement; use counterflow, or several shells.",
                )  # fmt: skip
            mean = mean * factor
        return mean

    def duty(v: Values) -> Value:
        return v[order[5]] * (v[order[6]] - v[order[7]])

    def residual(v: Values) -> Value:
        return v[ua] * mean_difference(v) - duty(v)

    a, b = ("{1} − {3}", "{2} − {4}") if parallel else ("{1} − {4}", "{2} − {3}")
    mean = f"(({a}) − ({b}))/ln(({a})/({b}))"
    if shell:
        mean = f"F({{1}}, {{2}}, {{3}}, {{4}})·{mean}"
    forms = {
        ua: (lambda v: duty(v) / mean_difference(v), f"{{5}}·({{6}} − {{7}})/({mean})"),
        hot_flow: (
            lambda v: v[ua] * mean_difference(v) / (v[order[6]] - v[order[7]]), f"{{0}}·{mean}/({{6}} − {{7}})",
        ),
    }  # fmt: skip
    builder.model.equations.append(
        Function(
            f"exchanger rating {relation.id}", order, residual, duty, f"{{0}}·{mean} = {{5}}·({{6}} − {{7}})", forms
        )
    )


def _effectiveness(builder: Builder, relation: Relation) -> None:
    _, h, hot_flow, cold_flow = _exchanger(builder, relation)
    eps = builder.variable(relation.id, "value", RELATION[relation.kind])
    hot_limit = _limit_enthalpy(builder, relation, "hot_out", "cold_in")
    cold_limit = _limit_enthalpy(builder, relation, "cold_out", "hot_in")
    order = (eps, hot_flow, h["hot_in"], h["hot_out"], hot_limit, cold_flow, h["cold_in"], cold_limit)

    def largest(v: Values) -> Value:
        hot = v[order[1]] * (v[order[2]] - v[order[4]])
        cold = v[order[5]] * (v[order[7]] - v[order[6]])
        return np.minimum(hot, cold)

    def duty(v: Values) -> Value:
        return v[order[1]] * (v[order[2]] - v[order[3]])

    def residual(v: Values) -> Value:
        return v[eps] * largest(v) - duty(v)

    limit = "min({1}·({2} − {4}), {5}·({7} − {6}))"
    forms = {
        eps: (lambda v: duty(v) / largest(v), f"{{1}}·({{2}} − {{3}})/{limit}"),
        h["hot_out"]: (lambda v: v[order[2]] - v[eps] * largest(v) / v[order[1]], f"{{2}} − {{0}}·{limit}/{{1}}"),
    }
    builder.model.equations.append(
        Function(
            f"effectiveness {relation.id}", order, residual, largest, f"{{0}}·{limit} = {{1}}·({{2}} − {{3}})", forms
        )
    )


def _limit_enthalpy(builder: Builder, relation: Relation, stream_role: str, temperature_role: str) -> int:
    """Enthalpy of a stream's fluid at its outlet pressure and the other stream's inlet temperature."""
    stream = builder.streams[relation.streams[stream_role]]
    fluid = builder.fluid(stream)
    limit = builder.variable(relation.id, f"{stream_role}_limit_h", STATE["h"])
    other = builder.streams[relation.streams[temperature_role]]
    members = {"p": builder.state(stream, "p"), "T": builder.state(other, "T"), "h": limit}
    if fluid.kind == "humid_air":
        members["humidity_ratio"] = builder.state(stream, "humidity_ratio")
    name = f"{stream.id} brought to the temperature of {other.id}"
    builder.auxiliary_state(name, relation.id, fluid, members)
    return limit


_WRITERS: dict[str, Callable[[Builder, Relation], None]] = {
    "equal": _equal,
    "difference": _difference,
    "ratio": _ratio,
    "sum": _sum,
    "isentropic_efficiency": _isentropic,
    "polytropic_efficiency": _polytropic,
    "lmtd_UA": _lmtd,
    "effectiveness": _effectiveness,
    "restriction": add_restriction,
}
RELATION_KINDS = tuple(_WRITERS)
