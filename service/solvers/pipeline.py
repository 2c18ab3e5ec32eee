"""What steady flow and balances over a period share: build the model, order it, run it, compare, report."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from service.advisories import advise
from service.balance.assemble import build_accumulating, build_steady_flow
from service.balance.builder import BuiltCase
from service.balance.case import Case
from service.balance.network import fluid_keys
from service.balance.solution import SeriesResult, Solution, StructureReport, SurplusCheck
from service.engine.columns import agreement_columns, run_columns
from service.engine.execute import Run, run, surplus_residuals
from service.engine.model import Column
from service.engine.plan import Plan
from service.engine.structure import compile_plan
from service.errors import CaseError, Contradictory, Issue, SchemaViolation, UnderSpecified
from service.fluids.catalogue import FluidCatalogue
from service.fluids.protocol import Fluid, FluidSpec
from service.solvers.plans import KeptPlans, structure_of
from service.solvers.report import report, structure_report, surplus_check
from service.trust.second_law import entropy_checks
from service.trust.uncertainty import uncertainties

EXTENSIVE = {
    "mass_flow", "molar_flow", "volume_flow", "normal_volume_flow", "power", "conductance", "area", "length",
    "mass", "volume", "normal_volume", "energy",
}  # fmt: skip
"""Kinds of quantity that fix how much there is or flows; without any, a case is balanced for a unit of mass."""


_KEPT = KeptPlans()


def solve(case: Case, catalogue: FluidCatalogue, deadline: float | None = None) -> Solution:
    """The solved case. Raises CaseError; `deadline` is a time.monotonic() value."""
    built, plan = prepare(case, catalogue)
    done = run(plan, deadline)
    plan = replace(plan, steps=tuple(done.used.get(i, step) for i, step in enumerate(plan.steps)))
    checks = _checked_surplus(built, plan, done)
    solution = report(built, plan, done, checks)
    solution.entropy = entropy_checks(built, done)
    solution.uncertainties = uncertainties(built, plan, done)
    solution.advisories = advise(built, done, solution)
    return solution


def check(case: Case, catalogue: FluidCatalogue) -> StructureReport:
    """The structural count, without numbers. Raises UnderSpecified and the errors of a case that makes no sense."""
    built, plan = prepare(case, catalogue)
    return structure_report(built, plan)


def prepare(case: Case, catalogue: FluidCatalogue) -> tuple[BuiltCase, Plan]:
    """The case's model and its plan; per unit of mass where nothing says how much there is."""
    fluids = resolve_fluids(case, catalogue)
    key = structure_of(case, fluids)
    kept = _KEPT.find(key, case)
    if kept is not None:
        return kept
    built = _build(case, fluids)
    plan = _plan(built)
    _KEPT.keep(key, built, plan)
    return built, plan


def _build(case: Case, fluids: Mapping[str, Fluid | None], also: Sequence[str] = ()) -> BuiltCase:
    writer = build_steady_flow if case.system == "steady_flow" else build_accumulating
    return writer(case, fluids, also)


def _plan(built: BuiltCase) -> Plan:
    try:
        return compile_plan(built.model)
    except UnderSpecified:
        if not _assume_unit_amount(built):
            raise
    return compile_plan(built.model)


def resolve_fluids(case: Case, catalogue: FluidCatalogue) -> dict[str, Fluid | None]:
    """Property model of each stream. Raises UnknownFluid, and SchemaViolation where the fluid is not clear."""
    keys = fluid_keys(case)
    keys.update({c.id: c.fluid for c in case.contents})
    pointers = {s.id: s.pointer for s in case.streams} | {c.id: c.pointer for c in case.contents}
    models: dict[str, Fluid] = {}
    problems: dict[str, CaseError] = {}
    for item, key in keys.items():
        if key is None or key in models or key in problems:
            continue
        try:
            models[key] = catalogue.resolve(_spec(case, key))
        except CaseError as problem:
            pointer = f"#/fluids/{key}" if key in case.fluids else f"{pointers[item]}/fluid"
            issues = [_at(issue, pointer) for issue in problem.issues or (Issue(problem.detail),)]
            problems[key] = type(problem)(problem.detail, issues)
    if problems:
        first, *_ = problems.values()
        raise type(first)(first.detail, [issue for p in problems.values() for issue in p.issues])
    _refuse_two_models_of_one_substance(models)
    return {item: models[key] if key is not None else None for item, key in keys.items()}


def _at(issue: Issue, pointer: str) -> Issue:
    return issue if issue.pointer else Issue(issue.detail, issue.address, issue.hint, pointer, issue.amounts)


def _spec(case: Case, key: str) -> FluidSpec | str:
    declared = case.fluids.get(key)
    if declared is None:
        return key
    return FluidSpec(
        kind=declared.kind, name=declared.name, model=declared.model, mole_fractions=declared.mole_fractions,
        mass_fraction=declared.mass_fraction, molar_mass=declared.molar_mass, cp=declared.cp,
        density=declared.density, label=key,
    )  # fmt: skip


def _refuse_two_models_of_one_substance(models: Mapping[str, Fluid]) -> None:
    """Enthalpies of two property models have two zeros; one case uses one model a substance."""
    by_name: dict[str, tuple[str, Fluid]] = {}
    for key, fluid in models.items():
        other = by_name.setdefault(fluid.name, (key, fluid))
        if other[1].provenance.model != fluid.provenance.model:
            raise SchemaViolation(
                f"{other[0]} and {key} are the same substance in two property models, whose enthalpies do not compare.",
                hint="Use one model for a substance throughout the case.",
            )


def _assume_unit_amount(built: BuiltCase) -> bool:
    """Give the first stream 1 kg/s, or the first content 1 kg, where no extensive quantity is given or asked for."""
    model = built.model
    if any(built.kinds[v] in EXTENSIVE for v in (*model.given, *model.wanted)):
        return False
    items = [*(c.id for c in built.case.contents), *(s.id for s in built.case.streams)]
    names = (f"{item}.{name}" for item in items for name in ("mass", "initial.mass", "dry_air_flow", "mass_flow"))
    address = next((name for name in names if name in model.index), None)
    if address is None:
        return False
    number = model.index[address]
    model.given[number] = 1.0
    unit = "1 kg" if built.kinds[number] == "mass" else "1 kg/s"
    built.assumptions.append(
        f"Nothing says how much there is: {address} is taken as {unit}; masses, flows, heat and work are per that "
        "unit, states and ratios hold for any amount."
    )
    return True


def _checked_surplus(built: BuiltCase, plan: Plan, done: Run) -> list[SurplusCheck]:
    """Everything given twice, compared. Raises Contradictory where it disagrees by more than the case allows."""
    tolerance = built.case.answer.agreement
    checks = [surplus_check(built, closing, done, off) for closing, off in surplus_residuals(plan, done)]
    failed = [c for c in checks if c.disagreement > tolerance]
    if not failed:
        return checks
    ways_out = (
        'Drop one of the two, mark one unknown ("?"), allow for the difference in `answer.agreement`, '
        "or state the uncertainties of the readings and reconcile them."
    )
    issues = []
    for c in failed:
        kind = built.kinds[built.model.index[c.address]]
        detail = f"{c.address} is {{0}}, but the {c.name} gives {{1}}."
        issues.append(Issue(detail, c.address, ways_out, amounts=((kind, c.held), (kind, c.implied))))
    raise Contradictory(f"The given values disagree: see the {failed[0].name}.", issues)


def series(
    case: Case,
    catalogue: FluidCatalogue,
    readings: Mapping[str, npt.NDArray[np.float64]],
    report_addresses: Sequence[str],
    deadline: float | None = None,
) -> SeriesResult:
    """The case over columns of readings (SI, by address): one column for each reported address.

    The plan is compiled once, with the columns' addresses taken as given. A row that cannot be solved is NaN and has a
    problem type; it costs no other row.
    """
    rows = len(next(iter(readings.values()))) if readings else 1
    built = _build(case, resolve_fluids(case, catalogue), (*readings, *report_addresses))
    reported = {address: _series_variable(built, address) for address in report_addresses}
    columns: dict[int, Column] = {}
    for address, column in readings.items():
        number = _series_variable(built, address)
        finite = column[np.isfinite(column)]
        built.model.given[number] = float(finite[0]) if len(finite) else 1.0
        columns[number] = column
    built.model.wanted = {v for v in reported.values() if v not in built.model.given}
    plan = _plan(built)
    done = run_columns(plan, columns, rows, deadline)
    return _series_result(built, plan, done, columns, reported, rows)


def _series_variable(built: BuiltCase, address: str) -> int:
    if address not in built.model.index:
        raise SchemaViolation(
            f"{address} does not occur in the case.", address=address,
            hint="Mention the quantity in the case (with any value, or \"?\"), so that the equations know of it.",
        )  # fmt: skip
    return built.model.index[address]


def _series_result(
    built: BuiltCase, plan: Plan, done: Run, columns: Mapping[int, Column], reported: Mapping[str, int], rows: int
) -> SeriesResult:
    problems = {row: failure.problem_type for row, failure in done.failures.items()}
    details = {row: failure.detail for row, failure in done.failures.items()}
    if plan.surplus:
        disagreement = agreement_columns(plan, done, rows)
        for row in np.flatnonzero(disagreement > built.case.answer.agreement):
            problems.setdefault(int(row), Contradictory.problem_type)
            details.setdefault(int(row), f"The given values disagree by {disagreement[row]:.3g} (relative).")
    bad = np.zeros(rows, dtype=bool)
    bad[list(problems)] = True
    for number in columns:
        bad |= ~np.isfinite(columns[number])
    out: dict[str, Column] = {}
    for address, number in reported.items():
        column = np.array(np.broadcast_to(np.asarray(done.values[number], dtype=float), (rows,)))
        bad |= ~np.isfinite(column)
        out[address] = column
    for row in np.flatnonzero(bad):
        problems.setdefault(int(row), "no-solution")
        details.setdefault(int(row), "A reading is missing, or an equation has no finite solution in this row.")
    for column in out.values():
        column[bad] = np.nan
    kinds = {address: built.kinds[number] for address, number in reported.items()}
    return SeriesResult(rows, out, kinds, problems, details)
