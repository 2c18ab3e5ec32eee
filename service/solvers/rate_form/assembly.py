"""From the case to a Plant: vessels, streams and transfers with their numbers. Refuses what the rate form cannot do."""

from __future__ import annotations

import math
from collections.abc import Mapping

from service.balance.accumulation import INCOMPRESSIBLE
from service.balance.case import Case, Content, Quantities, Relation, Stream, Transfer
from service.errors import Issue, SchemaViolation, UnderSpecified
from service.fluids.protocol import Fluid, State
from service.solvers.rate_form.crossings import Course, Exchange, Flow
from service.solvers.rate_form.plant import Plant
from service.solvers.rate_form.reading import Reader
from service.solvers.rate_form.throat import Throat
from service.solvers.rate_form.vessels import Vessel, Wall


def assemble(
    case: Case, fluids: Mapping[str, Fluid | None], trial: Mapping[str, float], deadline: float | None
) -> tuple[Plant | None, Reader]:
    """The plant, with trial values [SI] for unknown constants; None while one of them has no value."""
    _refuse(case)
    reader = Reader(case, fluids, trial)
    places = {c.boundary: i for i, c in enumerate(case.contents)}
    restrictions = {r.streams["stream"]: r for r in case.relations}
    flows = [_flow(reader, s, places, restrictions.get(s.id)) for s in case.streams]
    vessels = [_vessel(reader, c) for c in case.contents]
    exchanges = [_exchange(reader, t, places) for t in case.transfers]
    if set(reader.unknowns) - set(trial):
        return None, reader
    for vessel, content in zip(vessels, case.contents, strict=True):
        _prepare_filling(vessel, places[content.boundary], flows)
    return Plant(vessels, flows, exchanges, deadline), reader


def _refuse(case: Case) -> None:
    """Raises SchemaViolation with everything that the rate form cannot do."""
    issues = []
    held: dict[str, int] = {}
    for content in case.contents:
        held[content.boundary] = held.get(content.boundary, 0) + 1
        if content.process:
            issues.append(
                Issue(f"{content.id} has a process; in the rate form its state follows from what crosses.", content.id,
                      "Leave the process out.", content.pointer)
            )  # fmt: skip
        for name, quantity in content.quantities.items():
            if name.startswith("final.") and quantity.value is not None:
                hint = "Use a condition under until, or a target."
                text = f"{quantity.address} is given, but a rate-form transient finds it."
                issues.append(Issue(text, quantity.address, hint, quantity.pointer))
    for boundary in case.boundaries:
        if held.get(boundary.id, 0) != 1:
            text = f"In the rate form a boundary holds one content; {boundary.id} holds {held.get(boundary.id, 0)}."
            issues.append(Issue(text, "", "Give each vessel a boundary of its own.", boundary.pointer))
    for relation in case.relations:
        if relation.kind != "restriction":
            text = f"The relation {relation.id} ({relation.kind}) is not followed in time; only restrictions are."
            issues.append(Issue(text, relation.id, "Leave it out, or use the integrated form.", relation.pointer))
    for stream in case.streams:
        if stream.source is None and stream.target is None:
            issues.append(Issue(f"{stream.id} meets no boundary.", stream.id, "Give from or to.", stream.pointer))
    if issues:
        raise SchemaViolation(issues[0].detail, issues)


# -- vessels -----------------------------------------------------------------------------------------------------------


def _vessel(reader: Reader, content: Content) -> Vessel:
    fluid = reader.fluid(content.id, content.pointer)
    of = content.quantities
    volume = _either(reader, of, "volume")
    mass = _either(reader, of, "mass")
    open_tank = volume is None or fluid.kind in INCOMPRESSIBLE
    if open_tank:
        return _open_tank(reader, content, fluid, volume, mass)
    assert volume is not None
    empty = mass == 0.0 or (of.get("initial.p") is not None and of["initial.p"].value == 0.0)
    if empty:
        state, mass = State({}, ""), 0.0
    else:
        known = reader.known_state(of, "initial.")
        density = mass / volume if mass is not None and fluid.inputs(known) is None else None
        state = reader.initial(content, fluid, density)
        mass = _agreed(content, mass, volume * state.values["rho"], reader.case.answer.agreement)
    energy = 0.0 if empty else mass * state.values["u"]
    vessel = Vessel(content, fluid, volume, math.nan, mass, energy, elevation=reader.maybe(of, "initial.elevation"))
    vessel.mass_scale = mass or 1.0
    if not empty:
        vessel.flash.start(state.values["p"])
    vessel.wall = _wall(reader, content, state.values.get("T", math.nan))
    return vessel


def _either(reader: Reader, of: Quantities, name: str) -> float | None:
    """`volume`, or `initial.volume`: a value, or an unknown constant if nothing else fixes it."""
    for key in (name, f"initial.{name}"):
        quantity = of.get(key)
        if quantity is not None and quantity.value is not None:
            return quantity.value
        if quantity is not None and quantity.address in reader.trial:
            return reader.trial[quantity.address]
    return None


def _agreed(content: Content, given: float | None, found: float, agreement: float) -> float:
    if given is not None and math.isfinite(found) and abs(given - found) > agreement * abs(found):
        text = (
            f"{content.id} is given {given:.6g} kg, but its volume and initial state make {found:.6g} kg: drop one of "
            "mass, volume and a state property."
        )
        raise UnderSpecified(text, [Issue(text, f"{content.id}.mass", "Leave the mass out.", content.pointer)])
    return found


def _open_tank(reader: Reader, content: Content, fluid: Fluid, volume: float | None, mass: float | None) -> Vessel:
    """A tank open to the atmosphere: the pressure of its content stays what it is at first."""
    known = reader.known_state(content.quantities, "initial.")
    if "p" not in known and len(known) < 2:
        known["p"] = reader.case.site.atmospheric_pressure
        reader.assumptions.append(f"{content.id} stands open to the atmosphere: its pressure is the site's.")
    else:
        reader.assumptions.append(f"{content.id} has no fixed volume: its pressure stays as it is at first.")
    if fluid.inputs(known) is None:
        reader._ask(content.quantities, "initial.", known)
    state = reader.state_of(fluid, known, content.id, content.pointer, "initial.")
    capacity = math.inf
    if mass is None and volume is not None:
        mass = volume * state.values["rho"]
    elif volume is not None:
        capacity = volume
    if mass is None:
        mass = reader.need(content.quantities, "mass", content.id, content.pointer, "Give its mass or its volume.")
    vessel = Vessel(
        content, fluid, None, state.values["p"], mass, mass * state.values["h"], capacity,
        reader.maybe(content.quantities, "initial.elevation"), mass_scale=mass or 1.0,
    )  # fmt: skip
    vessel.wall = _wall(reader, content, state.values["T"])
    return vessel


def _wall(reader: Reader, content: Content, T: float) -> Wall | None:
    of = content.quantities
    if not any(name.startswith("wall.") and name != "wall.minimum_temperature" for name in of):
        return None

    def need(name: str, otherwise: float | None = None) -> float:
        if name not in of and otherwise is not None and math.isfinite(otherwise):
            return otherwise
        return reader.need(of, name, content.id, content.pointer)

    ambient = reader.case.site.ambient_temperature
    h_outside = need("wall.h_outside", 0.0)
    return Wall(
        need("wall.mass"), need("wall.cp"), need("wall.area"), need("wall.h_inside"), h_outside,
        need("wall.ambient_temperature", 293.15 if h_outside == 0.0 else ambient), need("wall.temperature", T),
    )  # fmt: skip


def _prepare_filling(vessel: Vessel, place: int, flows: list[Flow]) -> None:
    """Scale and first energy of a vessel that begins empty, from what fills it."""
    if vessel.mass > 0.0:
        return
    for flow in flows:
        if flow.target == place and flow.supply is not None:
            vessel.filling_enthalpy = flow.supply.values["h"]
            vessel.mass_scale = flow.supply.values["rho"] * (vessel.volume or 1.0)
            return
    text = f"{vessel.id} begins empty, and no stream from the surroundings fills it."
    hint = "Give it a small pressure and a temperature to begin with."
    raise UnderSpecified(text, [Issue(text, f"{vessel.id}.initial.p", hint, vessel.content.pointer)])


# -- streams and transfers ---------------------------------------------------------------------------------------------


def _flow(reader: Reader, stream: Stream, places: Mapping[str, int], relation: Relation | None) -> Flow:
    fluid = reader.fluid(stream.id, stream.pointer)
    for end in (stream.source, stream.target):
        content = reader.case.contents[places[end]] if end is not None else None
        if content is not None and reader.fluids.get(content.id) is not fluid:
            text = f"{stream.id} carries {fluid.name}, but {content.id} holds another fluid."
            raise SchemaViolation(text, [Issue(text, stream.id, "Name the same fluid.", stream.pointer)])
    flow = Flow(
        stream, fluid,
        places[stream.source] if stream.source is not None else None,
        places[stream.target] if stream.target is not None else None,
        elevation=reader.maybe(stream.quantities, "elevation"),
        velocity=_given(stream, "velocity"), bore=_given(stream, "bore"),
    )  # fmt: skip
    if stream.source is None:
        flow.supply = reader.supply(stream, fluid)
    if relation is None:
        flow.course = Course(*reader.mass_flow(stream, fluid, flow.supply))
    else:
        _restrict(reader, flow, relation)
    return flow


def _given(stream: Stream, name: str) -> float | None:
    quantity = stream.quantities.get(name)
    return quantity.value if quantity is not None else None


def _restrict(reader: Reader, flow: Flow, relation: Relation) -> None:
    of = relation.quantities
    if any(name in flow.stream.table or _given(flow.stream, name) is not None for name in ("mass_flow", "molar_flow")):
        text = f"The flow of {flow.id} is given, and {relation.id} gives it as well."
        raise SchemaViolation(text, [Issue(text, f"{flow.id}.mass_flow", "Drop one of them.", relation.pointer)])
    if "area" in of:
        area = reader.need(of, "area", relation.id, relation.pointer)
    else:
        area = 0.25 * math.pi * reader.need(of, "bore", relation.id, relation.pointer) ** 2
    coefficient = reader.maybe(of, "discharge_coefficient")
    if coefficient is None:
        coefficient = 1.0
        reader.assumptions.append(f"The discharge coefficient of {relation.id} is taken as 1.")
    flow.throat, flow.area, flow.relation = Throat(flow.fluid), area * coefficient, relation.id
    if flow.target is None:
        flow.downstream = reader.maybe(of, "downstream_pressure")
        if flow.downstream is None:
            flow.downstream = reader.case.site.atmospheric_pressure
            reader.assumptions.append(f"{flow.id} discharges to the atmosphere.")
    if flow.source is None or flow.target is None:
        reader.assumptions.append(f"Nothing flows back through {relation.id} when the pressures change sides.")


def _exchange(reader: Reader, transfer: Transfer, places: Mapping[str, int]) -> Exchange:
    if transfer.kind == "expansion_work":
        text = f"{transfer.id}: vessels of the rate form are rigid or open; expansion work is not followed in time."
        raise SchemaViolation(text, [Issue(text, transfer.id, "Use the integrated form.", transfer.pointer)])
    ends = [places[b] if b is not None else None for b in (transfer.source, transfer.target)]
    exchange = Exchange(transfer, ends[0], ends[1])
    of = transfer.quantities
    if transfer.has_law:
        exchange.UA = reader.need(of, "UA", transfer.id, transfer.pointer)
        if None in ends:
            exchange.outside = reader.need(of, "source_temperature", transfer.id, transfer.pointer)
            exchange.temperature = exchange.outside
    else:
        exchange.course = Course(*reader.rate(transfer))
    if transfer.kind == "heat" and (temperature := reader.maybe(of, "temperature")) is not None:
        exchange.temperature = temperature
    return exchange
