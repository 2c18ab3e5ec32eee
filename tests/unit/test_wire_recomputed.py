"""Every kind of equation, as its step prints it: pint works it out from the printed numbers and gets the same value."""

from __future__ import annotations

from typing import Any

import pytest

from .recompute import recompute_steps
from .test_wire_operations import operations, schema_errors
from .wire_helpers import let_down


def changed(streams: dict[str, Any] | None = None, **members: Any) -> dict[str, Any]:
    """The let-down case with members of its outlet and of itself replaced."""
    document = {**let_down(), **members}
    document["streams"][1] |= streams or {}
    return document


EXPANDED = {"state": {"p": "10 barg", "T": "260 degC"}}
SHAFT = {"id": "shaft", "kind": "shaft_work", "from": "valve", "rate": "?"}
ENDS = {"from": "inlet", "to": "outlet", "value": "?"}
FOUR = {"hot_in": "hi", "hot_out": "ho", "cold_in": "ci", "cold_out": "co", "value": "?"}

CASES: dict[str, tuple[dict[str, Any], int]] = {  # name → (case, steps of plain arithmetic that it has at least)
    "fuel by normal volume": (
        changed(transfers=[{"id": "gas", "kind": "fuel", "to": "valve", "normal_volume_flow": "? Nm3/h",
                            "rate": "30 kW", "heating_value": "36 MJ/Nm3", "basis": "net"}]), 2),
    "fuel by mass": (
        changed(transfers=[{"id": "oil", "kind": "fuel", "to": "valve", "mass_flow": "1 g/s",
                            "heating_value": "42 MJ/kg", "basis": "net"}]), 2),
    "flows in every form": (
        changed({"normal_volume_flow": "? Nm3/h", "molar_flow": "? kmol/h", "volume_flow": "? gpm",
                 "velocity": "? m/s", "bore": "100 mm"}), 2),
    "isentropic efficiency": (
        changed(EXPANDED, transfers=[SHAFT], relations=[{"kind": "isentropic_efficiency", **ENDS}]), 2),
    "polytropic efficiency": (
        changed(EXPANDED, transfers=[SHAFT], relations=[{"kind": "polytropic_efficiency", **ENDS}]), 2),
    "ties between quantities": (
        changed(relations=[
            {"kind": "difference", "of": ["inlet.T", "outlet.T"], "value": "? K"},
            {"kind": "difference", "of": ["inlet.p", "outlet.p"], "value": "? bar"},
            {"kind": "ratio", "of": ["inlet.p", "outlet.p"], "value": "?"},
            {"kind": "sum", "of": ["inlet.mass_flow", "outlet.mass_flow"], "value": "?"},
        ]), 5),
    "heat exchanger": ({
        "system": "steady_flow",
        "boundaries": [{"id": "shell"}, {"id": "tubes"}],
        "streams": [
            {"id": "hi", "to": "shell", "fluid": "water", "mass_flow": "10 t/h",
             "state": {"p": "3 bar", "T": "90 degC"}},
            {"id": "ho", "from": "shell", "state": {"p": "3 bar", "T": "60 degC"}},
            {"id": "ci", "to": "tubes", "fluid": "water", "mass_flow": "15 t/h",
             "state": {"p": "3 bar", "T": "20 degC"}},
            {"id": "co", "from": "tubes", "state": {"p": "3 bar", "T": "?"}},
        ],
        "transfers": [{"id": "duty", "kind": "heat", "from": "shell", "to": "tubes", "rate": "? kW"}],
        "relations": [
            {"kind": "lmtd_UA", "arrangement": "counterflow", **FOUR},
            {"kind": "effectiveness", **FOUR},
        ],
    }, 4),
    "cooling coil with condensate": ({
        "system": "steady_flow",
        "boundaries": [{"id": "coil"}],
        "streams": [
            {"id": "in", "to": "coil", "fluid": "humid_air", "mass_flow": "3 kg/s",
             "state": {"p": "1 atm", "T": "30 degC", "relative_humidity": "60 %"}},
            {"id": "out", "from": "coil", "fluid": "humid_air",
             "state": {"p": "1 atm", "T": "12 degC", "relative_humidity": "100 %"}},
            {"id": "drain", "from": "coil", "fluid": "water", "mass_flow": "? kg/h",
             "state": {"p": "1 atm", "T": "12 degC"}},
        ],
        "transfers": [{"id": "duty", "kind": "heat", "from": "coil", "rate": "? kW"}],
    }, 4),
}  # fmt: skip


@pytest.mark.parametrize("units", ["metric", "SI", "US"])
@pytest.mark.parametrize("name", CASES)
def test_the_steps_of_a_case_recompute_from_what_they_print(name: str, units: str) -> None:
    document, least = CASES[name]
    answer = operations().solve({**document, "answer": {"units": units}})
    assert schema_errors("answer", answer) == []
    assert recompute_steps(answer) >= least
