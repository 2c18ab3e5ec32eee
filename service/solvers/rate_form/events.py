"""What is watched for while time goes on: conditions that end the case, and what would make its tail wrong."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Literal

from service.balance.case import Case
from service.balance.properties import STATE
from service.fluids.protocol import State
from service.fluids.refusals import plain
from service.solvers.rate_form.plant import Moment, Plant, Vector
from service.solvers.rate_form.vessels import LEAST, Vessel

AS_GOOD_AS = 1e-7
"""A pressure that another one levels out to is reached when it is so close (relative): it comes no closer by itself."""

WARM = {"liquid": -1e-9, "vapour": 1.0 + 1e-9, "gas": 1.0 + 1e-9, "supercritical": 1.0 + 1e-9}
"""Vapour fraction that stands for a single phase where a condition is on x."""

MARGIN, CLOSE = 1e-5, 1e-2
"""[K] above the triple point: where the property models still answer, and where a refusal means that it freezes."""


@dataclass(frozen=True, slots=True)
class Watch:
    """gap changes its sign where it happens; text tells it. ending: how the integration ends there, "" if it goes on.

    bends: the rates of change have a bend there, over which no step may go.
    """

    gap: Callable[[Moment, Vector], float]
    text: Callable[[Moment, Vector], str]
    ending: Literal["", "condition", "stop"] = "stop"
    bends: bool = False


def watches(case: Case, plant: Plant) -> list[Watch]:
    """Everything to be watched in a case. Raises KeyError for an address that does not exist."""
    found = [_condition(plant, of, q.kind, q.value) for of, q in case.until.conditions if q.value is not None]
    for n, vessel in enumerate(plant.vessels):
        found += list(_of_vessel(plant, n, vessel))
    for i, flow in enumerate(plant.flows):
        if flow.throat is not None:
            found += [_rest(plant, i), _solid(plant, i), _choked(plant, i)]
    return found


def shown(kind: str, value: float) -> str:
    """An amount [SI] in the units that plants use."""
    if kind == "mass":
        return f"{value:.6g} kg"
    if kind == "time":
        return f"{value:.6g} s"
    return plain(kind, value)


def reading(plant: Plant, address: str, moment: Moment, y: Vector) -> float:
    """The value [SI] of an address, with a vapour fraction just outside of 0 to 1 in a single phase."""
    value = plant.value(address, moment, y)
    if math.isnan(value) and address.endswith(".x"):
        item = address.partition(".")[0]
        for vessel, held in zip(plant.vessels, moment.held, strict=True):
            if item in (vessel.id, vessel.boundary):
                return WARM.get(held.state.phase, math.nan)
    return value


def _condition(plant: Plant, of: str, kind: str, value: float) -> Watch:
    """A quantity that reaches a value, from either side."""
    name = of.rpartition(".")[2]
    slack = AS_GOOD_AS * abs(value) if name == "p" else 0.0
    start = reading(plant, of, plant.moment(0.0, plant.start()), plant.start()) - value
    side = math.copysign(1.0, start) if start else 0.0

    def gap(moment: Moment, y: Vector) -> float:
        off = reading(plant, of, moment, y) - value
        return off - side * slack if abs(start) > slack else off

    kind = kind or (STATE[name].kind if name in STATE else "dimensionless")
    return Watch(gap, lambda moment, y: f"{of} reaches {shown(kind, value)}", "condition")


def _of_vessel(plant: Plant, n: int, vessel: Vessel) -> Sequence[Watch]:
    name = vessel.id
    limits = vessel.fluid.limits
    found = []
    if vessel.mass > 0.0:
        least = LEAST * vessel.mass_scale
        found.append(
            Watch(
                lambda m, y: m.held[n].mass - least,
                lambda m, y: f"{name} is empty: less than a millionth of its first content is left",
            )
        )
    if vessel.volume is None and math.isfinite(vessel.capacity):
        found.append(
            Watch(
                lambda m, y: m.held[n].mass / m.held[n].state.values["rho"] - vessel.capacity * (1 + 1e-12),
                lambda m, y: f"{name} is full and would overflow",
            )
        )
    if limits.T_triple is not None and limits.T_min <= limits.T_triple + MARGIN:
        coldest = limits.T_triple + MARGIN
        found.append(
            Watch(lambda m, y: m.held[n].state.values["T"] - coldest, lambda m, y: _freezing(vessel, m.held[n].state))
        )
    warmest = limits.T_max * (1 - 1e-9)
    found.append(
        Watch(
            lambda m, y: m.held[n].state.values["T"] - warmest,
            lambda m, y: (
                f"{name} reaches {shown('temperature', warmest)}, where the property model of {vessel.fluid.name} ends"
            ),
        )
    )
    return found


def _freezing(vessel: Vessel, state: State) -> str:
    T, p = shown("temperature", state.values["T"]), shown("pressure", state.values["p"])
    return (
        f"{vessel.id} cools to the triple point of {vessel.fluid.name} ({T}, {p}): it freezes, and its property model "
        "does not cover the solid"
    )


def freezing(plant: Plant, moment: Moment) -> str:
    """Which vessel is as good as at its triple point; "" where none is."""
    for vessel, held in zip(plant.vessels, moment.held, strict=True):
        triple = vessel.fluid.limits.T_triple
        if triple is not None and held.state.values["T"] < triple + CLOSE:
            return _freezing(vessel, held.state)
    return ""


def _rest(plant: Plant, i: int) -> Watch:
    """The pressures on both sides of a restriction level out, or change sides."""
    flow = plant.flows[i]

    def gap(moment: Moment, y: Vector) -> float:
        return moment.carried[i].fall - 10.0 * AS_GOOD_AS

    between = flow.source is not None and flow.target is not None

    def text(moment: Moment, y: Vector) -> str:
        what = "flow may turn round" if between else "nothing flows back: it is held at zero"
        return f"the pressures on both sides of {flow.id} are level; {what}"

    return Watch(gap, text, "")


def _solid(plant: Plant, i: int) -> Watch:
    """Solid would form in the throat of a restriction."""
    flow = plant.flows[i]
    text = (
        f"the throat of {flow.id} passes the triple point of {flow.fluid.name}: solid may form and block it; "
        "its flow is taken as that at the triple pressure"
    )
    return Watch(lambda m, y: 0.5 - m.carried[i].solid, lambda m, y: text, "", bends=True)


def _choked(plant: Plant, i: int) -> Watch:
    """The flow through a restriction becomes choked, or no longer is."""
    name = plant.flows[i].id

    def text(moment: Moment, y: Vector) -> str:
        return f"the flow of {name} changes between choked and not choked"

    return Watch(lambda m, y: 0.5 - m.carried[i].choked, text, "", bends=True)


def lacking(plant: Plant, moment: Moment) -> str:
    """Why a stream cannot draw what it draws, or an open tank is no longer one of liquid; "" where all is well."""
    for vessel, held in zip(plant.vessels, moment.held, strict=True):
        if vessel.volume is None and held.state.phase in ("two_phase", "vapour", "gas"):
            T = shown("temperature", held.state.values["T"])
            return f"{vessel.id} boils at {T}, which an open tank of liquid does not cover"
    for flow in plant.flows:
        if flow.source is None or flow.stream.draws == "mixed":
            continue
        vessel, held = plant.vessels[flow.source], moment.held[flow.source]
        others = ("vapour", "gas") if flow.stream.draws == "liquid" else ("liquid",)
        x = held.state.values.get("x", math.nan)
        if held.state.phase in others and not 0.0 <= x <= 1.0 and vessel.fluid.limits.T_critical is not None:
            return f"{vessel.id} holds no {flow.stream.draws} any more, which {flow.id} draws"
    return ""
