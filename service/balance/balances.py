"""The balances of a case: mass by circuit, energy by boundary, and what crosses as heat, work or fuel."""

from __future__ import annotations

import math

from service.balance.builder import Builder, EnergyBalance
from service.balance.case import STANDARD_GRAVITY, Stream, Transfer
from service.balance.network import Circuit, connected_groups, dependent_circuits
from service.balance.properties import STATE, TRANSFER
from service.engine.model import Polynomial, Term
from service.errors import SchemaViolation

FLOWS = {"mass_flow", "dry_air_flow", "molar_flow", "volume_flow", "normal_volume_flow"}
_PRESSURE_SAYING = {"p", "x", "superheat", "subcooling"}


def default_pressures(builder: Builder) -> None:
    """Where nobody mentions the pressure of a fluid that hardly feels it, take it as the site's."""
    concerned = [s for s in builder.case.streams if _feels_no_pressure(builder, s)]
    by_fluid: dict[str, list[Stream]] = {}
    for stream in concerned:
        by_fluid.setdefault(builder.fluid(stream).name, []).append(stream)
    for name, streams in by_fluid.items():
        if any(_PRESSURE_SAYING & set(s.quantities) for s in streams):
            continue
        for stream in streams:
            builder.model.given[builder.state(stream, "p")] = builder.case.site.atmospheric_pressure
        builder.built.assumptions.append(
            f"No pressure is given for {name}: atmospheric is taken; its properties hardly depend on it."
        )


def _feels_no_pressure(builder: Builder, stream: Stream) -> bool:
    fluid = builder.built.fluids[stream.id]
    energetic = {stream.source, stream.target} - builder.mass_only - {None}
    return fluid is not None and fluid.pressure_optional and bool(energetic)


def add_mass_balances(builder: Builder) -> None:
    """One balance a circuit; those that follow from the others are only checked."""
    dropped = dependent_circuits(builder.built.circuits)
    for number, circuit in enumerate(builder.built.circuits):
        terms = [t for i in circuit.inflows for t in _mass_terms(builder, i, circuit, 1.0)]
        terms += [t for i in circuit.outflows for t in _mass_terms(builder, i, circuit, -1.0)]
        balance = Polynomial.of(circuit.name, terms)
        builder.built.mass_balances.append(balance)
        uncancelled = _without_passing(terms)
        if number in dropped or not uncancelled:
            builder.model.implied.append(balance)
        else:
            builder.model.equations.append(Polynomial.of(circuit.name, uncancelled))


def _without_passing(terms: list[Term]) -> list[Term]:
    """The terms without those pairs in which one shared flow both enters and leaves."""
    net: dict[tuple[tuple[int, int], ...], float] = {}
    for term in terms:
        net[term.factors] = net.get(term.factors, 0.0) + term.coefficient
    return [t for t in terms if net[t.factors]]


def _mass_terms(builder: Builder, number: int, circuit: Circuit, sign: float) -> list[Term]:
    stream = builder.case.streams[number]
    if circuit.component and builder.is_humid(stream):
        dry = builder.carrier(stream)
        if circuit.component == "dry air":
            return [Term(sign, ((dry, 1),), "", "dry air", stream.id)]
        return [Term(sign, ((dry, 1), (builder.state(stream, "humidity_ratio"), 1)), "", "water vapour", stream.id)]
    label = builder.amount.replace("_", " ")
    return [Term(sign, ((builder.flow(stream, builder.amount), 1),), "", label, stream.id)]


def add_energy_balance(builder: Builder, boundary: str) -> None:
    """Energy of one boundary: enthalpy, kinetic and potential energy of its streams, and its transfers."""
    crossing = [(end.stream, 1.0 if end.enters else -1.0) for end in builder.ends[boundary]]
    transfers = transfers_of(builder, boundary)
    terms = [term for stream, sign in crossing for term in stream_energy(builder, stream, sign, True)]
    for transfer, sign in transfers:
        rate = builder.variable(transfer.id, builder.rate, TRANSFER[builder.rate])
        terms.append(Term(sign, ((rate, 1),), "", transfer.kind.replace("_", " "), transfer.id))
    name = f"energy balance of {boundary}"
    whole = solved = Polynomial.of(name, terms)
    mine = builder.circuits_of[boundary]
    passes = len(crossing) == 2 and all(len(c.inflows) == len(c.outflows) == 1 for c in mine if not c.component)
    if passes and not transfers and not any(c.component for c in mine):
        per_mass = [term for stream, sign in crossing for term in stream_energy(builder, stream, sign, False)]
        solved = Polynomial.of(f"{name} per unit mass", per_mass)
    builder.model.equations.append(solved)
    builder.built.energy_balances.append(EnergyBalance(boundary, whole, solved))


def transfers_of(builder: Builder, boundary: str) -> list[tuple[Transfer, float]]:
    """The transfers of a boundary, with +1 for those into it and −1 for those out of it."""
    into = [(t, 1.0) for t in builder.transfers_into.get(boundary, ())]
    return into + [(t, -1.0) for t in builder.transfers_from.get(boundary, ())]


def stream_energy(builder: Builder, stream: Stream, sign: float, with_flow: bool) -> list[Term]:
    """Flow enthalpy, kinetic and potential energy of a stream; without its flow, per unit mass."""
    h = builder.state(stream, "h")
    if builder.built.fluids[stream.id] is not None and not builder.is_humid(stream):
        builder.state(stream, "p"), builder.state(stream, "T")
    carrying = ((builder.carrier(stream), 1),) if with_flow else ()
    moving = ((builder.flow(stream, builder.amount), 1),) if with_flow else ()
    terms = [Term(sign, (*carrying, (h, 1)), "", "flow enthalpy", stream.id)]
    if f"{stream.id}.velocity" in builder.model.index:
        velocity = builder.flow(stream, "velocity")
        terms.append(Term(0.5 * sign, (*moving, (velocity, 2)), "½", "kinetic energy", stream.id))
    if f"{stream.id}.elevation" in builder.model.index:
        z = builder.flow(stream, "elevation")
        symbol = f"{STANDARD_GRAVITY} m/s²"
        terms.append(Term(STANDARD_GRAVITY * sign, (*moving, (z, 1)), symbol, "potential energy", stream.id))
    return terms


def imply_dependent_energy_balance(builder: Builder) -> None:
    """Of boundaries that exchange energy only among themselves, one balance follows from the others."""
    numbers = {e.boundary: i for i, e in enumerate(builder.built.energy_balances)}
    links, open_ends = [], set()
    crossings = [(s.source, s.target) for s in builder.case.streams]
    crossings += [(t.source, t.target) for t in builder.case.transfers]
    for source, target in crossings:
        ends = [numbers.get(b) if b is not None else None for b in (source, target)]
        if ends[0] is not None and ends[1] is not None:
            links.append((ends[0], ends[1]))
        else:
            open_ends |= {e for e in ends if e is not None}
    for group in connected_groups(range(len(numbers)), links):
        if len(group) > 1 and not open_ends & set(group):
            balance = builder.built.energy_balances[group[-1]].solved
            builder.model.equations.remove(balance)
            builder.model.implied.append(balance)


def add_transfer(builder: Builder, transfer_id: str) -> None:
    """The quantities of a transfer, and the law that ties its rate where it has one."""
    transfer = builder.transfers[transfer_id]
    for name in transfer.quantities:
        builder.variable(transfer_id, name, builder.transfer_trait(transfer_id, name))
    rate = builder.variable(transfer_id, builder.rate, TRANSFER[builder.rate])
    if transfer.has_law:
        stream = _facing_stream(builder, transfer_id)
        ua = builder.variable(transfer_id, "UA", TRANSFER["UA"])
        source = builder.variable(transfer_id, "source_temperature", TRANSFER["source_temperature"])
        inward = 1.0 if transfer.target is not None else -1.0
        builder.equation(
            f"heat transfer law of {transfer_id}",
            Term(1.0, ((rate, 1),)),
            Term(-inward, ((ua, 1), (source, 1))),
            Term(inward, ((ua, 1), (builder.state(stream, "T"), 1))),
        )
    if transfer.kind == "fuel":
        flow = builder.amount
        if any(name.startswith("normal_volume") for name in transfer.quantities):
            flow = "normal_volume" if builder.accumulating else "normal_volume_flow"
        if "heating_value" in transfer.quantities or flow in transfer.quantities:
            amount = builder.variable(transfer_id, flow, TRANSFER[flow])
            value = builder.variable(transfer_id, "heating_value", builder.transfer_trait(transfer_id, "heating_value"))
            builder.equation(f"energy of {transfer_id}", Term(1.0, ((rate, 1),)), Term(-1.0, ((amount, 1), (value, 1))))


def _facing_stream(builder: Builder, transfer_id: str) -> Stream:
    """The stream whose temperature drives a heat transfer law: the named one, else the only one leaving."""
    transfer = builder.transfers[transfer_id]
    if transfer.law_stream is not None:
        return builder.streams[transfer.law_stream]
    boundary = transfer.target if transfer.target is not None else transfer.source
    leaving = [s for s in builder.case.streams if s.source == boundary]
    if len(leaving) == 1:
        builder.built.assumptions.append(
            f"{transfer_id}: the temperature inside {boundary} is taken as that of {leaving[0].id} (well stirred)."
        )
        return leaving[0]
    raise SchemaViolation(
        f"{transfer_id}: which stream's temperature faces the source?", address=f"{transfer_id}.source_temperature",
        hint="Name the stream as `of` inside the law.",
    )  # fmt: skip


def give_starting_points(builder: Builder) -> None:
    """Temperatures, pressures and humidities start from the mean of what is given, flows from the largest flow."""
    by_suffix: dict[str, list[float]] = {}
    for number, value in builder.model.given.items():
        by_suffix.setdefault(builder.model.variables[number].name.rpartition(".")[2], []).append(float(value))
    starts: dict[str, float] = {}
    if temperatures := by_suffix.get("T"):
        starts["T"] = sum(temperatures) / len(temperatures)
    if pressures := by_suffix.get("p"):
        starts["p"] = math.exp(sum(math.log(max(p, 1.0)) for p in pressures) / len(pressures))
    moist = by_suffix.get("humidity_ratio")
    starts["humidity_ratio"] = sum(moist) / len(moist) if moist else STATE["humidity_ratio"].scale
    starts["relative_humidity"] = 0.5  # its range and that of the humidity ratio end in fog, where no state is
    flow = max((abs(v) for v in by_suffix.get("mass_flow", ()) if v), default=1.0)
    for variable in builder.model.variables:
        name = variable.name.rpartition(".")[2]
        variable.zero_is_trivial = name in FLOWS
        if name in ("mass_flow", "dry_air_flow"):
            variable.start = variable.scale = flow
        else:
            variable.start = starts.get(name, variable.start)
