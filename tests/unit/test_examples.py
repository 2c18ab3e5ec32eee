"""The ready cases of Harrow Lane works: each solves, closes, recomputes from what it prints, and agrees by hand.

The calculations by hand call the property library directly: hand_calculations.py.
"""

from __future__ import annotations

import json
import re
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from service.wire import vocabulary
from service.wire.operations import Operations

from .hand_calculations import ATM, BY_HAND, TONNE_PER_HOUR, C, turbine_from_readings
from .recompute import HALF_A_DIGIT, NOT_ARITHMETIC, in_unit, recompute_steps, recomputed

DIRECTORY = Path(__file__).resolve().parents[2] / "schemas" / "examples"
CASES: dict[str, dict[str, Any]] = {
    path.stem: case
    for path in sorted(DIRECTORY.glob("*.json"))
    if (case := json.loads(path.read_text(encoding="utf-8")))["system"] == "steady_flow"
}
every_case = pytest.mark.parametrize("name", CASES)

TO_SI: dict[str, tuple[float, float]] = {  # (factor, offset); NIST SP 811, appendix B
    "-": (1.0, 0.0), "%": (0.01, 0.0), "K": (1.0, 0.0), "degC": (1.0, 273.15), "degF": (1 / 1.8, 459.67 / 1.8),
    "kW": (1e3, 0.0), "MW": (1e6, 0.0), "kW/K": (1e3, 0.0), "t/h": (TONNE_PER_HOUR, 0.0), "kg/h": (1 / 3600, 0.0),
    "kg/s": (1.0, 0.0), "lb/h": (0.45359237 / 3600, 0.0), "m3/s": (1.0, 0.0), "m/s": (1.0, 0.0), "mm": (1e-3, 0.0),
    "g/kg": (1e-3, 0.0), "Nm3/h": (1 / 3600, 0.0),
}  # fmt: skip

TOLERANCE = {"fan": 5e-6}
"""Relative; 1e-7 elsewhere. The parts of humid air carry gas constants that differ by 5e-6, so that the ideal rise of a
fan, which comes from entropy here and from dh = v dp there, differs by as much."""


@cache
def operations() -> Operations:
    return Operations.build()


@cache
def answer(name: str) -> dict[str, Any]:
    return operations().solve(CASES[name])


def accounts(name: str) -> list[dict[str, Any]]:
    entries = answer(name)["ledger"]
    return [a for entry in entries for a in (*entry["mass"], *([entry["energy"]] if "energy" in entry else []))]


# --- the set ---------------------------------------------------------------------------------------------------------


def test_there_are_enough_cases_each_with_a_title_of_its_own():
    titles = [case["title"] for case in CASES.values()]
    assert len(CASES) >= 24
    assert len(set(titles)) == len(titles)


@every_case
def test_a_case_says_its_question_and_asks_something(name):
    case = CASES[name]
    assert "?" in case["title"]
    assert len(case["description"]) > 40
    assert answer(name)["answers"]


def test_names_of_files_are_in_small_letters_with_hyphens():
    assert all(re.fullmatch(r"[a-z0-9]+(-[a-z0-9]+)*", name) for name in CASES)


def test_every_kind_of_transfer_relation_and_fluid_occurs():
    transfers = {t["kind"] for case in CASES.values() for t in case.get("transfers", [])}
    relations = {r["kind"] for case in CASES.values() for r in case.get("relations", [])}
    declared = {f["kind"] for case in CASES.values() for f in case.get("fluids", {}).values()}
    named = {s.get("fluid") for case in CASES.values() for s in case["streams"]}
    assert transfers == set(vocabulary.TRANSFER) - {"expansion_work"}  # of closed systems
    assert relations == set(vocabulary.RELATION)
    assert declared | {"humid_air" for n in named if n == "humid_air"} == set(vocabulary.FLUID)


def test_every_way_to_say_a_flow_or_a_state_is_shown_somewhere():
    streams = [s for case in CASES.values() for s in case["streams"]]
    flows = {name for s in streams for name in s}
    states = {name for s in streams for name in s.get("state", {})}
    assert {"mass_flow", "dry_air_flow", "volume_flow", "normal_volume_flow", "velocity", "bore", "elevation"} <= flows
    assert {"side", "from", "to", "fluid"} <= flows
    shown = {"p", "T", "x", "saturated", "superheat", "subcooling", "relative_humidity", "humidity_ratio", "wet_bulb"}
    assert shown <= states


def test_laws_limits_uncertainties_and_other_unit_systems_are_shown_somewhere():
    text = json.dumps(CASES)
    for member in ('"law"', '"limits"', '"u"', '"u_rel"', '"work_positive"', '"units": "US"', '"basis"', '"site"'):
        assert member in text, member


# --- every case ------------------------------------------------------------------------------------------------------


@every_case
def test_a_case_solves_and_closes(name):
    assert answer(name)["status"] == "solved"
    for account in accounts(name):
        assert account["closure"] < 1e-9
        largest = max(abs(line["value"]) for line in account["lines"])
        assert abs(account["sum"]["value"]) <= 1e-9 * largest


@every_case
def test_the_lines_of_an_account_add_up_to_its_sum_as_printed(name):
    for account in accounts(name):
        values = [-v["value"] if v.get("listed") == "out_of_system" else v["value"] for v in account["lines"]]
        assert sum(values) == pytest.approx(account["sum"]["value"], abs=1e-9 * max(map(abs, values)))


@every_case
def test_the_lines_of_the_ledger_recompute_from_the_numbers_they_print(name):
    for account in accounts(name):
        for line in account["lines"]:
            value = in_unit(recomputed(line["numbers"]), line["unit"])
            # a product of at most four printed numbers of nine digits
            assert value == pytest.approx(line["value"], rel=8 * HALF_A_DIGIT, abs=1e-12), line


@every_case
def test_the_steps_recompute_from_the_numbers_they_print(name):
    steps = [s for s in answer(name)["steps"] if s["method"] == "rearranged"]
    levels = sum(v["unit"] in ("degC", "degF") for s in steps for v in s["values"].values())
    assert recompute_steps(answer(name)) >= len([s for s in steps if not NOT_ARITHMETIC.search(s["numbers"])]) - levels


@every_case
def test_what_was_iterated_agrees_on_both_sides_as_printed(name):
    for step in answer(name)["steps"]:
        if step["method"] in ("bracketed root", "simultaneous"):
            assert step["residual"] < 1e-9
            for part in step["numbers"].split("; "):
                left, right = part.rsplit(" = ", 1)
                if not NOT_ARITHMETIC.search(part):
                    difference = f"{left} − ({right})" if right != "0" else left
                    off = recomputed(difference).to_base_units().magnitude
                    assert abs(off) <= 2 * slack_in_base_units(difference) + 1e-12, part


def slack_in_base_units(formula: str) -> float:
    """How far the rounding of the printed numbers can move a formula, in SI base units."""
    quantities = re.findall(r"\((-?[0-9.]+(?:e[+-]?[0-9]+)?) ([^()]+)\)", formula)
    centre, slack = recomputed(formula).to_base_units().magnitude, 0.0
    for number, unit in set(quantities):
        moved = f"{float(number) * (1 + HALF_A_DIGIT):.17g}"
        changed = formula.replace(f"({number} {unit})", f"({moved} {unit})")
        slack += abs(recomputed(changed).to_base_units().magnitude - centre)
    return slack


@every_case
def test_a_case_agrees_with_the_hand_calculation(name):
    by_hand, found = BY_HAND[name](), answer(name)["answers"]
    assert set(by_hand) == set(found)
    for address, expected in by_hand.items():
        factor, offset = TO_SI[found[address]["unit"]]
        value = found[address]["value"] * factor + offset
        assert value == pytest.approx(expected, rel=TOLERANCE.get(name, 1e-7)), address


@every_case
def test_a_case_obeys_the_second_law(name):
    assert all(check["verdict"] != "violated" for check in answer(name)["checks"]["entropy"])


@every_case
def test_the_short_answer_has_the_same_numbers(name):
    brief = operations().solve({**CASES[name], "answer": {**CASES[name].get("answer", {}), "detail": "brief"}})
    assert "steps" not in brief
    for address, found in brief["answers"].items():
        assert found["value"] == answer(name)["answers"][address]["value"]


def test_there_is_a_hand_calculation_for_every_case():
    assert set(BY_HAND) == set(CASES)


# --- one thing more about some of them -------------------------------------------------------------------------------


def test_uncertainty_of_the_turbine_agrees_with_moving_the_readings_by_hand():
    """u² = Σ (∂y/∂x)² u²: JCGM 100:2008, 5.1.2; slopes from differences of the hand calculation."""
    readings = [24.6 * TONNE_PER_HOUR, 41.8e5 + ATM, 418 + C, 4.05e5 + ATM, 221 + C]
    uncertain = [0.01 * readings[0], 0.1e5, 1.5, 0.02e5, 1.0]
    for which, address, factor in ((0, "shaft.rate", 1e3), (1, "efficiency.value", 0.01)):
        parts = []
        for i, u in enumerate(uncertain):
            ends = []
            for side in (-0.01, 0.01):
                moved = list(readings)
                moved[i] += side * u
                ends.append(turbine_from_readings(*moved)[which])
            parts.append((ends[1] - ends[0]) / 0.02)
        expected = sum(part**2 for part in parts) ** 0.5
        # u is printed with three digits
        assert answer("turbine-efficiency")["answers"][address]["u"] * factor == pytest.approx(expected, rel=6e-3)


def test_the_trap_blows_steam_at_the_choked_flux():
    """Saturated steam through a nozzle chokes near 0.58 of its pressure (common practice), far above the atmosphere."""
    m = answer("leaking-trap")["answers"]["leak.mass_flow"]["value"]
    doubled = json.loads(json.dumps(CASES["leaking-trap"]))
    doubled["relations"][0]["downstream_pressure"] = "4 barg"
    assert operations().solve(doubled)["answers"]["leak.mass_flow"]["value"] == pytest.approx(m, rel=1e-9)


@pytest.mark.parametrize(("name", "of"), [("exchanger-ua", "rating.value"), ("turbine-efficiency", "efficiency.value")])
def test_a_limit_that_is_crossed_is_told_with_its_reason(name, of):
    (told,) = [item for item in answer(name)["advisories"]["items"] if item["code"] == "limit-crossed"]
    assert told["of"] == of
    assert CASES[name]["limits"][0]["why"] in told["message"]
    assert told["signal_word"] in ("CAUTION", "WARNING")


@every_case
def test_a_limit_that_is_kept_is_not_told(name):
    crossed = {item["of"] for item in answer(name)["advisories"]["items"] if item["code"] == "limit-crossed"}
    limits = {limit["of"] for limit in CASES[name].get("limits", [])}
    assert crossed <= limits
    assert name in ("exchanger-ua", "turbine-efficiency") or not crossed
