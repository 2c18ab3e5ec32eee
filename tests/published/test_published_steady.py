"""Published steady-flow and psychrometric examples, solved as cases of our language through the whole service."""

from __future__ import annotations

import json
from functools import cache
from typing import Any

import pytest

from service.errors import Contradictory
from service.wire.operations import Operations
from tests.published import checks, handbook
from tests.published.steady_cases import ENTRIES

STATES_TESTED_AS_PROPERTIES = {"PS-15"}
"""The table of saturated moist air has no balance in it: test_published_properties.py."""


@cache
def operations() -> Operations:
    return Operations.build()


def solved(document: dict[str, Any]) -> dict[str, float]:
    """The answers [SI], and the sum of each kind of energy of each boundary under `ledger boundary term`."""
    assert document["answer"]["units"] == "SI"
    answer = operations().solve(document)
    found = {address: quantity["value"] for address, quantity in answer["answers"].items()}
    for entry in answer["ledger"]:
        for account in (*entry["mass"], *([entry["energy"]] if "energy" in entry else [])):
            assert account["closure"] < 1e-9
        for line in entry.get("energy", {}).get("lines", []):
            key = f"ledger {entry['boundary']} {line['term']}"
            found[key] = found.get(key, 0.0) + line["value"]
    return found


def test_every_steady_and_psychrometric_entry_is_a_case_here():
    entries = {*checks.ids("steady/"), *checks.ids("psychrometric/")}
    assert set(ENTRIES) | STATES_TESTED_AS_PROPERTIES == entries


@pytest.mark.parametrize("check", ENTRIES)
def test_a_published_example_is_met_at_its_printed_accuracy(check):
    document, reads = ENTRIES[check](checks.given(check))
    found = solved(document)
    rows = checks.expected(check)
    assert {row.name for row in rows} == set(reads)
    misses = [row.miss(reads[row.name](found)) for row in rows]
    assert not any(misses), misses


def test_the_feedwater_heater_of_sf_17_is_refused_when_its_energy_has_to_close():
    """Its note: as an adiabatic heater it is out by 78.4 MW, which a check of the energy balance has to find."""
    document, _ = ENTRIES["SF-17"](checks.given("SF-17"))
    assert solved({**document})["open.rate"] == pytest.approx(78.4e6, rel=1e-3)
    with pytest.raises(Contradictory):
        operations().solve({**document, "transfers": []})


@pytest.mark.parametrize("name", handbook.EXAMPLES)
def test_a_handbook_example_is_met_at_the_accuracy_stated_beside_it(name):
    example = handbook.EXAMPLES[name]
    found = solved(json.loads(json.dumps(example.document)))
    for what, (value, tolerance, read) in example.expected.items():
        assert read(found) == pytest.approx(value, abs=tolerance), f"{what}: {example.source}"
