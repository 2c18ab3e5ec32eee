"""From a finished run to a Solution: states, ledger, steps, assumptions, and what was given twice."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence

from service.balance.builder import BuiltCase
from service.balance.case import Content
from service.balance.solution import (
    FluidSource,
    Found,
    LedgerAccount,
    LedgerLine,
    Method,
    Solution,
    StepRecord,
    StreamState,
    StructureReport,
    SurplusCheck,
)
from service.balance.state_node import FoundState, StateNode
from service.engine.affine import is_algebraic
from service.engine.execute import Run
from service.engine.model import TINY, Equation, Polynomial, Show, Term, Values
from service.engine.plan import Closing, EquationCloses, Lookup, Plan, Rearranged, Step

WORK = {"shaft work", "electrical work", "expansion work"}
STREAM_FLOWS = (
    "mass", "mass_flow", "dry_air_flow", "molar_flow", "volume_flow", "normal_volume_flow",
    "velocity", "bore", "elevation",
)  # fmt: skip


def report(built: BuiltCase, plan: Plan, done: Run, surplus: list[SurplusCheck]) -> Solution:
    """Everything an answer tells that follows from the run itself."""
    names = [v.name for v in built.model.variables]
    index = built.model.index
    answers = {
        q.address: Found(q.address, built.kinds[index[q.address]], float(done.values[index[q.address]]))
        for q in built.case.quantities()
        if q.wanted
    }
    return Solution(
        case=built.case,
        status="solved",
        names=names,
        kinds=built.kinds,
        values=done.values,
        answers=answers,
        states=_states(built, done),
        ledger=_ledger(built, done),
        steps=[_step(plan, done, step, done.residuals.get(i, 0.0)) for i, step in enumerate(plan.steps)],
        surplus=surplus,
        entropy=[],
        assumptions=[*built.assumptions, *_assumptions(built)],
        sources=_sources(built),
    )


def structure_report(built: BuiltCase, plan: Plan) -> StructureReport:
    """What the plan would find, in order, and what stays open."""
    names = [v.name for v in built.model.variables]
    found = [names[v] for step in plan.steps for v in _found_by(step)]
    surplus = [_closing_name(built, closing) for closing in plan.surplus]
    ties = sum(len(set(n.members.values())) - n.dof for n in built.model.nodes)
    return StructureReport(
        equations=len(built.model.equations) + ties,
        unknowns=tuple(found),
        undetermined=tuple(sorted(names[v] for v in plan.undetermined)),
        surplus=tuple(surplus),
        assumptions=(*built.assumptions, *_assumptions(built)),
    )


def _found_by(step: Step) -> Sequence[int]:
    if isinstance(step, Rearranged):
        return (step.variable,)
    return [v for _, v in step.found] if isinstance(step, Lookup) else step.variables


# -- states ----------------------------------------------------------------------------------------------------


def _states(built: BuiltCase, done: Run) -> list[StreamState]:
    states = []
    for stream in built.case.streams:
        fluid = built.fluids[stream.id]
        number = built.state_nodes.get(stream.id)
        looked_up = done.lookups.get(number) if number is not None else None
        properties: dict[str, float] = {}
        phase = ""
        if isinstance(looked_up, FoundState):
            properties, phase = looked_up, looked_up.phase
        elif number is not None:
            members = built.model.nodes[number].members
            properties = {n: done.values[v] for n, v in members.items() if math.isfinite(done.values[v])}
        flows = {
            name: float(done.values[v])
            for name in STREAM_FLOWS
            if (v := built.model.index.get(f"{stream.id}.{name}")) is not None and math.isfinite(done.values[v])
        }
        if "volume_flow" not in flows and "mass_flow" in flows and "rho" in properties:
            flows["volume_flow"] = flows["mass_flow"] / properties["rho"]
        states.append(StreamState(stream.id, fluid.name if fluid else "", phase, properties, flows))
    return states + [s for c in built.case.contents for s in _content_states(built, done, c)]


def _content_states(built: BuiltCase, done: Run, content: Content) -> Iterator[StreamState]:
    """The states of a content from its initial one to its final one."""
    fluid = built.fluids[content.id]
    for key, number in sorted(built.state_nodes.items(), key=lambda item: item[1]):
        if key.partition(".")[0] != content.id:
            continue
        looked_up = done.lookups.get(number)
        properties, phase = (looked_up, looked_up.phase) if isinstance(looked_up, FoundState) else ({}, "")
        held = {
            name: float(done.values[v])
            for name in ("mass", "volume", "velocity", "elevation")
            if (v := built.model.index.get(f"{key}.{name}", built.model.index.get(f"{content.id}.{name}"))) is not None
            and math.isfinite(done.values[v])
        }
        if "mass" in held and "v" in properties:
            held["volume"] = held["mass"] * properties["v"]
        yield StreamState(key, fluid.name if fluid else "", phase, properties, held)


# -- ledger ----------------------------------------------------------------------------------------------------


def _ledger(built: BuiltCase, done: Run) -> list[LedgerAccount]:
    amount, energy_kind = ("mass_flow", "power") if built.case.system == "steady_flow" else ("mass", "energy")
    accounts = []
    for circuit, balance in zip(built.circuits, built.mass_balances, strict=True):
        if _known(balance, done.values):
            label = " ".join(part for part in (circuit.label, circuit.component) if part)
            accounts.append(_account(circuit.boundary, "mass", label, amount, balance, done.values))
    for energy in built.energy_balances:
        if _known(energy.whole, done.values):
            accounts.append(_account(energy.boundary, "energy", "", energy_kind, energy.whole, done.values))
        elif energy.solved is not energy.whole and _known(energy.solved, done.values):
            accounts.append(
                _account(energy.boundary, "energy", "per unit mass", "specific_energy", energy.solved, done.values)
            )
    order = {b.id: i for i, b in enumerate(built.case.boundaries)}
    return sorted(accounts, key=lambda a: order[a.boundary])


def _known(equation: Equation, values: Values) -> bool:
    return all(math.isfinite(values[v]) for v in equation.variables)


def _account(boundary: str, of: str, circuit: str, kind: str, balance: Polynomial, values: Values) -> LedgerAccount:
    lines = tuple(
        LedgerLine(term.label, term.of, _term_text(term), float(term.value(values)), term.label in WORK)
        for term in balance.terms
    )
    total = float(balance.residual(values))
    closure = abs(total) / max(max((abs(line.value) for line in lines), default=0.0), TINY)
    assert of in ("mass", "energy")
    return LedgerAccount(boundary, of, circuit, kind, lines, total, closure)  # type: ignore[arg-type]


def _term_text(term: Term) -> Callable[[Show], str]:
    sign = "−" if term.coefficient < 0 else ""
    return lambda show: sign + term.text(show)


# -- steps -----------------------------------------------------------------------------------------------------


def _step(plan: Plan, done: Run, step: Step, residual: float) -> StepRecord:
    model = plan.model
    if isinstance(step, Rearranged):
        equation, variable = model.equations[step.equation], step.variable

        def rearranged(show: Show) -> str:
            return equation.text(show, variable, done.values)

        return StepRecord("rearranged", equation.name, (variable,), rearranged)
    if isinstance(step, Lookup):
        node = model.nodes[step.node]
        found = tuple(v for _, v in step.found)
        return StepRecord("property lookup", node.name, found, _lookup_text(node, step))
    inner = tuple(_step(plan, done, s, 0.0) for s in step.inner)
    names = " and ".join(_closing_text_name(plan, c) for c in step.closings)

    def text(show: Show) -> str:
        return "; ".join(_closing_text(plan, c, show, done.values) for c in step.closings)

    one_curve = len(step.assumed) == 1 and not is_algebraic(step)
    method: Method = "bracketed root" if one_curve else "simultaneous"
    return StepRecord(method, names, step.assumed, text, residual, inner)


def _lookup_text(node: object, step: Lookup) -> Callable[[Show], str]:
    assert isinstance(node, StateNode)
    members = [name for name, _ in step.found] or ["phase"]
    return lambda show: node.text(", ".join(members), step.inputs, show)


def _closing_text_name(plan: Plan, closing: Closing) -> str:
    if isinstance(closing, EquationCloses):
        return plan.model.equations[closing.equation].name
    return plan.model.nodes[closing.node].name


def _closing_text(plan: Plan, closing: Closing, show: Show, values: Values) -> str:
    if isinstance(closing, EquationCloses):
        return plan.model.equations[closing.equation].text(show, None, values)
    return f"{plan.model.nodes[closing.node].text(closing.member, closing.inputs, show)} = {show(closing.variable)}"


# -- what was given twice --------------------------------------------------------------------------------------


def _closing_name(built: BuiltCase, closing: Closing) -> str:
    if isinstance(closing, EquationCloses):
        return built.model.equations[closing.equation].name
    return f"{built.model.nodes[closing.node].name} ({closing.member} from {', '.join(closing.inputs)})"


def surplus_check(built: BuiltCase, closing: Closing, done: Run, off: float) -> SurplusCheck:
    """Both values of something that is known twice, and their disagreement."""
    names = built.model.variables
    if not isinstance(closing, EquationCloses):
        implied = done.lookups[closing.node][closing.member]
        held = float(done.values[closing.variable])
        return SurplusCheck(_closing_name(built, closing), names[closing.variable].name, held, implied, off)
    equation = built.model.equations[closing.equation]
    variable = _most_telling(built, equation)
    held = float(done.values[variable])
    implied = float(equation.solve(variable, done.values)) if equation.can_solve(variable) else math.nan
    return SurplusCheck(equation.name, names[variable].name, held, implied, off)


def _most_telling(built: BuiltCase, equation: Equation) -> int:
    """The quantity by which a disagreement is best told: a given rate or flow before anything else."""

    def rank(v: int) -> tuple[bool, bool, int]:
        property_name = built.model.variables[v].name.rpartition(".")[2]
        order = ("rate", "value", "mass_flow", "dry_air_flow", "T", "h", "p")
        position = order.index(property_name) if property_name in order else len(order)
        return not equation.can_solve(v), v not in built.model.given, position

    return min(equation.variables, key=rank)


# -- assumptions and sources -----------------------------------------------------------------------------------


def _assumptions(built: BuiltCase) -> list[str]:
    case = built.case
    out = []
    energetic = [e.boundary for e in built.energy_balances]
    heated = {b for t in case.transfers if t.kind in ("heat", "fuel") for b in (t.source, t.target)}
    worked = {b for t in case.transfers if t.kind not in ("heat", "fuel") for b in (t.source, t.target)}
    if adiabatic := [b for b in energetic if b not in heated]:
        out.append(f"No heat crosses {_listed(adiabatic)}: none is listed (adiabatic).")
    worked |= {c.boundary for c in case.contents if c.process}
    if workless := [b for b in energetic if b not in worked]:
        out.append(f"No work crosses {_listed(workless)}: none is listed.")
    told = [s.id for s in case.streams if {s.source, s.target} & set(energetic)]
    told += [c.id for c in case.contents]
    if still := [s for s in told if not _moves(built, s, "velocity")]:
        out.append(f"Kinetic energy is neglected for {_listed(still)}: neither velocity nor bore is given.")
    if level := [s for s in told if not _moves(built, s, "elevation")]:
        out.append(f"Potential energy is neglected for {_listed(level)}: no elevation is given.")
    if not case.site.pressure_given:
        out.append(f"Atmospheric pressure at the site is taken as {case.site.atmospheric_pressure / 1e3:g} kPa.")
    massive = [b.id for b in case.boundaries if b.id not in energetic]
    if massive:
        out.append(f"Balanced for mass only, since nothing is said of any state: {_listed(massive)}.")
    return out


def _moves(built: BuiltCase, item: str, name: str) -> bool:
    """Whether anything is said of a stream's or content's velocity or elevation."""
    return any(f"{item}.{end}{name}" in built.model.index for end in ("", "initial.", "final."))


def _listed(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def _sources(built: BuiltCase) -> list[FluidSource]:
    sources: dict[str, FluidSource] = {}
    for fluid in built.fluids.values():
        if fluid is not None and fluid.name not in sources:
            p = fluid.provenance
            sources[fluid.name] = FluidSource(fluid.name, p.model, p.citation, p.reference_state)
    return list(sources.values())
