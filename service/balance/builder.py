"""From a case to the engine's model: one variable a quantity, one equation a statement of physics.

The builder owns the variables; the balances are written here, the relations in `relations`, the restriction in
`restriction`. Every variable is named by its address.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping
from dataclasses import dataclass, field

from service.balance.case import STANDARD_GRAVITY, STATE_PROPERTIES, Case, Quantity, Stream, Transfer
from service.balance.network import Circuit, circuits, connected_groups, dependent_circuits, ends_by_boundary, mass_only
from service.balance.properties import RELATION, STATE, STREAM, TRANSFER, Trait
from service.balance.state_node import StateNode
from service.engine.model import Model, Polynomial, Term
from service.errors import Issue, SchemaViolation
from service.fluids.protocol import Fluid

NORMAL_MOLAR_DENSITY = 101_325.0 / (8.314462618 * 273.15)
"""[mol/m3] ideal gas at 0 degC and 101.325 kPa; R by CODATA 2018."""

_FLOWS = ("mass_flow", "molar_flow", "volume_flow", "normal_volume_flow")
_PRESSURE_SAYING = {"p", "x", "superheat", "subcooling"}


@dataclass(frozen=True, slots=True)
class EnergyBalance:
    """`whole` has the flows in it; `solved` is the form for the engine, per unit mass where the flows cancel."""

    boundary: str
    whole: Polynomial
    solved: Polynomial


@dataclass(slots=True)
class BuiltCase:
    """A case as a model, with what is needed to tell its answer afterwards."""

    case: Case
    fluids: dict[str, Fluid | None]
    model: Model = field(default_factory=Model)
    kinds: list[str] = field(default_factory=list)
    circuits: list[Circuit] = field(default_factory=list)
    mass_balances: list[Polynomial] = field(default_factory=list)
    energy_balances: list[EnergyBalance] = field(default_factory=list)
    state_nodes: dict[str, int] = field(default_factory=dict)
    assumptions: list[str] = field(default_factory=list)


class Builder:
    """Writes a case's equations. `also_given`: addresses that will have values beyond those the case gives."""

    def __init__(self, case: Case, fluids: Mapping[str, Fluid | None], also_given: Collection[str] = ()) -> None:
        self.case = case
        self.built = BuiltCase(case, dict(fluids))
        self.model = self.built.model
        self.streams = {s.id: s for s in case.streams}
        self.transfers = {t.id: t for t in case.transfers}
        self.relations = {r.id: r for r in case.relations}
        self.mass_only = mass_only(case)
        self.quantities: dict[str, Quantity] = {q.address: q for q in case.quantities()}
        self.built.circuits = circuits(case, fluids)
        self.ends = ends_by_boundary(case)
        self.circuits_of: dict[str, list[Circuit]] = {b.id: [] for b in case.boundaries}
        for circuit in self.built.circuits:
            self.circuits_of[circuit.boundary].append(circuit)
        self.transfers_into: dict[str | None, list[Transfer]] = {}
        self.transfers_from: dict[str | None, list[Transfer]] = {}
        for transfer in case.transfers:
            self.transfers_into.setdefault(transfer.target, []).append(transfer)
            self.transfers_from.setdefault(transfer.source, []).append(transfer)
        self._flow_of = self._shared_flows(also_given)

    # -- variables ---------------------------------------------------------------------------------------------

    def _shared_flows(self, also_given: Collection[str]) -> dict[str, str]:
        """Stream → the stream whose flow it has: what passes a boundary unbranched is one flow with one variable.

        Where both ends have a value of their own, they stay apart and the mass balance compares them.
        """
        given = {a for a, q in self.quantities.items() if q.value is not None} | set(also_given)

        def metered(streams: Collection[str]) -> int:
            return sum(f"{s}.{name}" in given for s in streams for name in _FLOWS)

        group = {s.id: {s.id} for s in self.case.streams}
        for circuit in self.built.circuits:
            if len(circuit.inflows) == len(circuit.outflows) == 1 and not circuit.component:
                a, b = (self.case.streams[n].id for n in (circuit.inflows[0], circuit.outflows[0]))
                if group[a] is not group[b] and metered(group[a]) + metered(group[b]) <= 1:
                    joined = group[a] | group[b]
                    group.update(dict.fromkeys(joined, joined))
        order = [s.id for s in self.case.streams]
        return {s: min(group[s], key=lambda m: (metered((m,)) == 0, order.index(m))) for s in order}

    def variable(self, item: str, name: str, trait: Trait) -> int:
        """The variable of `item.name`, made with its trait, its bounds and its given value when it is new."""
        address = f"{item}.{name}"
        known = self.model.index.get(address)
        if known is not None:
            return known
        number = self.model.variable(address, scale=trait.scale, lower=trait.lower, upper=trait.upper)
        self.built.kinds.append(trait.kind)
        quantity = self.quantities.get(address)
        if quantity is not None:
            self._apply(number, quantity)
        return number

    def _apply(self, number: int, quantity: Quantity) -> None:
        variable = self.model.variables[number]
        if quantity.value is not None:
            self.model.given[number] = quantity.value
        if quantity.wanted:
            self.model.wanted.add(number)
        if quantity.between is not None:
            variable.lower = max(variable.lower, quantity.between[0])
            variable.upper = min(variable.upper, quantity.between[1])
        if quantity.near is not None:
            variable.near = quantity.near

    def address(self, address: str) -> int:
        """The variable that an address names; flows and state properties come into being as they are mentioned."""
        item, _, name = address.rpartition(".")
        if item in self.streams:
            return self.stream_quantity(self.streams[item], name)
        if item in self.transfers:
            return self.variable(item, name, TRANSFER[name])
        relation = self.relations[item]
        trait = RELATION[relation.kind if name == "value" and relation.kind in RELATION else name]
        return self.variable(item, name, trait)

    def stream_quantity(self, stream: Stream, name: str) -> int:
        return self.state(stream, name) if name in STATE_PROPERTIES else self.flow(stream, name)

    # -- states ------------------------------------------------------------------------------------------------

    def state(self, stream: Stream, name: str) -> int:
        """The variable of a state property of a stream, as a member of the stream's node."""
        node = self._node(stream)
        if name not in node.members:
            if name not in node.fluid.properties:
                raise SchemaViolation(
                    f"{stream.id}.{name} is not a property of {node.fluid.name}.",
                    address=f"{stream.id}.{name}",
                    hint=f"Its properties are {', '.join(node.fluid.properties)}.",
                )
            node.members[name] = self.property_variable(stream.id, name, node.fluid)
        return node.members[name]

    def property_variable(self, item: str, name: str, fluid: Fluid) -> int:
        trait = STATE[name]
        if name in ("p", "T"):
            lower, upper = fluid.bounds(name)
            trait = Trait(trait.kind, trait.scale, lower, upper)
        return self.variable(item, name, trait)

    def _node(self, stream: Stream) -> StateNode:
        number = self.built.state_nodes.get(stream.id)
        if number is None:
            fluid = self.built.fluids[stream.id]
            if fluid is None:
                text = f"Stream {stream.id} has a state but no fluid."
                raise SchemaViolation(text, [Issue(text, stream.id, "Add `fluid`.", stream.pointer)])
            number = self.built.state_nodes[stream.id] = len(self.model.nodes)
            self.model.nodes.append(StateNode(f"state of {stream.id}", stream.id, fluid))
        node = self.model.nodes[number]
        assert isinstance(node, StateNode)
        return node

    def auxiliary_state(self, name: str, owner: str, fluid: Fluid, members: Mapping[str, int]) -> StateNode:
        """A state that belongs to no stream (an ideal end point), sharing variables with those that do."""
        node = StateNode(name, owner, fluid, dict(members))
        self.model.nodes.append(node)
        return node

    # -- flows -------------------------------------------------------------------------------------------------

    def is_humid(self, stream: Stream) -> bool:
        fluid = self.built.fluids[stream.id]
        return fluid is not None and fluid.kind == "humid_air"

    def carrier(self, stream: Stream) -> int:
        """The flow that carries the stream's specific properties: dry air for humid air, the mass flow otherwise."""
        return self.flow(stream, "dry_air_flow" if self.is_humid(stream) else "mass_flow")

    def flow(self, stream: Stream, name: str) -> int:
        """The variable of a flow quantity of a stream, with the equation that ties it to the mass flow."""
        if f"{stream.id}.{name}" in self.model.index:
            return self.model.index[f"{stream.id}.{name}"]
        if name == "mass_flow" and self._flow_of[stream.id] != stream.id:
            return self._shared_flow(stream)
        number = self.variable(stream.id, name, STREAM[name])
        if name in ("mass_flow", "dry_air_flow") and self.is_humid(stream):
            self._tie_moist_flow(stream)
        elif name in ("molar_flow", "normal_volume_flow"):
            self._tie_amount(stream, name, number)
        elif name == "volume_flow":
            m, rho = self.flow(stream, "mass_flow"), self.state(stream, "rho")
            self._equation(f"volume flow of {stream.id}", Term(1.0, ((m, 1),)), Term(-1.0, ((rho, 1), (number, 1))))
        elif name == "bore":
            m, rho, velocity = self.flow(stream, "mass_flow"), self.state(stream, "rho"), self.flow(stream, "velocity")
            self._equation(
                f"continuity of {stream.id}",
                Term(1.0, ((m, 1),)),
                Term(-math.pi / 4, ((rho, 1), (number, 2), (velocity, 1)), "π/4"),
            )
        elif name == "dry_air_flow":
            raise SchemaViolation(
                f"{stream.id}.dry_air_flow: the stream is not humid air.", address=f"{stream.id}.dry_air_flow",
                hint="Use mass_flow.",
            )  # fmt: skip
        return number

    def _shared_flow(self, stream: Stream) -> int:
        """The variable of the flow that this stream shares, made known under this stream's address too."""
        number = self.flow(self.streams[self._flow_of[stream.id]], "mass_flow")
        address = f"{stream.id}.mass_flow"
        self.model.index[address] = number
        if address in self.quantities:
            self._apply(number, self.quantities[address])
        return number

    def _tie_moist_flow(self, stream: Stream) -> None:
        m = self.variable(stream.id, "mass_flow", STREAM["mass_flow"])
        dry = self.variable(stream.id, "dry_air_flow", STREAM["dry_air_flow"])
        w = self.state(stream, "humidity_ratio")
        self._equation(
            f"moist flow of {stream.id}", Term(1.0, ((m, 1),)), Term(-1.0, ((dry, 1),)), Term(-1.0, ((dry, 1), (w, 1)))
        )

    def _tie_amount(self, stream: Stream, name: str, number: int) -> None:
        fluid = self.built.fluids[stream.id]
        if fluid is None or fluid.molar_mass is None:
            raise SchemaViolation(
                f"{stream.id}.{name} needs a fluid with a fixed molar mass.", address=f"{stream.id}.{name}",
                hint="Use mass_flow or volume_flow.",
            )  # fmt: skip
        m = self.flow(stream, "mass_flow")
        per_unit = fluid.molar_mass * (NORMAL_MOLAR_DENSITY if name == "normal_volume_flow" else 1.0)
        unit = "kg/m³ (normal)" if name == "normal_volume_flow" else "kg/mol"
        self._equation(
            f"{name.replace('_', ' ')} of {stream.id}",
            Term(1.0, ((m, 1),)),
            Term(-per_unit, ((number, 1),), f"{per_unit:.9g} {unit}"),
        )

    def _equation(self, name: str, *terms: Term) -> Polynomial:
        equation = Polynomial.of(name, terms)
        self.model.equations.append(equation)
        return equation

    # -- balances ----------------------------------------------------------------------------------------------

    def default_pressures(self) -> None:
        """Where nobody mentions the pressure of a fluid that hardly feels it, take it as the site's."""
        concerned = [s for s in self.case.streams if self._feels_no_pressure(s)]
        for fluid in {self.built.fluids[s.id] for s in concerned}:
            streams = [s for s in concerned if self.built.fluids[s.id] is fluid]
            if fluid is None or any(_PRESSURE_SAYING & set(s.quantities) for s in streams):
                continue
            for stream in streams:
                self.model.given[self.state(stream, "p")] = self.case.site.atmospheric_pressure
            self.built.assumptions.append(
                f"No pressure is given for {fluid.name}: atmospheric is taken; its properties hardly depend on it."
            )

    def _feels_no_pressure(self, stream: Stream) -> bool:
        fluid = self.built.fluids[stream.id]
        energetic = {stream.source, stream.target} - self.mass_only - {None}
        return fluid is not None and fluid.pressure_optional and bool(energetic)

    def mass_balances(self) -> None:
        dropped = dependent_circuits(self.built.circuits)
        for number, circuit in enumerate(self.built.circuits):
            terms = [t for i in circuit.inflows for t in self._mass_terms(i, circuit, 1.0)]
            terms += [t for i in circuit.outflows for t in self._mass_terms(i, circuit, -1.0)]
            balance = Polynomial.of(circuit.name, terms)
            self.built.mass_balances.append(balance)
            if number in dropped or len(balance.variables) < len(circuit.inflows) + len(circuit.outflows):
                self.model.implied.append(balance)
            else:
                self.model.equations.append(balance)

    def _mass_terms(self, number: int, circuit: Circuit, sign: float) -> list[Term]:
        stream = self.case.streams[number]
        if circuit.component and self.is_humid(stream):
            dry = self.carrier(stream)
            if circuit.component == "dry air":
                return [Term(sign, ((dry, 1),), "", "dry air", stream.id)]
            return [Term(sign, ((dry, 1), (self.state(stream, "humidity_ratio"), 1)), "", "water vapour", stream.id)]
        return [Term(sign, ((self.flow(stream, "mass_flow"), 1),), "", "mass flow", stream.id)]

    def energy_balance(self, boundary: str) -> None:
        crossing = [(end.stream, 1.0 if end.enters else -1.0) for end in self.ends[boundary]]
        transfers = [(t, 1.0) for t in self.transfers_into.get(boundary, ())]
        transfers += [(t, -1.0) for t in self.transfers_from.get(boundary, ())]
        terms = [term for stream, sign in crossing for term in self._stream_energy(stream, sign, True)]
        for transfer, sign in transfers:
            rate = self.variable(transfer.id, "rate", TRANSFER["rate"])
            terms.append(Term(sign, ((rate, 1),), "", transfer.kind.replace("_", " "), transfer.id))
        name = f"energy balance of {boundary}"
        whole = solved = Polynomial.of(name, terms)
        mine = self.circuits_of[boundary]
        passes = len(crossing) == 2 and all(len(c.inflows) == len(c.outflows) == 1 for c in mine if not c.component)
        if passes and not transfers and not any(c.component for c in mine):
            per_mass = [term for stream, sign in crossing for term in self._stream_energy(stream, sign, False)]
            solved = Polynomial.of(f"{name} per unit mass", per_mass)
        self.model.equations.append(solved)
        self.built.energy_balances.append(EnergyBalance(boundary, whole, solved))

    def _stream_energy(self, stream: Stream, sign: float, with_flow: bool) -> list[Term]:
        """Flow enthalpy, kinetic and potential energy of a stream; without its flow, per unit mass."""
        h = self.state(stream, "h")
        if self.built.fluids[stream.id] is not None and not self.is_humid(stream):
            self.state(stream, "p"), self.state(stream, "T")
        carrying = ((self.carrier(stream), 1),) if with_flow else ()
        moving = ((self.flow(stream, "mass_flow"), 1),) if with_flow else ()
        terms = [Term(sign, (*carrying, (h, 1)), "", "flow enthalpy", stream.id)]
        if f"{stream.id}.velocity" in self.model.index:
            velocity = self.flow(stream, "velocity")
            terms.append(Term(0.5 * sign, (*moving, (velocity, 2)), "½", "kinetic energy", stream.id))
        if f"{stream.id}.elevation" in self.model.index:
            z = self.flow(stream, "elevation")
            symbol = f"{STANDARD_GRAVITY} m/s²"
            terms.append(Term(STANDARD_GRAVITY * sign, (*moving, (z, 1)), symbol, "potential energy", stream.id))
        return terms

    def drop_dependent_energy_balance(self) -> None:
        """Of boundaries that exchange energy only among themselves, one balance follows from the others."""
        numbers = {e.boundary: i for i, e in enumerate(self.built.energy_balances)}
        links, open_ends = [], set()
        crossings = [(s.source, s.target) for s in self.case.streams]
        crossings += [(t.source, t.target) for t in self.case.transfers]
        for source, target in crossings:
            ends = [numbers.get(b) if b is not None else None for b in (source, target)]
            if ends[0] is not None and ends[1] is not None:
                links.append((ends[0], ends[1]))
            else:
                open_ends |= {e for e in ends if e is not None}
        for group in connected_groups(range(len(numbers)), links):
            if len(group) > 1 and not open_ends & set(group):
                balance = self.built.energy_balances[group[-1]].solved
                self.model.equations.remove(balance)
                self.model.implied.append(balance)

    def transfer_law(self, transfer_id: str) -> None:
        transfer = self.transfers[transfer_id]
        for name in transfer.quantities:
            self.variable(transfer_id, name, self._transfer_trait(transfer_id, name))
        rate = self.variable(transfer_id, "rate", TRANSFER["rate"])
        if transfer.has_law:
            stream = self._facing_stream(transfer_id)
            ua = self.variable(transfer_id, "UA", TRANSFER["UA"])
            source = self.variable(transfer_id, "source_temperature", TRANSFER["source_temperature"])
            inward = 1.0 if transfer.target is not None else -1.0
            self._equation(
                f"heat transfer law of {transfer_id}",
                Term(1.0, ((rate, 1),)),
                Term(-inward, ((ua, 1), (source, 1))),
                Term(inward, ((ua, 1), (self.state(stream, "T"), 1))),
            )
        if transfer.kind == "fuel":
            flow = "normal_volume_flow" if "normal_volume_flow" in transfer.quantities else "mass_flow"
            if "heating_value" in transfer.quantities or flow in transfer.quantities:
                amount = self.variable(transfer_id, flow, TRANSFER[flow])
                value = self.variable(transfer_id, "heating_value", self._transfer_trait(transfer_id, "heating_value"))
                self._equation(
                    f"energy of {transfer_id}", Term(1.0, ((rate, 1),)), Term(-1.0, ((amount, 1), (value, 1)))
                )

    def _transfer_trait(self, transfer_id: str, name: str) -> Trait:
        by_volume = "normal_volume_flow" in self.transfers[transfer_id].quantities
        if name == "heating_value" and by_volume:
            return Trait("volumetric_heating_value", 1e7, 0.0)
        return TRANSFER[name]

    def _facing_stream(self, transfer_id: str) -> Stream:
        """The stream whose temperature drives a heat transfer law: the named one, else the only one leaving."""
        transfer = self.transfers[transfer_id]
        if transfer.law_stream is not None:
            return self.streams[transfer.law_stream]
        boundary = transfer.target if transfer.target is not None else transfer.source
        leaving = [s for s in self.case.streams if s.source == boundary]
        if len(leaving) == 1:
            self.built.assumptions.append(
                f"{transfer_id}: the temperature inside {boundary} is taken as that of {leaving[0].id} (well stirred)."
            )
            return leaving[0]
        raise SchemaViolation(
            f"{transfer_id}: which stream's temperature faces the source?", address=f"{transfer_id}.source_temperature",
            hint="Name the stream as `of` inside the law.",
        )  # fmt: skip

    def give_starting_points(self) -> None:
        """Temperatures and pressures start from the mean of what is given; flows from the largest given flow."""
        by_suffix: dict[str, list[float]] = {}
        for number, value in self.model.given.items():
            by_suffix.setdefault(self.model.variables[number].name.rpartition(".")[2], []).append(float(value))
        flows = [abs(v) for v in by_suffix.get("mass_flow", []) if v]
        for variable in self.model.variables:
            name = variable.name.rpartition(".")[2]
            if name == "T" and by_suffix.get("T"):
                variable.start = sum(by_suffix["T"]) / len(by_suffix["T"])
            elif name == "p" and by_suffix.get("p"):
                variable.start = math.exp(sum(math.log(max(p, 1.0)) for p in by_suffix["p"]) / len(by_suffix["p"]))
            elif name in ("mass_flow", "dry_air_flow"):
                variable.start = variable.scale = max(flows, default=1.0)
