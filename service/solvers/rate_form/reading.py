"""From the case to numbers: which are given, and which unknown constant is sought by the targets."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

from service.balance.builder import NORMAL_MOLAR_DENSITY
from service.balance.case import STATE_PROPERTIES, Case, Content, Quantities, Quantity, Stream, Table, Transfer
from service.errors import CaseError, Issue, SchemaViolation, UnderSpecified
from service.fluids.protocol import Fluid, State

FLOWS = ("mass_flow", "molar_flow", "volume_flow", "normal_volume_flow")
PLACEHOLDER = math.nan


@dataclass(slots=True)
class Reader:
    """Reads quantities. trial: values [SI] of the unknown constants; unknowns: those that are asked for and needed."""

    case: Case
    fluids: Mapping[str, Fluid | None]
    trial: Mapping[str, float] = field(default_factory=dict)
    unknowns: dict[str, Quantity] = field(default_factory=dict)
    assumptions: list[str] = field(default_factory=list)

    def maybe(self, of: Quantities, name: str) -> float | None:
        """The value [SI] of a quantity that may be left out; an unknown constant has its trial value."""
        quantity = of.get(name)
        if quantity is None:
            return None
        if quantity.value is not None:
            return quantity.value
        if quantity.wanted:
            self.unknowns.setdefault(quantity.address, quantity)
            return self.trial.get(quantity.address, PLACEHOLDER)
        return None

    def need(self, of: Quantities, name: str, owner: str, pointer: str, hint: str = "") -> float:
        """The value [SI] of a quantity that must be there. Raises UnderSpecified."""
        value = self.maybe(of, name)
        if value is None:
            text = f"{owner}.{name} is not given."
            raise UnderSpecified(text, [Issue(text, f"{owner}.{name}", hint or "Give it, or ask for it.", pointer)])
        return value

    def fluid(self, item: str, pointer: str) -> Fluid:
        """The property model of a stream or content. Raises SchemaViolation."""
        fluid = self.fluids.get(item)
        if fluid is None:
            raise SchemaViolation(f"{item} has no fluid.", [Issue(f"{item} has no fluid.", item, "Name it.", pointer)])
        if fluid.dof != 2:
            text = f"{item}: {fluid.name} cannot be followed in time: its state has {fluid.dof} degrees of freedom."
            raise SchemaViolation(text, [Issue(text, item, "Use air, or a gas mixture, in its place.", pointer)])
        return fluid

    # -- states --------------------------------------------------------------------------------------------------

    def state_of(self, fluid: Fluid, known: Mapping[str, float], owner: str, pointer: str, prefix: str = "") -> State:
        """The state that known properties fix. Raises UnderSpecified, StateOutOfRange, Contradictory."""
        inputs = fluid.inputs(known)
        if inputs is None and fluid.pressure_optional and "p" not in known:
            known = {**known, "p": self.case.site.atmospheric_pressure}
            self.assumptions.append(f"No pressure is given for {owner}: atmospheric is taken.")
            inputs = fluid.inputs(known)
        if inputs is None:
            text = f"The state of {owner} is not fixed: {', '.join(known) or 'nothing'} is known of it."
            hint = "Give two independent properties of p, T, h, u, s, x, rho."
            raise UnderSpecified(text, [Issue(text, owner, hint, pointer)])
        values = tuple(known[name] for name in inputs)
        if any(math.isnan(v) for v in values):
            return State(dict.fromkeys(("p", "T", "h", "s", "u", "rho", "v", "x"), math.nan), "")
        try:
            return fluid.state(inputs, values)
        except CaseError as error:
            issues = [
                Issue(f"{owner}: {i.detail}", f"{owner}.{prefix}{i.address or inputs[0]}", i.hint, amounts=i.amounts)
                for i in error.issues or (Issue(error.detail),)
            ]
            raise type(error)(f"{owner}: {error.detail}", issues) from error

    def known_state(self, of: Quantities, prefix: str = "", fluid: Fluid | None = None) -> dict[str, float]:
        """State properties that have a value; what is only asked for is taken for an unknown if nothing else fixes."""
        given = {
            name: q.value
            for name in STATE_PROPERTIES
            if (q := of.get(prefix + name)) is not None and q.value is not None
        }
        for name in STATE_PROPERTIES:
            quantity = of.get(prefix + name)
            if quantity is not None and quantity.address in self.trial:
                given[name] = self.trial[quantity.address]
        return given

    def supply(self, stream: Stream, fluid: Fluid) -> State:
        """The state of a stream from the surroundings."""
        known = self.known_state(stream.quantities)
        if fluid.inputs(known) is None:
            self._ask(stream.quantities, "", known)
        return self.state_of(fluid, known, stream.id, stream.pointer)

    def _ask(self, of: Quantities, prefix: str, known: dict[str, float]) -> None:
        """Take the first state property that is asked for as an unknown constant."""
        for name in STATE_PROPERTIES:
            quantity = of.get(prefix + name)
            if quantity is not None and quantity.wanted and quantity.address not in self.trial:
                self.unknowns.setdefault(quantity.address, quantity)
                known[name] = PLACEHOLDER
                return

    def initial(self, content: Content, fluid: Fluid, density: float | None) -> State:
        """The initial state of a content; its density [kg/m3] counts as a property where mass and volume are given."""
        known = self.known_state(content.quantities, "initial.")
        if density is not None and not math.isnan(density) and "v" not in known:
            known["rho"] = density
        if fluid.inputs(known) is None and not fluid.pressure_optional:
            self._ask(content.quantities, "initial.", known)
        return self.state_of(fluid, known, content.id, content.pointer, "initial.")

    # -- flows ---------------------------------------------------------------------------------------------------

    def mass_flow(self, stream: Stream, fluid: Fluid, supply: State | None) -> tuple[float, Table | None]:
        """(constant mass flow [kg/s], table of it). Raises UnderSpecified where nothing says how much flows."""
        for name in FLOWS:
            factor = self._per_unit(name, stream, fluid, supply)
            if name in stream.table:
                table = stream.table[name]
                return math.nan, Table(table.times, tuple(v * factor for v in table.values), table.between)
            if name in stream.quantities and (value := self.maybe(stream.quantities, name)) is not None:
                return value * factor, None
        text = f"Nothing says how much flows in {stream.id}."
        hint = "Give its mass_flow (a constant, or a table over time), or a restriction that it passes."
        raise UnderSpecified(text, [Issue(text, f"{stream.id}.mass_flow", hint, stream.pointer)])

    def _per_unit(self, name: str, stream: Stream, fluid: Fluid, supply: State | None) -> float:
        """Kilograms a unit of a flow."""
        if name == "mass_flow" or not (name in stream.quantities or name in stream.table):
            return 1.0
        if name == "volume_flow":
            if supply is None:
                text = f"{stream.id} draws from a vessel, whose density changes: a volume flow of it is not constant."
                raise SchemaViolation(text, [Issue(text, f"{stream.id}.volume_flow", "Give its mass_flow.")])
            return supply.values["rho"]
        if fluid.molar_mass is None:
            text = f"{fluid.name} has no molar mass, so {stream.id}.{name} says nothing of its mass."
            raise SchemaViolation(text, [Issue(text, f"{stream.id}.{name}", "Give its mass_flow.")])
        return fluid.molar_mass * (NORMAL_MOLAR_DENSITY if name == "normal_volume_flow" else 1.0)

    def rate(self, transfer: Transfer) -> tuple[float, Table | None]:
        """(constant rate [W], table of it) of a transfer without a law."""
        of = transfer.quantities
        if "rate" in transfer.table:
            return math.nan, transfer.table["rate"]
        if transfer.kind == "fuel" and "heating_value" in of:
            flow = next((n for n in ("mass_flow", "normal_volume_flow") if n in of or n in transfer.table), "mass_flow")
            value = self.need(of, "heating_value", transfer.id, transfer.pointer)
            if flow in transfer.table:
                table = transfer.table[flow]
                return math.nan, Table(table.times, tuple(v * value for v in table.values), table.between)
            return self.need(of, flow, transfer.id, transfer.pointer) * value, None
        return self.need(of, "rate", transfer.id, transfer.pointer), None


def asked(case: Case) -> Iterator[Quantity]:
    """Every quantity that is asked for, `until.time` included."""
    yield from (q for q in case.quantities() if q.wanted)
    if case.until.time is not None and case.until.time.wanted:
        yield case.until.time
