"""The ready transients in rate form: each closes, keeps its story, and agrees with a script written by hand.

The scripts call the property library and solve_ivp directly: tests/benchmarks/transients.py.
"""

from __future__ import annotations

import json
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from service.units import UnitTable
from service.wire.operations import Operations
from tests.benchmarks.transients import ATM, BY_HAND

DIRECTORY = Path(__file__).resolve().parents[2] / "schemas" / "examples"
CASES = {
    path.stem: case
    for path in sorted(DIRECTORY.glob("*.json"))
    if (case := json.loads(path.read_text()))["system"] == "transient" and case.get("form", "rate") == "rate"
}
every_case = pytest.mark.parametrize("name", CASES)
WITHOUT_SCRIPT = {"carbon-dioxide-vessel"}
"""It stops at the triple point: see the test of its own."""


@cache
def operations() -> Operations:
    return Operations.build()


@cache
def answer(name: str) -> dict[str, Any]:
    return operations().solve(CASES[name])


@cache
def table() -> UnitTable:
    return UnitTable.build()


def in_si(shown: dict[str, Any]) -> float:
    kind = next(k for k, kind in table().kinds.items() if shown["unit"] in kind.symbols)
    return float(table().to_si(shown["value"], table().unit(shown["unit"], kind), ATM))


def test_every_case_over_time_has_its_script():
    assert set(CASES) - WITHOUT_SCRIPT == set(BY_HAND)


@every_case
def test_a_case_over_time_closes(name):
    for entry in answer(name)["ledger"]:
        for account in (*entry["mass"], *([entry["energy"]] if "energy" in entry else [])):
            assert account["closure"] < 1e-6


@every_case
def test_the_history_has_the_columns_and_points_that_the_case_asks(name):
    asked, told = CASES[name]["history"], answer(name)["transient"]["history"]
    assert list(told["columns"]) == asked["columns"]
    assert all(len(column["values"]) == asked["points"] for column in told["columns"].values())


@pytest.mark.parametrize("name", sorted(set(CASES) - WITHOUT_SCRIPT))
def test_a_case_over_time_agrees_with_its_script(name):
    """To 2e-6 of the value: both integrate with a relative tolerance of 1e-8 a step, some tens of steps."""
    solved = answer(name)
    shown = {address: in_si(quantity) for address, quantity in solved["answers"].items()}
    shown |= {
        a: in_si(column["least"]) for a, column in solved["transient"]["extremes"].items() if a.endswith("wall.T")
    }
    for address, expected in BY_HAND[name]().items():
        # level within a ten-thousandth is where the script of the bottles stops
        tolerance = 1e-4 if name == "two-bottles" else 2e-6
        assert shown[address] == pytest.approx(expected, rel=tolerance), address


def test_carbon_dioxide_stops_at_its_triple_point_and_says_so():
    told = answer("carbon-dioxide-vessel")["transient"]
    assert "triple point" in told["stopped"]
    end = answer("carbon-dioxide-vessel")["answers"]["co2.final.T"]["value"]
    assert end == pytest.approx(-56.558, abs=0.005)  # Span and Wagner 1996: triple point at 216.592 K
    codes = {item["code"] for item in answer("carbon-dioxide-vessel")["advisories"]["items"]}
    assert {"stopped-early", "cold-embrittlement", "asphyxiant-release"} <= codes


def test_the_jacket_temperature_that_was_asked_brings_the_batch_there_in_time():
    history = answer("batch-jacket-temperature")["transient"]["history"]["columns"]["batch.T"]
    assert history["values"][-1] == pytest.approx(80.0, abs=1e-6)
