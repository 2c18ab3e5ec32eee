"""Balances over a period, between two states: what a boundary holds at first and at last, and what crossed meanwhile.

    initial + in − out + heat + work − final = 0

for mass (by substance) and for energy: internal, kinetic and potential energy of the contents, enthalpy, kinetic and
potential energy of the streams at their constant state, heat, shaft and electrical work, fuel, and the expansion work
of the contents.
"""

from __future__ import annotations

from collections.abc import Mapping

from service.balance.balances import add_transfer, stream_energy, transfers_of
from service.balance.builder import Builder, EnergyBalance
from service.balance.case import STANDARD_GRAVITY, Case, Content
from service.balance.network import Circuit
from service.balance.processes import add_process, work_terms
from service.balance.properties import TRANSFER
from service.engine.model import Polynomial, Term
from service.errors import Issue, SchemaViolation
from service.fluids.protocol import Fluid

INCOMPRESSIBLE = ("solid", "constant_liquid", "brine")


def refuse_humid_air(case: Case, fluids: Mapping[str, Fluid | None]) -> None:
    """Humid air counts by its dry air, which a content does not: SchemaViolation where it is held or flows in."""
    places = [(c.id, c.pointer) for c in case.contents] + [(s.id, s.pointer) for s in case.streams]
    for name, pointer in places:
        fluid = fluids[name]
        if fluid is not None and fluid.kind == "humid_air":
            text = f"{name}: humid air is balanced in steady flow only."
            hint = "Here declare a gas_mixture with the mole fractions of dry air and water, where none condenses."
            raise SchemaViolation(text, [Issue(text, name, hint, pointer)])


def add_contents(builder: Builder) -> None:
    """Variables for everything that is said of the contents, and the equations of their processes."""
    for content in builder.case.contents:
        for address in content.quantities:
            if not address.startswith("wall."):
                builder.content_quantity(content, address)
        _default_pressures(builder, content)
    for content in builder.case.contents:
        add_process(builder, content)


def _default_pressures(builder: Builder, content: Content) -> None:
    """A solid, or a liquid of a simple model, of which nobody says the pressure, is at the site's."""
    fluid = builder.built.fluids[content.id]
    assert fluid is not None
    if fluid.kind not in INCOMPRESSIBLE:
        return
    said = {name.rpartition(".")[2] for name in content.quantities}
    if "p" in said or content.process:
        return
    for end in ("initial", "final"):
        builder.model.given[builder.content_state(content, end, "p")] = builder.case.site.atmospheric_pressure
    builder.built.assumptions.append(
        f"No pressure is given for {content.id}: atmospheric is taken; its properties hardly depend on it."
    )


def add_total_mass_balances(builder: Builder) -> None:
    """One balance a substance and boundary, where mass is exchanged; the mass of a closed content is one variable."""
    kept = []
    for circuit in builder.built.circuits:
        balance = Polynomial.of(circuit.name, _mass_terms(builder, circuit))
        kept.append(circuit)
        builder.built.mass_balances.append(balance)
        builder.model.equations.append(balance)
    for content in builder.case.contents:
        if not builder.exchanges_mass(content):
            mass = builder.content_quantity(content, "mass")
            terms = [
                Term(1.0, ((mass, 1),), "", "initial mass", content.id),
                Term(-1.0, ((mass, 1),), "", "final mass", content.id),
            ]
            kept.append(Circuit(content.boundary, content.id, "", (), ()))
            builder.built.mass_balances.append(Polynomial.of(f"mass balance of {content.boundary}", terms))
    builder.built.circuits = kept


def _mass_terms(builder: Builder, circuit: Circuit) -> list[Term]:
    """Initial and final masses of the circuit's contents, and the streams' totals."""
    streams = [builder.case.streams[n] for n in (*circuit.inflows, *circuit.outflows)]
    fluid = builder.built.fluids[streams[0].id]
    held = [c for c in builder.case.contents if c.boundary == circuit.boundary and builder.built.fluids[c.id] is fluid]
    terms = [_content_mass(builder, c, "initial", 1.0) for c in held]
    for numbers, sign in ((circuit.inflows, 1.0), (circuit.outflows, -1.0)):
        for number in numbers:
            stream = builder.case.streams[number]
            terms.append(Term(sign, ((builder.flow(stream, "mass"), 1),), "", "mass", stream.id))
    return terms + [_content_mass(builder, c, "final", -1.0) for c in held]


def _content_mass(builder: Builder, content: Content, end: str, sign: float) -> Term:
    return Term(sign, ((builder.content_quantity(content, f"{end}.mass"), 1),), "", f"{end} mass", content.id)


def add_total_energy_balance(builder: Builder, boundary: str) -> None:
    """Energy of one boundary over the period."""
    held = [c for c in builder.case.contents if c.boundary == boundary]
    terms = [t for c in held for t in _content_energy(builder, c, "initial", 1.0)]
    for end in builder.ends[boundary]:
        terms += stream_energy(builder, end.stream, 1.0 if end.enters else -1.0, with_flow=True)
    for transfer, sign in transfers_of(builder, boundary):
        energy = builder.variable(transfer.id, "energy", TRANSFER["energy"])
        terms.append(Term(sign, ((energy, 1),), "", transfer.kind.replace("_", " "), transfer.id))
    terms += [t for c in held for t in work_terms(builder, c)]
    terms += [t for c in held for t in _content_energy(builder, c, "final", -1.0)]
    if not terms:
        text = f"The boundary {boundary} holds nothing, and nothing crosses it."
        pointer = next(b.pointer for b in builder.case.boundaries if b.id == boundary)
        raise SchemaViolation(text, [Issue(text, "", "Add `contents`, or leave it out.", pointer)])
    balance = Polynomial.of(f"energy balance of {boundary}", terms)
    builder.model.equations.append(balance)
    builder.built.energy_balances.append(EnergyBalance(boundary, balance, balance))


def _content_energy(builder: Builder, content: Content, end: str, sign: float) -> list[Term]:
    if builder.is_empty(content, end):
        return []
    mass = builder.content_quantity(content, f"{end}.mass")
    u = builder.content_state(content, end, "u")
    builder.content_state(content, end, "p"), builder.content_state(content, end, "T")
    terms = [Term(sign, ((mass, 1), (u, 1)), "", f"{end} internal energy", content.id)]
    if f"{content.id}.{end}.velocity" in builder.model.index:
        velocity = builder.content_quantity(content, f"{end}.velocity")
        terms.append(Term(0.5 * sign, ((mass, 1), (velocity, 2)), "½", f"{end} kinetic energy", content.id))
    if f"{content.id}.{end}.elevation" in builder.model.index:
        z = builder.content_quantity(content, f"{end}.elevation")
        factors = ((mass, 1), (z, 1))
        symbol = f"{STANDARD_GRAVITY} m/s²"
        terms.append(Term(STANDARD_GRAVITY * sign, factors, symbol, f"{end} potential energy", content.id))
    return terms


def add_accumulating_balances(builder: Builder) -> None:
    """All balances of a case over a period, and its transfers."""
    add_total_mass_balances(builder)
    for boundary in builder.case.boundaries:
        add_total_energy_balance(builder, boundary.id)
    for transfer in builder.case.transfers:
        add_transfer(builder, transfer.id)
