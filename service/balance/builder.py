"""From a case to the engine's model: one variable a quantity, one equation a statement of physics.

The builder owns the variables; the balances are written here, the relations in `relations`, the restriction in
`restriction`. Every variable is named by its address.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping
from dataclasses import dataclass, field

from service.balance.case import STATE_PROPERTIES, Case, Content, Quantity, Stream, Transfer
from service.balance.network import Circuit, circuits, ends_by_boundary, mass_only
from service.balance.properties import CONTENT, PROCESS, RELATION, STATE, STREAM, TOTAL, TRANSFER, Trait
from service.balance.state_node import StateNode
from service.engine.model import Model, Polynomial, Term
from service.errors import Issue, SchemaViolation
from service.fluids.protocol import Fluid

NORMAL_MOLAR_DENSITY = 101_325.0 / (8.314462618 * 273.15)
"""[mol/m3] ideal gas at 0 degC and 101.325 kPa; R by CODATA 2018."""

_FLOW_TRAITS = {**STREAM, **TOTAL}
_FLOWS = ("mass_flow", "dry_air_flow", "molar_flow", "volume_flow", "normal_volume_flow")
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
        self.accumulating = case.system != "steady_flow"
        self.amount, self.rate = ("mass", "energy") if self.accumulating else ("mass_flow", "rate")
        self.built = BuiltCase(case, dict(fluids))
        self.model = self.built.model
        self.streams = {s.id: s for s in case.streams}
        self.transfers = {t.id: t for t in case.transfers}
        self.relations = {r.id: r for r in case.relations}
        self.contents = {c.id: c for c in case.contents}
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
        order = {s.id: i for i, s in enumerate(self.case.streams)}
        metered = {s: any(f"{s}.{name}" in given for name in _FLOWS) for s in order}
        owner = {s: s for s in order}

        def find(s: str) -> str:
            while owner[s] != s:
                owner[s] = owner[owner[s]]
                s = owner[s]
            return s

        for circuit in self.built.circuits if not self.accumulating else ():
            if len(circuit.inflows) == len(circuit.outflows) == 1 and circuit.component != "water":
                a, b = (find(self.case.streams[n].id) for n in (circuit.inflows[0], circuit.outflows[0]))
                if a != b and not (metered[a] and metered[b]):
                    first, second = sorted((a, b), key=lambda s: (not metered[s], order[s]))
                    owner[second] = first
        return {s: find(s) for s in order}

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

    def alias(self, address: str, number: int) -> int:
        """Make a variable known under one more address, with what the case says of it there."""
        if address not in self.model.index:
            self.model.index[address] = number
            if address in self.quantities:
                self._apply(number, self.quantities[address])
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
        variable.steered = quantity.near is not None or quantity.between is not None

    def address(self, address: str) -> int:
        """The variable that an address names; flows and state properties come into being as they are mentioned."""
        item, _, name = address.partition(".")
        if item in self.contents:
            return self.content_quantity(self.contents[item], name)
        if item in self.streams:
            return self.stream_quantity(self.streams[item], name)
        if item in self.transfers:
            return self.variable(item, name, self.transfer_trait(item, name))
        relation = self.relations[item]
        if name == "value" and relation.kind not in RELATION:  # a difference, ratio or sum: the kind is what it ties
            return self.variable(item, name, Trait(relation.quantities[name].kind, 1.0))
        return self.variable(item, name, RELATION[relation.kind if name == "value" else name])

    def transfer_trait(self, transfer_id: str, name: str) -> Trait:
        """The trait of a transfer's quantity; a heating value beside a volume flow is per normal volume."""
        quantities = self.transfers[transfer_id].quantities
        if name == "heating_value" and ("normal_volume_flow" in quantities or "normal_volume" in quantities):
            return Trait("volumetric_heating_value", 1e7, 0.0)
        return TRANSFER[name]

    def stream_quantity(self, stream: Stream, name: str) -> int:
        return self.state(stream, name) if name in STATE_PROPERTIES else self.flow(stream, name)

    # -- states ------------------------------------------------------------------------------------------------

    def state(self, stream: Stream, name: str) -> int:
        """The variable of a state property of a stream, as a member of the stream's node."""
        return self._member(self._node(stream), stream.id, name)

    def _member(self, number: int, item: str, name: str) -> int:
        """The variable of a property as a member of a state's node; made a member when it is new there."""
        node = self.model.nodes[number]
        assert isinstance(node, StateNode)
        if name not in node.members:
            if name not in node.fluid.properties:
                raise SchemaViolation(
                    f"{item}.{name} is not a property of {node.fluid.name}.",
                    address=f"{item}.{name}",
                    hint=f"Its properties are {', '.join(node.fluid.properties)}.",
                )
            node.members[name] = self.property_variable(item, name, node.fluid)
        return node.members[name]

    def property_variable(self, item: str, name: str, fluid: Fluid) -> int:
        trait = STATE[name]
        if name in ("p", "T"):
            lower, upper = fluid.bounds(name)
            trait = Trait(trait.kind, trait.scale, lower, upper)
        number = self.variable(item, name, trait)
        if name == "h" and self.model.variables[number].start is None:
            self.model.variables[number].start = 0.5 * sum(fluid.bounds("h"))
        return number

    def fluid(self, stream: Stream) -> Fluid:
        """The property model of a stream. Raises SchemaViolation where none is known."""
        fluid = self.built.fluids[stream.id]
        if fluid is None:
            text = f"Stream {stream.id} has a state but no fluid."
            raise SchemaViolation(text, [Issue(text, stream.id, "Add `fluid`.", stream.pointer)])
        return fluid

    def _node(self, stream: Stream) -> int:
        number = self.built.state_nodes.get(stream.id)
        if number is None:
            number = self.built.state_nodes[stream.id] = len(self.model.nodes)
            self.model.nodes.append(StateNode(f"state of {stream.id}", stream.id, self.fluid(stream)))
        return number

    def auxiliary_state(self, name: str, owner: str, fluid: Fluid, members: Mapping[str, int]) -> StateNode:
        """A state that belongs to no stream (an ideal end point), sharing variables with those that do."""
        node = StateNode(name, owner, fluid, dict(members))
        self.model.nodes.append(node)
        return node

    # -- contents ----------------------------------------------------------------------------------------------

    def content_quantity(self, content: Content, name: str) -> int:
        """The variable of a content's quantity, named by its address without the content's own id.

        mass, volume, expansion_work; process.n and stage-1.n; initial.p, final.T, stage-1.volume ...
        """
        end, _, inner = name.rpartition(".")
        if not end:
            if name == "volume":
                return self.alias(f"{content.id}.volume", self.content_quantity(content, "initial.volume"))
            if name == "mass" and self.exchanges_mass(content):
                return self.alias(f"{content.id}.mass", self.content_quantity(content, "initial.mass"))
            return self.variable(content.id, name, CONTENT[name])
        if inner in STATE_PROPERTIES:
            return self.content_state(content, end, inner)
        if inner == "mass" and not self.exchanges_mass(content):
            return self.alias(f"{content.id}.{name}", self.content_quantity(content, "mass"))
        if inner in PROCESS:
            return self.variable(f"{content.id}.{end}", inner, PROCESS[inner])
        known = self.model.index.get(f"{content.id}.{name}")
        if known is not None:
            return known
        number = self.variable(f"{content.id}.{end}", inner, CONTENT[inner] if inner in CONTENT else STREAM[inner])
        if inner == "volume" and not self.is_empty(content, end):
            mass = self.content_quantity(content, f"{end}.mass")
            v = self.content_state(content, end, "v")
            self.equation(f"volume of {content.id}, {end}", Term(1.0, ((number, 1),)), Term(-1.0, ((mass, 1), (v, 1))))
        return number

    def exchanges_mass(self, content: Content) -> bool:
        """Whether streams of the content's fluid cross its boundary, so that its mass changes."""
        return any(
            self.built.fluids[end.stream.id] is self.built.fluids[content.id] for end in self.ends[content.boundary]
        )

    def is_empty(self, content: Content, end: str) -> bool:
        """Whether a content is said to have no mass at one of its ends (an evacuated vessel): it then has no state."""
        quantity = self.quantities.get(f"{content.id}.{end}.mass")
        if quantity is None and end == "initial" and self.exchanges_mass(content):
            quantity = self.quantities.get(f"{content.id}.mass")
        return quantity is not None and quantity.value == 0.0

    def content_state(self, content: Content, end: str, name: str) -> int:
        """The variable of a state property of a content at one end of its process."""
        fluid = self.built.fluids[content.id]
        assert fluid is not None  # a content always names its fluid
        key = f"{content.id}.{end}"
        number = self.built.state_nodes.get(key)
        if number is None:
            number = self.built.state_nodes[key] = len(self.model.nodes)
            self.model.nodes.append(StateNode(f"{end.replace('-', ' ')} state of {content.id}", key, fluid))
        return self._member(number, key, name)

    # -- flows -------------------------------------------------------------------------------------------------

    def is_humid(self, stream: Stream) -> bool:
        fluid = self.built.fluids[stream.id]
        return fluid is not None and fluid.kind == "humid_air"

    def carrier(self, stream: Stream) -> int:
        """The flow that carries the stream's specific properties: dry air for humid air, the mass flow otherwise."""
        return self.flow(stream, "dry_air_flow" if self.is_humid(stream) else self.amount)

    def flow(self, stream: Stream, name: str) -> int:
        """The variable of a flow quantity of a stream, with the equation that ties it to the mass flow."""
        if f"{stream.id}.{name}" in self.model.index:
            return self.model.index[f"{stream.id}.{name}"]
        if self.is_humid(stream) and name in ("mass_flow", "dry_air_flow"):
            return self._moist_flows(stream)[name]
        if name == self.amount:
            return self._carrier_variable(stream, name)
        number = self.variable(stream.id, name, _FLOW_TRAITS[name])
        if name in ("molar_flow", "normal_volume_flow"):
            self._tie_amount(stream, name, number)
        elif name == "volume_flow":
            m, rho = self.flow(stream, "mass_flow"), self.state(stream, "rho")
            self.equation(f"volume flow of {stream.id}", Term(1.0, ((m, 1),)), Term(-1.0, ((rho, 1), (number, 1))))
        elif name == "bore":
            m, rho, velocity = self.flow(stream, "mass_flow"), self.state(stream, "rho"), self.flow(stream, "velocity")
            self.equation(
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

    def _carrier_variable(self, stream: Stream, name: str) -> int:
        """The stream's own flow variable, or the one it shares, made known under this stream's address too."""
        owner = self._flow_of[stream.id]
        if owner == stream.id:
            return self.variable(stream.id, name, _FLOW_TRAITS[name])
        return self.alias(f"{stream.id}.{name}", self.flow(self.streams[owner], name))

    def _moist_flows(self, stream: Stream) -> dict[str, int]:
        """Total and dry-air flow of a humid stream, tied by its humidity ratio."""
        dry = self._carrier_variable(stream, "dry_air_flow")
        total = self.variable(stream.id, "mass_flow", STREAM["mass_flow"])
        w = self.state(stream, "humidity_ratio")
        terms = (Term(1.0, ((total, 1),)), Term(-1.0, ((dry, 1),)), Term(-1.0, ((dry, 1), (w, 1))))
        self.equation(f"moist flow of {stream.id}", *terms)
        return {"mass_flow": total, "dry_air_flow": dry}

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
        self.equation(
            f"{name.replace('_', ' ')} of {stream.id}",
            Term(1.0, ((m, 1),)),
            Term(-per_unit, ((number, 1),), f"{per_unit:.9g} {unit}"),
        )

    def equation(self, name: str, *terms: Term) -> Polynomial:
        equation = Polynomial.of(name, terms)
        self.model.equations.append(equation)
        return equation
