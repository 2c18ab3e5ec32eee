"""The ready cases between two states: each closes, recomputes from its print, and agrees with a calculation by hand."""

from __future__ import annotations

import json
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from service.balance.processes import PROCESS_KINDS
from service.errors import SchemaViolation
from service.units import UnitTable
from service.wire.operations import Operations

from .hand_calculations_closed import ATM, BY_HAND
from .recompute import HALF_A_DIGIT, in_unit, recompute_steps, recomputed

DIRECTORY = Path(__file__).resolve().parents[2] / "schemas" / "examples"


def between_states(case: dict[str, Any]) -> bool:
    return case["system"] == "closed" or case.get("form") == "integrated"


CASES = {p.stem: case for p in sorted(DIRECTORY.glob("*.json")) if between_states(case := json.loads(p.read_text()))}
every_case = pytest.mark.parametrize("name", CASES)


@cache
def operations() -> Operations:
    return Operations.build()


@cache
def answer(name: str) -> dict[str, Any]:
    return operations().solve(CASES[name])


def accounts(name: str) -> list[dict[str, Any]]:
    return [a for e in answer(name)["ledger"] for a in (*e["mass"], *([e["energy"]] if "energy" in e else []))]


def in_si(shown: dict[str, Any], address: str) -> float:
    """A shown quantity in SI: its unit belongs to one kind."""
    table = UnitTable.build()
    kinds = [k for k, kind in table.kinds.items() if shown["unit"] in kind.symbols]
    kind = "temperature_difference" if kinds == [] else kinds[0]
    return float(table.to_si(shown["value"], table.unit(shown["unit"], kind), ATM))


def test_every_case_between_two_states_has_its_calculation_by_hand():
    assert set(CASES) == set(BY_HAND)


def test_every_process_but_the_spring_and_the_atmosphere_occurs():
    shown = set()
    for case in CASES.values():
        for boundary in case["boundaries"]:
            for content in boundary["contents"]:
                process = content.get("process", [])
                shown |= {stage["kind"] for stage in (process if isinstance(process, list) else [process])}
    assert shown >= set(PROCESS_KINDS) - {"linear", "constant_external_pressure"}


@pytest.mark.parametrize("system", ["closed", "transient"])
def test_humid_air_as_a_content_is_refused_with_what_to_do_instead(system):
    content = {"id": "air", "fluid": "humid_air", "volume": "50 m3",
               "initial": {"p": "1 bar", "T": "30 degC", "relative_humidity": 0.5}}  # fmt: skip
    document: dict[str, Any] = {"system": system, "boundaries": [{"id": "room", "contents": [content]}]}
    if system == "transient":
        document["until"] = {"time": "1 h"}
    with pytest.raises(SchemaViolation, match="steady flow only") as error:
        operations().solve(document)
    assert error.value.issues[0].pointer == "#/boundaries/0/contents/0"
    assert "gas_mixture" in error.value.issues[0].hint


@every_case
def test_a_case_closes_as_printed(name):
    for account in accounts(name):
        assert account["closure"] < 1e-9
        largest = max(abs(line["value"]) for line in account["lines"])
        assert sum(line["value"] for line in account["lines"]) == pytest.approx(0.0, abs=1e-9 * largest)
        for line in account["lines"]:
            value = in_unit(recomputed(line["numbers"]), line["unit"])
            # a product of at most three printed numbers of nine digits
            assert value == pytest.approx(line["value"], rel=8 * HALF_A_DIGIT, abs=1e-12), line


@every_case
def test_the_steps_recompute_from_the_numbers_they_print(name):
    recompute_steps(answer(name))
    assert answer(name)["steps"]


@every_case
def test_the_answers_agree_with_the_calculation_by_hand(name):
    answers = answer(name)["answers"]
    by_hand = BY_HAND[name]()
    assert set(by_hand) == set(answers)
    for address, expected in by_hand.items():
        # both paths flash with the same equations; 1e-6 is what differences of internal energies keep of them
        assert in_si(answers[address], address) == pytest.approx(expected, rel=1e-6), address
