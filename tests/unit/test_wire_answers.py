"""How a solution is told: in three unit systems, with formulas that a person can recompute."""

from __future__ import annotations

import math
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from service.balance.case import Case
from service.balance.solution import (
    Advisory,
    EntropyCheck,
    FluidSource,
    Found,
    LedgerAccount,
    LedgerLine,
    Solution,
    StepRecord,
    StreamState,
    SurplusCheck,
    Uncertainty,
)
from service.engine.model import Polynomial, Term
from service.wire.answering import Answer
from service.wire.library import read_schemas, schema_directory
from service.wire.presenting import Presenter

from .recompute import in_unit, recomputed
from .wire_helpers import let_down, parse, table

SYSTEMS = ["metric", "SI", "US"]
QUANTITIES = {  # a turbine of 2 kg/s, made up: address → (kind, SI value)
    "in.mass_flow": ("mass_flow", 2.0),
    "in.h": ("specific_energy", 3_213_598.765),
    "in.velocity": ("velocity", 30.25),
    "in.elevation": ("length", 12.5),
    "out.h": ("specific_energy", 2_700_123.456),
    "shaft.rate": ("power", 0.0),
    "in.rho": ("density", 13.579),
    "in.bore": ("length", 0.0787),
    "out.T": ("temperature", 433.15),
    "out.x": ("dimensionless", math.nan),
}
NAMES = list(QUANTITIES)
KINDS = [kind for kind, _ in QUANTITIES.values()]
VALUES = [value for _, value in QUANTITIES.values()]
VALUES[5] = 2.0 * (VALUES[1] - VALUES[4] + 0.5 * 30.25**2 + 9.80665 * 12.5)  # the energy balance itself


def number(name: str) -> int:
    return NAMES.index(name)


def energy_terms() -> list[Term]:
    m = (number("in.mass_flow"), 1)
    return [
        Term(1.0, (m, (number("in.h"), 1)), "", "flow enthalpy", "in"),
        Term(0.5, (m, (number("in.velocity"), 2)), "½", "kinetic energy", "in"),
        Term(9.80665, (m, (number("in.elevation"), 1)), "9.80665 m/s²", "potential energy", "in"),
        Term(-1.0, (m, (number("out.h"), 1)), "", "flow enthalpy", "out"),
        Term(-1.0, ((number("shaft.rate"), 1),), "", "shaft work", "shaft"),
    ]


def line(term: Term) -> LedgerLine:
    sign = "−" if term.coefficient < 0 else ""
    return LedgerLine(
        term.label, term.of, lambda show: sign + term.text(show), float(term.value(VALUES)), term.label == "shaft work"
    )


def solution(**options: Any) -> Solution:
    case: Case = parse({**let_down(), "answer": options})
    balance = Polynomial.of("energy balance of turbine", energy_terms())
    continuity = Polynomial.of(
        "continuity of in",
        [
            Term(1.0, ((number("in.mass_flow"), 1),)),
            Term(-math.pi / 4, ((number("in.rho"), 1), (number("in.bore"), 2), (number("in.velocity"), 1)), "π/4"),
        ],
    )
    shaft = number("shaft.rate")
    lines = tuple(line(term) for term in energy_terms())
    total = float(balance.residual(VALUES))
    return Solution(
        case=case,
        status="solved",
        names=NAMES,
        kinds=KINDS,
        values=VALUES,
        answers={
            "outlet.T": Found("outlet.T", "temperature", 433.15),
            "shaft.rate": Found("shaft.rate", "power", VALUES[shaft]),
            "out.x": Found("out.x", "dimensionless", math.nan),
        },
        states=[
            StreamState("in", "water", "vapour", {"h": VALUES[1], "T": 673.15, "x": math.nan}, {"mass_flow": 2.0}),
        ],
        ledger=[LedgerAccount("turbine", "energy", "", "power", lines, total, abs(total) / 6.4e6)],
        steps=[
            StepRecord("rearranged", balance.name, (shaft,), lambda show: balance.text(show, shaft)),
            StepRecord(
                "bracketed root",
                continuity.name,
                (number("in.bore"),),
                lambda show: continuity.text(show),
                3e-16,
                (StepRecord("property lookup", "state of in", (number("out.x"),), lambda show: f"x(h = {show(1)})"),),
            ),
        ],
        surplus=[SurplusCheck("state of in", "in.h", VALUES[1], VALUES[1] * (1 + 2e-9), 2e-9)],
        entropy=[EntropyCheck("turbine", 123.4, "satisfied", "it is not negative")],
        assumptions=["No heat crosses turbine."],
        sources=[FluidSource("water", "IF97", "IAPWS R7-97(2012)", "saturated liquid at the triple point")],
        advisories=[Advisory("limit-crossed", "WARNING", "too hot", "outlet.T", "common practice")],
        uncertainties={"outlet.T": Uncertainty(0.5, {"inlet.p": (1e-6, 0.75), "inlet.T": (0.9, 0.25)})},
    )


def told(**options: Any) -> dict[str, Any]:
    found = solution(**options)
    presenter = Presenter(table(), found.case.answer.units, found.case.site.atmospheric_pressure)
    return Answer(found, presenter).document(let_down())


@pytest.mark.parametrize("system", SYSTEMS)
def test_every_line_of_the_ledger_recomputes_from_its_numbers(system: str) -> None:
    lines = told(units=system)["ledger"][0]["energy"]["lines"]
    assert len(lines) == 5
    for entry in lines:
        # each factor is printed to 9 digits; the square of one and the conversion of Btu by pint add a little
        assert in_unit(recomputed(entry["numbers"]), entry["unit"]) == pytest.approx(entry["value"], rel=3e-8)


@pytest.mark.parametrize("system", SYSTEMS)
def test_the_lines_of_the_ledger_add_up_to_its_sum(system: str) -> None:
    account = told(units=system)["ledger"][0]["energy"]
    largest = max(abs(entry["value"]) for entry in account["lines"])
    assert sum(entry["value"] for entry in account["lines"]) == pytest.approx(
        account["sum"]["value"], abs=1e-8 * largest
    )
    assert account["closure"] < 1e-12


@pytest.mark.parametrize("system", SYSTEMS)
def test_a_rearranged_step_recomputes_to_its_value(system: str) -> None:
    step = told(units=system)["steps"][0]
    formula, result = step["numbers"].rsplit(" = ", 1)
    found = step["values"]["shaft.rate"]
    largest = 2.0 * VALUES[1]  # [W] the largest term, on whose last printed digit the rest hangs
    unit = table().unit(found["unit"], "power")
    value = in_unit(recomputed(formula), found["unit"])
    assert value == pytest.approx(found["value"], abs=1e-8 * largest / unit.factor)
    assert in_unit(recomputed(result), found["unit"]) == pytest.approx(found["value"], rel=1e-8)
    assert step["equation"].startswith("shaft.rate = in.mass_flow·in.h + ½·in.mass_flow·in.velocity²")


@pytest.mark.parametrize("system", SYSTEMS)
def test_an_equation_to_be_made_zero_is_written_with_numbers_that_make_sense(system: str) -> None:
    step = told(units=system)["steps"][1]
    formula, zero = step["numbers"].rsplit(" = ", 1)
    assert zero == "0"
    area = recomputed(formula.split(" − ")[1])
    assert in_unit(area, "kg/s") == pytest.approx(math.pi / 4 * 13.579 * 0.0787**2 * 30.25, rel=1e-6)
    assert "((" not in step["numbers"]


def test_an_answer_has_the_shape_of_its_schema() -> None:
    schemas = read_schemas(schema_directory())
    for options in ({}, {"units": "US"}, {"detail": "brief"}, {"work_positive": "out_of_system"}):
        errors = [e.message for e in Draft202012Validator(schemas["answer"]).iter_errors(told(**options))]
        assert errors == []


@pytest.mark.parametrize(
    ("system", "h", "unit"),
    [
        ("metric", 3213.598765, "kJ/kg"),
        ("SI", 3213598.765, "J/kg"),
        ("US", 3213598.765 / 2326, "Btu/lb"),  # 1 Btu/lb is 2326 J/kg exactly
    ],
)
def test_a_state_is_told_in_the_units_of_the_system(system: str, h: float, unit: str) -> None:
    state = told(units=system)["states"]["in"]
    assert state["h"]["value"] == pytest.approx(h, rel=1e-9)
    assert state["h"]["unit"] == unit
    assert (state["fluid"], state["phase"]) == ("water", "vapour")


def test_the_unit_of_a_question_is_the_unit_of_its_answer() -> None:
    found = told(units="US")["answers"]["outlet.T"]
    assert (found["value"], found["unit"]) == (160.0, "degC")  # asked as "? degC" in the case


def test_a_value_without_meaning_is_null_and_says_why() -> None:
    found = told()["answers"]["out.x"]
    assert found["value"] is None
    assert "single phase" in found["reason"]
    assert told()["states"]["in"]["x"]["value"] is None


def test_an_uncertainty_comes_with_its_interval_and_the_share_of_each_input() -> None:
    found = told(coverage=0.95)["answers"]["outlet.T"]
    assert found["u"] == 0.5
    # ±1.959964 u: the 97.5 % quantile of the normal distribution
    assert found["interval"]["low"] == pytest.approx(160.0 - 0.979982, abs=1e-6)
    assert found["interval"]["high"] == pytest.approx(160.0 + 0.979982, abs=1e-6)
    assert found["shares"] == {"inlet.p": 0.75, "inlet.T": 0.25}


def test_an_uncertainty_in_degrees_fahrenheit_is_a_difference() -> None:
    found = solution(units="US")
    object.__setattr__(found.case.streams[1].quantities["T"], "unit", "degF")
    presenter = Presenter(table(), "US")
    shown = Answer(found, presenter).document({})["answers"]["outlet.T"]
    assert shown["value"] == pytest.approx(320.0, rel=1e-9)  # 160 degC
    assert shown["u"] == pytest.approx(0.9, rel=1e-9)  # 0.5 K


def test_work_listed_out_of_the_system_changes_its_sign_and_says_so() -> None:
    plain, flipped = told()["ledger"][0]["energy"], told(work_positive="out_of_system")["ledger"][0]["energy"]
    assert flipped["lines"][4]["value"] == -plain["lines"][4]["value"] > 0
    assert flipped["lines"][4]["formula"] == "shaft.rate"
    assert plain["lines"][4]["formula"] == "−shaft.rate"
    assert flipped["lines"][4]["listed"] == "out_of_system"
    assert flipped["lines"][:4] == plain["lines"][:4]
    assert flipped["sum"] == plain["sum"]
    assert "opposite sign" in flipped["note"]


def test_a_brief_answer_leaves_out_steps_and_formulas_and_nothing_else() -> None:
    full, brief = told(), told(detail="brief")
    assert set(full) - set(brief) == {"steps"}
    assert all(not {"formula", "numbers"} & set(entry) for entry in brief["ledger"][0]["energy"]["lines"])
    assert brief["answers"]["shaft.rate"] == full["answers"]["shaft.rate"]


def test_the_inner_steps_of_an_iteration_are_numbered_inside_of_it() -> None:
    step = told()["steps"][1]
    assert (step["number"], step["inner"][0]["number"]) == ("2", "2.1")


def test_surplus_data_are_told_as_agreeing() -> None:
    (check,) = told()["checks"]["surplus"]
    assert check["verdict"].startswith("agrees within 2.0e-09")
    assert check["held"]["unit"] == "kJ/kg"


def test_the_second_law_is_violated_where_one_boundary_violates_it() -> None:
    found = solution()
    found.entropy.append(EntropyCheck("other", -5.0, "violated", "entropy would be destroyed"))
    checks = Answer(found, Presenter(table())).document({})["checks"]
    assert checks["second_law"] == "violated"
    assert [c["verdict"] for c in checks["entropy"]] == ["satisfied", "violated"]


def test_the_hash_of_a_request_does_not_depend_on_the_order_of_its_members() -> None:
    found, presenter = solution(), Presenter(table())
    one = Answer(found, presenter).document({"a": 1, "b": {"c": 2, "d": "ü"}})
    other = Answer(found, presenter).document({"b": {"d": "ü", "c": 2}, "a": 1})
    assert one["provenance"]["request_sha256"] == other["provenance"]["request_sha256"]
    # sha256 of {"a":1,"b":{"c":2,"d":"ü"}} in UTF-8, by sha256sum
    assert one["provenance"]["request_sha256"] == HASH


HASH = "3959797ccdf8424b5e5c458401d1ff382a8dc996e907cc027afbe958ff58af5a"


def test_the_same_solution_gives_the_same_document() -> None:
    assert told() == told()
