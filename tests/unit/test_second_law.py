"""Entropy generation against hand calculations, and the three verdicts with their reasons.

Ideal gases and liquids of constant properties have closed forms: ds = cp ln(T2/T1) - R ln(p2/p1).
"""

from __future__ import annotations

import math
from typing import Any

import pytest

from service.wire.operations import Operations

Document = dict[str, Any]
OPERATIONS = Operations.build()
R = 8.314462618 / 0.029  # [J/(kg K)] CODATA 2018 over the molar mass below
CP, C_OIL = 1010.0, 2000.0
FLUIDS = {
    "gas": {"kind": "ideal_gas", "molar_mass": "29 g/mol", "cp": "1.01 kJ/kg/K"},
    "oil": {"kind": "constant_liquid", "density": "900 kg/m3", "cp": "2 kJ/kg/K"},
}


def passing(fluid: str, inlet: dict[str, str], outlet: dict[str, str], **more: Any) -> Document:
    """2 kg/s through one boundary."""
    return {
        "system": "steady_flow",
        "fluids": FLUIDS,
        "boundaries": [{"id": "unit"}],
        "streams": [
            {"id": "a", "to": "unit", "fluid": fluid, "mass_flow": "2 kg/s", "state": inlet},
            {"id": "b", "from": "unit", "state": outlet},
        ],
        **more,
    }


def checks(document: Document) -> list[dict[str, Any]]:
    document["answer"] = {"units": "SI"}
    return list(OPERATIONS.solve(document)["checks"]["entropy"])


def only(document: Document) -> dict[str, Any]:
    (check,) = checks(document)
    return check


def heat(**members: str) -> list[dict[str, str]]:
    return [{"id": "q", "kind": "heat", **members}]


def turbine(efficiency: str, **members: Any) -> Document:
    relation = {"id": "eff", "kind": "isentropic_efficiency", "from": "a", "to": "b", "value": efficiency}
    work = {"id": "shaft", "kind": "shaft_work", "from": "unit", "rate": "?"}
    transfers = [work, *members.pop("transfers", [])]
    return passing(
        "gas", {"p": "10 bar", "T": "800 K"}, {"p": "1 bar"}, relations=[relation], transfers=transfers, **members
    )


# -- by hand -------------------------------------------------------------------------------------------------------


def test_an_ideal_valve_generates_the_entropy_of_its_pressure_drop() -> None:
    check = only(passing("gas", {"p": "10 bar", "T": "300 K"}, {"p": "2 bar", "T": "?"}))
    assert check["verdict"] == "satisfied"
    assert check["generation"]["value"] == pytest.approx(2 * R * math.log(5), rel=1e-9)  # m R ln(p1/p2)
    assert check["generation"]["unit"] == "W/K"


def test_a_reversible_turbine_generates_no_entropy() -> None:
    check = only(turbine("100 %"))
    assert check["verdict"] == "satisfied"
    assert abs(check["generation"]["value"]) < 1e-9 * 2 * CP  # of m cp


def test_a_turbine_generates_what_it_does_not_turn_into_work() -> None:
    ideal = 800 * 10 ** (-R / CP)  # [K] T1 (p2/p1)^(R/cp)
    T2 = 800 - 0.8 * (800 - ideal)
    expected = 2 * (CP * math.log(T2 / 800) + R * math.log(10))
    assert only(turbine("80 %"))["generation"]["value"] == pytest.approx(expected, rel=1e-8)


def test_heat_at_a_stated_temperature_takes_its_entropy_with_it() -> None:
    """m cp ln(T2/T1) + Q/T with Q = m cp (T1 - T2)."""
    document = passing(
        "oil", {"p": "2 bar", "T": "400 K"}, {"p": "2 bar", "T": "390 K"},
        transfers=heat(**{"from": "unit", "rate": "?", "temperature": "350 K"}),
    )  # fmt: skip
    expected = 2 * C_OIL * (math.log(390 / 400) + 10 / 350)
    assert only(document)["generation"]["value"] == pytest.approx(expected, rel=1e-9)


def exchanger(gas_out: str, **duty: str) -> Document:
    """2 kg/s of oil is warmed from 300 to 320 K by 4 kg/s of gas of 500 K."""
    streams = []
    for side, fluid, flow, p, warm, leaving in (
        ("hot", "gas", "4 kg/s", "1 bar", "500 K", gas_out),
        ("cold", "oil", "2 kg/s", "2 bar", "300 K", "320 K"),
    ):
        streams += [
            {"id": f"{side}-in", "to": side, "fluid": fluid, "mass_flow": flow, "state": {"p": p, "T": warm}},
            {"id": f"{side}-out", "from": side, "state": {"p": p, "T": leaving}},
        ]
    transfer = {"id": "duty", "kind": "heat", "from": "hot", "to": "cold", "rate": "?", **duty}
    sides = [{"id": "hot"}, {"id": "cold"}]
    return {"system": "steady_flow", "fluids": FLUIDS, "boundaries": sides, "streams": streams, "transfers": [transfer]}


T_GAS = 500 - 2 * C_OIL * 20 / (4 * CP)  # [K] from the duty of the oil
COOLED, WARMED = 4 * CP * math.log(T_GAS / 500), 2 * C_OIL * math.log(320 / 300)  # [W/K] of gas and oil


def test_the_two_sides_of_an_exchanger_are_checked_together() -> None:
    check = only(exchanger("?"))
    assert check["boundary"] == "hot + cold"
    assert check["verdict"] == "satisfied"
    assert check["generation"]["value"] == pytest.approx(COOLED + WARMED, rel=1e-9)


def test_a_stated_wall_temperature_shares_the_entropy_between_the_two_sides() -> None:
    hot, cold = checks(exchanger("?", temperature="400 K"))
    duty = 2 * C_OIL * 20
    assert hot["generation"]["value"] == pytest.approx(COOLED + duty / 400, rel=1e-9)
    assert cold["generation"]["value"] == pytest.approx(WARMED - duty / 400, rel=1e-9)


# -- verdicts ------------------------------------------------------------------------------------------------------


def test_an_efficiency_above_one_violates_the_second_law() -> None:
    check = only(turbine("110 %"))
    assert check["verdict"] == "violated"
    assert check["generation"]["value"] < 0


def test_a_wall_hotter_than_the_hot_side_violates_the_second_law_on_that_side() -> None:
    hot, cold = checks(exchanger("?", temperature="600 K"))
    assert (hot["verdict"], cold["verdict"]) == ("violated", "satisfied")


def test_a_heater_of_unknown_temperature_is_not_condemned_by_the_ambient_temperature() -> None:
    """Water that is warmed above its surroundings is warmed by something hotter, which is not drawn."""
    document = passing(
        "oil", {"p": "2 bar", "T": "300 K"}, {"p": "2 bar", "T": "350 K"},
        transfers=heat(to="unit", rate="?"), site={"ambient_temperature": "293 K"},
    )  # fmt: skip
    check = only(document)
    assert check["verdict"] == "not_checked"
    assert "`temperature`" in check["why"]
    assert "q" in check["why"]


def test_a_cooler_below_ambient_is_not_condemned_by_the_ambient_temperature() -> None:
    document = passing(
        "oil", {"p": "2 bar", "T": "300 K"}, {"p": "2 bar", "T": "280 K"},
        transfers=heat(**{"from": "unit", "rate": "?"}), site={"ambient_temperature": "303 K"},
    )  # fmt: skip
    assert only(document)["verdict"] == "not_checked"


def test_a_loss_to_known_surroundings_is_counted_at_their_temperature() -> None:
    document = passing(
        "oil", {"p": "2 bar", "T": "400 K"}, {"p": "2 bar", "T": "390 K"},
        transfers=heat(**{"from": "unit", "rate": "?"}), site={"ambient_temperature": "290 K"},
    )  # fmt: skip
    check = only(document)
    assert check["verdict"] == "satisfied"
    assert "ambient" in check["why"]
    assert check["generation"]["value"] == pytest.approx(2 * C_OIL * (math.log(390 / 400) + 10 / 290), rel=1e-9)


def test_a_loss_of_unknown_temperature_leaves_the_check_open() -> None:
    document = passing(
        "oil", {"p": "2 bar", "T": "400 K"}, {"p": "2 bar", "T": "390 K"},
        transfers=heat(**{"from": "unit", "rate": "?"}),
    )  # fmt: skip
    assert only(document)["verdict"] == "not_checked"


def test_an_impossible_turbine_is_found_although_its_loss_has_no_temperature() -> None:
    """1 kW of loss, at 273 K or above, carries 4 W/K at the most; the expansion destroys more."""
    document = turbine("120 %", transfers=heat(**{"from": "unit", "rate": "1 kW"}))
    check = only(document)
    assert check["verdict"] == "violated"
    assert "whatever temperature" in check["why"]


def test_an_engine_of_hidden_working_fluid_is_not_condemned() -> None:
    """Heat from a fire, work out, the rest into water of 290 to 300 K: 40 % is possible with a fire."""
    document = passing(
        "oil", {"p": "2 bar", "T": "290 K"}, {"p": "2 bar", "T": "300 K"},
        transfers=[
            {"id": "fire", "kind": "heat", "to": "unit", "rate": "?"},
            {"id": "shaft", "kind": "shaft_work", "from": "unit", "rate": "25 kW"},
        ],
    )  # fmt: skip
    assert only(document)["verdict"] == "not_checked"


def test_a_fuel_leaves_the_check_open_and_says_so() -> None:
    fuel = {
        "id": "gas-burnt",
        "kind": "fuel",
        "to": "unit",
        "mass_flow": "?",
        "heating_value": "40 MJ/kg",
        "basis": "net",
    }
    document = passing("oil", {"p": "2 bar", "T": "400 K"}, {"p": "2 bar", "T": "450 K"}, transfers=[fuel])
    check = only(document)
    assert check["verdict"] == "not_checked"
    assert "gas-burnt" in check["why"]


def test_a_reversible_pump_near_the_zero_of_entropy_is_not_condemned_by_round_off() -> None:
    """The brine has s = 0 at 20 degC, so that its own entropy flow is no scale for round-off."""
    brine = {"kind": "brine", "name": "MEG", "mass_fraction": 0.3}
    relation = {"id": "eff", "kind": "isentropic_efficiency", "from": "a", "to": "b", "value": "100 %"}
    document = passing(
        "brine", {"p": "1 bar", "T": "20 degC"}, {"p": "15 bar"}, relations=[relation],
        transfers=[{"id": "shaft", "kind": "shaft_work", "to": "unit", "rate": "?"}],
    )  # fmt: skip
    document["fluids"] = {"brine": brine}
    check = only(document)
    assert check["verdict"] == "satisfied"
    assert abs(check["generation"]["value"]) < 1e-7 * 2 * 3700  # of m cp; cp of 30 % glycol about 3700 J/(kg K)


def test_what_flows_does_not_matter_for_the_verdict_on_an_adiabatic_passage() -> None:
    document = passing("gas", {"p": "10 bar", "T": "300 K"}, {"p": "2 bar", "T": "?"})
    del document["streams"][0]["mass_flow"]
    check = only(document)
    assert check["verdict"] == "satisfied"
    assert check["generation"]["value"] == pytest.approx(R * math.log(5), rel=1e-9)  # per kg/s
