"""From a finished integration to a Solution: answers, states, ledger, steps, assumptions."""

from __future__ import annotations

import math
from collections.abc import Mapping

from service.balance.case import Case, Quantity
from service.balance.solution import (
    FluidSource,
    Found,
    Solution,
    StepRecord,
    StreamState,
    TransientResult,
)
from service.engine.model import Show
from service.errors import Issue, SchemaViolation
from service.fluids.protocol import Fluid
from service.solvers.rate_form.entropy import entropy_checks
from service.solvers.rate_form.history import columns_of, history, kind_of
from service.solvers.rate_form.integrate import ATOL, RTOL
from service.solvers.rate_form.plant import Moment
from service.solvers.rate_form.reading import asked
from service.solvers.rate_form.run import Done
from service.solvers.rate_form.totals import Register, Totals
from service.solvers.rate_form.vessels import Vessel

LOOKED_UP = ("p", "T", "h", "s", "u", "rho", "v", "x")


def tell(case: Case, fluids: Mapping[str, Fluid | None], done: Done) -> Solution:
    """Everything an answer tells."""
    register = Register()
    totals = Totals(done, register)
    columns = columns_of(case, done.plant)
    kinds = {address: kind_of(done.plant, address) for address in columns}
    read = history(case, done.plant, done.course, columns)
    course = done.course
    for address in read.extremes:
        kinds.setdefault(address, kind_of(done.plant, address))
    transient = TransientResult(
        end_reason={"time": "time", "condition": f"condition {course.text}", "stop": course.text}[course.ended_by],
        end_time=course.t, stopped=_stopped(done), times=read.times, columns=read.columns, kinds=kinds,
        events=list(course.notes), extremes=read.extremes, method=_method(done),
    )  # fmt: skip
    ledger = totals.accounts()
    answers = {q.address: _answer(done, totals, q) for q in asked(case)}
    return Solution(
        case=case, status="solved", names=register.names, kinds=register.kinds, values=register.values,
        answers=answers, states=_states(totals), ledger=ledger, steps=_steps(done, totals, register, answers),
        surplus=[], entropy=entropy_checks(totals), assumptions=_assumptions(case, done), sources=_sources(fluids),
        transient=transient,
    )  # fmt: skip


def _stopped(done: Done) -> str:
    course = done.course
    if course.ended_by != "stop":
        return ""
    return f"Stopped at t = {course.t:.6g} s, before what was asked: {course.text}."


def _method(done: Done) -> dict[str, float | int | str]:
    course = done.course
    found: dict[str, float | int | str] = {
        "integrator": "DOP853" if course.stiff_from is None else "DOP853, then BDF",
        "relative tolerance": RTOL,
        "absolute tolerance": ATOL,
        "evaluations": course.evaluations,
        "steps": course.steps,
        "refused": course.failures,
        "integrations": done.trials,
    }
    if course.stiff_from is not None:
        found["stiff from"] = course.stiff_from
    return found


# -- answers -----------------------------------------------------------------------------------------------------------


def _answer(done: Done, totals: Totals, quantity: Quantity) -> Found:
    """The value of a quantity that was asked for: what was sought, what was at first, else what is at the end."""
    address = quantity.address
    if address == "until.time" or quantity is done.reader.case.until.time:
        return Found(address, "time", done.course.t)
    if address in done.reader.trial:
        return Found(address, quantity.kind, done.reader.trial[address])
    item, _, name = address.partition(".")
    for n, vessel in enumerate(done.plant.vessels):
        if item in (vessel.id, vessel.boundary) and (name in ("mass", "volume") or name.startswith("initial.")):
            return Found(address, quantity.kind, _at_first(vessel, name.removeprefix("initial."), totals.start, n))
    try:
        kind_of(done.plant, address)
        value = done.plant.value(address, totals.final, done.course.y)
    except (KeyError, SchemaViolation):
        text = f"{address} is not found in the rate form."
        raise SchemaViolation(text, [Issue(text, address, "Give it, or leave it out.", quantity.pointer)]) from None
    return Found(address, quantity.kind, value)


def _at_first(vessel: Vessel, name: str, start: Moment, n: int) -> float:
    if name == "mass":
        return vessel.mass
    if name == "volume":
        return vessel.volume or vessel.mass / start.held[n].state.values["rho"]
    return start.held[n].value(name)


# -- states ------------------------------------------------------------------------------------------------------------


def _states(totals: Totals) -> list[StreamState]:
    out = []
    for i, flow in enumerate(totals.plant.flows):
        now = totals.final.carried[i]
        flows = {
            "mass": totals.flow_total(i, 0), "mass_flow": now.mass_flow,
            "volume_flow": now.mass_flow / now.state.values["rho"],
        }  # fmt: skip
        if flow.moves:
            flows["velocity"] = math.sqrt(2.0 * now.kinetic)
        if flow.elevation is not None:
            flows["elevation"] = flow.elevation
        out.append(StreamState(flow.id, flow.fluid.name, now.state.phase, _properties(now.state.values), flows))
    for n, vessel in enumerate(totals.plant.vessels):
        for end, mass, moment in (
            ("initial", vessel.mass, totals.start),
            ("final", totals.final.held[n].mass, totals.final),
        ):
            state = moment.held[n].state
            empty = mass == 0.0
            held = {"mass": mass, "volume": vessel.volume or mass / state.values["rho"]}
            properties = {} if empty else _properties(state.values)
            phase = "" if empty else state.phase
            out.append(StreamState(f"{vessel.id}.{end}", vessel.fluid.name, phase, properties, held))
    return out


def _properties(values: Mapping[str, float]) -> dict[str, float]:
    return {name: values[name] for name in LOOKED_UP if name in values}


# -- steps -------------------------------------------------------------------------------------------------------------


def _steps(done: Done, totals: Totals, register: Register, answers: Mapping[str, Found]) -> list[StepRecord]:
    steps = []
    for n, vessel in enumerate(done.plant.vessels):
        steps.append(_beginning(n, vessel, totals, register))
    closure = {a.boundary: a.closure for a in totals.accounts() if a.of == "energy"}
    for n, vessel in enumerate(done.plant.vessels):
        steps.append(_integration(done, n, vessel, totals, register, closure[vessel.boundary]))
    end = register.number("until.time", "time", done.course.t)
    reason = done.course.text or "the time asked for"
    steps.append(
        StepRecord("time integration", "end of the integration", (end,), lambda show: f"t = {show(end)}: {reason}")
    )
    for address, value in done.reader.trial.items():
        number = register.number(address, done.reader.unknowns[address].kind, value)
        target = done.reader.case.targets[0]
        goal = register.number(f"target {target.of}", target.value.kind, target.value.value or 0.0)
        steps.append(_shot(number, goal, target.of, target.at, done.trials))
    for address, found in answers.items():
        register.number(address, found.kind, found.value)
    return steps


def _shot(number: int, goal: int, of: str, at: float | None, trials: int) -> StepRecord:
    when = "at the end" if at is None else f"at t = {at:g} s"

    def text(show: Show) -> str:
        return f"{of} {when} ({show(number)}) = {show(goal)}, found over {trials} integrations"

    return StepRecord("bracketed root", f"target of {of}", (number,), text)


def _beginning(n: int, vessel: Vessel, totals: Totals, register: Register) -> StepRecord:
    state = totals.start.held[n].state.values
    kinds = {"p": "pressure", "T": "temperature", "u": "specific_energy", "rho": "density"}
    mass = register.number(f"{vessel.id}.initial.mass", "mass", vessel.mass)
    numbers = [register.number(f"{vessel.id}.initial.{k}", kind, state[k]) for k, kind in kinds.items()]
    density = numbers[-1]
    if vessel.volume is None:
        return StepRecord(
            "property lookup", f"state of {vessel.id} at first", tuple(numbers),
            lambda show: f"m = {show(mass)} at p = {show(numbers[0])}, T = {show(numbers[1])}",
        )  # fmt: skip
    volume = register.number(f"{vessel.id}.volume", "volume", vessel.volume)
    return StepRecord(
        "property lookup", f"state of {vessel.id} at first", (*numbers, mass),
        lambda show: f"m = V·rho = {show(volume)}·{show(density)} = {show(mass)}",
    )  # fmt: skip


def _integration(done: Done, n: int, vessel: Vessel, totals: Totals, register: Register, residual: float) -> StepRecord:
    """The balances of a vessel as they were integrated."""
    final = totals.final.held[n]
    kinds = {"p": "pressure", "T": "temperature", "u": "specific_energy"}
    numbers = [register.number(f"{vessel.id}.final.mass", "mass", final.mass)]
    numbers += [register.number(f"{vessel.id}.final.{k}", kind, final.state.values[k]) for k, kind in kinds.items()]
    mass, energy = _balance_texts(done, n, vessel)

    def text(show: Show) -> str:
        ends = f"m = {show(numbers[0])}, p = {show(numbers[1])}, T = {show(numbers[2])} at the end"
        return f"{mass}; {energy}; {ends}"

    return StepRecord("time integration", f"balances of {vessel.boundary} over time", tuple(numbers), text, residual)


def _balance_texts(done: Done, n: int, vessel: Vessel) -> tuple[str, str]:
    """dm/dt = ..., dU/dt = ... in symbols."""
    masses, energies = [], []
    for flow in done.plant.flows:
        for end, sign in ((flow.target, "+"), (flow.source, "−")):
            if end == n:
                whole = "h" + (" + w²/2" if flow.moves else "") + (" + g z" if flow.elevation is not None else "")
                whole = f"({whole})" if " " in whole else whole
                masses.append(f"{sign} ṁ({flow.id})")
                energies.append(f"{sign} ṁ({flow.id})·{whole}({flow.id})")
    for exchange in done.plant.exchanges:
        for end, sign in ((exchange.target, "+"), (exchange.source, "−")):
            if end == n:
                energies.append(f"{sign} {exchange.id}.rate")
    if vessel.wall is not None:
        energies.append("+ h_inside·A·(T_wall − T)")
    name = "U" if vessel.volume is not None else "H"
    flash = "(rho, u)" if vessel.volume is not None else "(p, h)"
    energy = f"d{name}/dt = {_sum(energies)}, state from {flash}"
    return f"dm/dt = {_sum(masses)}", energy


def _sum(terms: list[str]) -> str:
    return " ".join(terms).removeprefix("+ ") or "0"


# -- assumptions and sources -------------------------------------------------------------------------------------------


def _assumptions(case: Case, done: Done) -> list[str]:
    plant = done.plant
    out = list(dict.fromkeys(done.reader.assumptions))
    names = [v.id for v in plant.vessels]
    out.append(f"The content of {_listed(names)} is well mixed: one state at a time, in equilibrium with itself.")
    heated = {n for e in plant.exchanges if e.transfer.kind in ("heat", "fuel") for n in (e.source, e.target)}
    heated |= set(plant.walls)
    if adiabatic := [v.boundary for n, v in enumerate(plant.vessels) if n not in heated]:
        out.append(f"No heat crosses {_listed(adiabatic)}: none is listed (adiabatic).")
    if still := [f.id for f in plant.flows if not f.moves]:
        out.append(f"Kinetic energy is neglected for {_listed(still)}: neither velocity nor bore is given.")
    if level := [f.id for f in plant.flows if f.elevation is None]:
        out.append(f"Potential energy is neglected for {_listed(level)}: no elevation is given.")
    if any(f.course.table is not None for f in plant.flows) or any(e.course.table is not None for e in plant.exchanges):
        out.append("Before its first and after its last time a table keeps its first and its last value.")
    if not case.site.pressure_given:
        out.append(f"Atmospheric pressure at the site is taken as {case.site.atmospheric_pressure / 1e3:g} kPa.")
    return out


def _listed(names: list[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def _sources(fluids: Mapping[str, Fluid | None]) -> list[FluidSource]:
    found: dict[str, FluidSource] = {}
    for fluid in fluids.values():
        if fluid is not None:
            p = fluid.provenance
            found.setdefault(fluid.name, FluidSource(fluid.name, p.model, p.citation, p.reference_state))
    return list(found.values())
