"""Rules on what cannot be, or runs the other way: the description or a reading is wrong before any machine is."""

from __future__ import annotations

from collections.abc import Iterator

from service.advisories.context import Context, Finding, known
from service.balance.case import Transfer

PERCEPTIBLE = 1e-9
"""Relative: below it, a difference is round-off."""
NET_OVER_GROSS = 1.11
"""The most that an efficiency on the net heating value can be: gross over net of natural gas (value from memory)."""
FASTER = 1.001
"""Mach number from which a velocity is told as supersonic; a choked line may end at 1."""
MOST_NAMED = 3


def second_law_violated(context: Context) -> Iterator[Finding]:
    """The entropy checks that came out as violated; boundaries that were checked together are named together."""
    for check in context.solution.entropy:
        if check.verdict != "violated" or check.generation is None:
            continue
        group = check.boundary.split(" + ")
        named = " and ".join(group[:MOST_NAMED]) + (
            f" and {len(group) - MOST_NAMED} more" if group[MOST_NAMED:] else ""
        )
        text = (
            f"What is described for {named} is impossible: entropy would be destroyed ({{0}}). Do not act on these "
            "numbers; check the readings, the directions, and what else crosses the boundary."
        )
        yield Finding(text, group[0], ((_entropy_kind(context, check.boundary), -check.generation),))


def _entropy_kind(context: Context, boundary: str) -> str:
    if context.built.case.system != "steady_flow":
        return "entropy"
    per_mass = any(a.boundary == boundary and a.kind == "specific_energy" for a in context.solution.ledger)
    return "specific_entropy" if per_mass else "conductance"


def efficiency_impossible(context: Context) -> Iterator[Finding]:
    """An efficiency of a machine outside of 0 to 1, or more heat or work out of a fuel than its heating value."""
    case = context.built.case
    for relation in case.relations:
        value = context.value(f"{relation.id}.value")
        if value is None:
            continue
        amounts = (("dimensionless", value),)
        if relation.kind in ("isentropic_efficiency", "polytropic_efficiency"):
            if not 0.0 <= value <= 1.0 + PERCEPTIBLE:
                text = (
                    f"The efficiency {relation.id} comes out as {{0}}: no machine between {relation.streams['from']} "
                    f"and {relation.streams['to']} can do that. Check the temperature and pressure readings, and "
                    "whether the fluid is wet."
                )
                yield Finding(text, f"{relation.id}.value", amounts)
        elif relation.kind == "ratio":
            most = _most_of_fuel(case.transfers, relation.addresses)
            if most is not None and value > most + PERCEPTIBLE:
                text = (
                    f"{relation.id} comes out as {{0}}: {relation.addresses[0]} is more than the fuel can give. Check "
                    "the fuel's flow and heating value, and whether it is net or gross."
                )
                yield Finding(text, f"{relation.id}.value", amounts)


def _most_of_fuel(transfers: tuple[Transfer, ...], addresses: tuple[str, ...]) -> float | None:
    """The largest ratio of a transfer's rate to a fuel's; None where the ratio is of something else."""
    by_rate = {f"{t.id}.{name}": t for t in transfers for name in ("rate", "energy")}
    useful, fuel = (by_rate.get(address) for address in addresses)
    if useful is None or fuel is None or fuel.kind != "fuel" or useful.kind == "fuel":
        return None
    return 1.0 if fuel.basis == "gross" else NET_OVER_GROSS


def uphill_heat(context: Context) -> Iterator[Finding]:
    """Heat that leaves a boundary at a temperature above all that is in it, or arrives below all that is in it.

    Boundaries that work or fuel crosses are left out: friction and fire make their own temperature.
    """
    for transfer in context.built.case.transfers:
        T = context.value(f"{transfer.id}.temperature")
        rate = context.value(f"{transfer.id}.rate")
        if transfer.kind != "heat" or T is None or rate is None or rate == 0.0:
            continue
        source, target = (transfer.source, transfer.target) if rate > 0 else (transfer.target, transfer.source)
        for boundary, leaves in ((source, True), (target, False)):
            inside = _temperatures(context, boundary)
            if not inside:
                continue
            nearest = max(inside) if leaves else min(inside)
            if (T - nearest if leaves else nearest - T) > PERCEPTIBLE * T:
                way = "leaves" if leaves else "enters"
                most = "hottest" if leaves else "coldest"
                text = (
                    f"{transfer.id} {way} {boundary} at {{0}}, where the {most} stream is at {{1}}: heat does not flow "
                    "to the hotter side by itself. Check the direction and the temperatures."
                )
                yield Finding(text, f"{transfer.id}.temperature", (("temperature", T), ("temperature", nearest)))


def _temperatures(context: Context, boundary: str | None) -> list[float]:
    if boundary is None or context.transfers_at(boundary, "shaft_work", "electrical_work", "fuel"):
        return []
    states = [*context.inflows[boundary], *context.outflows[boundary]]
    return [T for state in states if (T := known(state, "T")) is not None]


def supersonic_pipe(context: Context) -> Iterator[Finding]:
    """A velocity that follows from the bore of a pipe and lies above the speed of sound there.

    The outlet of a machine or nozzle (a relation ends in it) is left out: a jet may be supersonic.
    """
    nozzles = {r.streams["to"] for r in context.built.case.relations if "to" in r.streams}
    for state, fluid in context.states:
        velocity = state.flows.get("velocity")
        fast = velocity is not None and velocity > 60.0 and "bore" in state.flows and state.stream not in nozzles
        if not fast or velocity is None or "speed_of_sound" not in fluid.properties:
            continue
        p, h = known(state, "p"), known(state, "h")
        if p is None or h is None or state.phase == "two_phase" or fluid.dof != 2:
            continue
        sound = fluid.state(("p", "h"), (p, h), ("speed_of_sound",)).values["speed_of_sound"]
        if velocity > FASTER * sound:
            text = (
                f"{state.stream} would move at {{0}} in its pipe, above the speed of sound of {{1}}: it chokes before. "
                "Check the bore, the flow and the pressure."
            )
            yield Finding(text, f"{state.stream}.velocity", (("velocity", velocity), ("velocity", sound)))


def reversed_flow(context: Context) -> Iterator[Finding]:
    """A stream whose flow comes out below zero."""
    for stream in context.built.case.streams:
        for name in ("mass_flow", "dry_air_flow", "mass"):
            flow = context.value(f"{stream.id}.{name}")
            if flow is not None:
                if flow < 0:
                    text = (
                        f"{stream.id} runs against its stated direction, with {{0}}. Its state then has to be that of "
                        "where it really comes from: turn it round in the case and say that state."
                    )
                    amounts = ((context.kind(f"{stream.id}.{name}"), flow),)
                    yield Finding(text, f"{stream.id}.{name}", amounts)
                break


def reversed_transfer(context: Context) -> Iterator[Finding]:
    """Heat, work or fuel that comes out below zero, where the case did not give it so."""
    for transfer in context.built.case.transfers:
        name = "rate" if context.built.case.system == "steady_flow" else "energy"
        amount, given = context.value(f"{transfer.id}.{name}"), transfer.quantities.get(name)
        if amount is None or amount >= 0 or (given is not None and given.value is not None):
            continue
        why = "its source is colder than what it faces" if transfer.has_law else "the balance asks for the opposite"
        text = f"{transfer.id} runs against its stated direction, with {{0}}: {why}."
        yield Finding(text, f"{transfer.id}.{name}", ((context.kind(f"{transfer.id}.{name}"), amount),))
