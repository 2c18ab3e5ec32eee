"""What advisories say beyond being raised: amounts by hand, words, grouping, and cases that only time brings."""

from __future__ import annotations

import copy
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from service.advisories import advise
from service.advisories.hazards import hazards
from service.balance.case import (
    AnswerOptions,
    Boundary,
    Case,
    Content,
    Limit,
    Quantity,
    Site,
    Stage,
    Transfer,
)
from service.balance.solution import Advisory, Solution, TransientResult
from service.engine.execute import run
from service.fluids.catalogue import FluidCatalogue
from service.solvers import pipeline

from .test_advisories import OPERATIONS, STEAM, Document, coil, exchanger, items, leak, limited, machine, pipe, valve

CATALOGUE = FluidCatalogue()


def told(document: Document, code: str) -> list[dict[str, str]]:
    return [item for item in items(document) if item["code"] == code]


def only(document: Document, code: str) -> dict[str, str]:
    (item,) = told(document, code)
    return item


# -- amounts -------------------------------------------------------------------------------------------------------


def test_a_limit_is_told_with_both_values_and_its_reason() -> None:
    item = only(limited("370 degC"), "limit-crossed")
    T = OPERATIONS.solve(limited("370 degC"))["answers"]["outlet.T"]["value"]
    assert item["message"] == f"outlet.T is {T:.5g} degC, above its limit of 370 degC (pipe class)."


def test_a_value_that_lies_on_its_limit_has_not_crossed_it() -> None:
    document = valve(inlet={"p": "41 bar", "T": "400 degC"}, outlet={"p": "11 bar", "T": "?"})
    document["limits"] = [{"of": "outlet.p", "max": "11 bar", "min": "1100 kPa"}]
    assert not told(document, "limit-crossed")


def test_braces_in_the_reason_of_a_limit_are_only_text() -> None:
    document = limited("370 degC")
    document["limits"][0]["why"] = "class {0} of {pipe}"
    assert "(class {0} of {pipe})" in only(document, "limit-crossed")["message"]


@pytest.mark.parametrize(
    ("of", "bound", "word"), [("outlet.T", "300 degC", "WARNING"), ("inlet.mass_flow", "1 kg/s", "CAUTION")]
)
def test_a_limit_warns_where_people_can_be_hurt_by_the_quantity(of: str, bound: str, word: str) -> None:
    document = limited("380 degC")
    document["limits"] = [{"of": of, "max": bound}]
    assert only(document, "limit-crossed")["signal_word"] == word


def test_the_suction_head_of_a_pump_is_that_above_boiling() -> None:
    """Water boils at 104 degC under 1.1668 bar and weighs 955.1 kg/m3 (steam tables, value from memory)."""
    message = only(
        machine("water", {"p": "1.3 bar", "T": "104 degC"}, {"p": "50 bar"}, eff="70 %"), "cavitation-margin"
    )
    head = float(message["message"].split(" lies only ")[1].split(" m ")[0])
    assert head == pytest.approx((1.3e5 - 1.1668e5) / (955.1 * 9.80665), rel=2e-2)  # of a difference of two pressures


def test_saturated_liquid_has_no_suction_head() -> None:
    document = machine("water", {"p": "0.1 bar", "saturated": "liquid"}, {"p": "50 bar"}, eff="70 %")
    assert " only 0 m " in only(document, "cavitation-margin")["message"]


def test_a_pump_without_a_stated_efficiency_is_watched_too() -> None:
    document = machine("water", {"p": "1.2 bar", "T": "104 degC"}, {"p": "50 bar", "T": "105 degC"})
    document["relations"] = []
    assert only(document, "cavitation-margin")["of"] == "inlet.p"


def test_the_second_law_is_told_with_the_entropy_that_would_be_destroyed() -> None:
    document = machine("water", STEAM, {"p": "0.5 bar", "x": "0.7"})
    (check,) = OPERATIONS.solve(copy.deepcopy(document))["checks"]["entropy"]
    message = only(document, "second-law-violated")["message"]
    assert f"destroyed ({-check['generation']['value']:.5g} {check['generation']['unit']})" in message


def test_sides_that_are_checked_together_are_named_together() -> None:
    item = only(exchanger("95 degC"), "second-law-violated")
    assert "hot and cold" in item["message"]
    assert item["of"] == "hot"


# -- neighbours that must stay silent ------------------------------------------------------------------------------


def test_a_restriction_into_another_system_is_no_release() -> None:
    at = {"p": "11 bar", "saturated": "vapour"}
    assert told(leak("water", at), "scalding-release")
    assert not told(leak("water", at, behind="5 bar"), "scalding-release")


def test_a_nozzle_may_be_faster_than_a_line() -> None:
    document = pipe("50 mm")
    document["relations"] = [
        {"id": "n", "kind": "isentropic_efficiency", "from": "inlet", "to": "outlet", "value": "?"}
    ]
    assert {item["of"] for item in told(document, "high-velocity")} == {"inlet.velocity"}


def test_a_liquid_that_is_expanded_is_no_wet_expansion() -> None:
    """A hydraulic expander lets a liquid flash on purpose; there are no blades for droplets to hit."""
    document = machine("R134a", {"p": "10 bar", "T": "35 degC"}, {"p": "3 bar"}, eff="70 %")
    assert not told(document, "wet-expansion")


def test_a_turbine_close_to_the_limit_of_wetness_is_told_that_it_is_close() -> None:
    close = only(machine("water", STEAM, {"p": "0.1 bar", "x": "0.89"}), "wet-expansion")
    assert "near" in close["message"]
    assert "near" not in only(machine("water", STEAM, {"p": "0.1 bar", "x": "0.87"}), "wet-expansion")["message"]


def test_a_heater_lets_a_liquid_boil_without_a_word() -> None:
    document = valve(inlet={"p": "6 bar", "T": "150 degC"}, outlet={"p": "2 bar", "x": "0.5"})
    document["transfers"] = [{"id": "duty", "kind": "heat", "to": "valve", "rate": "?"}]
    assert not told(document, "flashing-liquid")


def test_saturated_air_out_of_a_washer_is_what_is_meant() -> None:
    air = {"T": "25 degC", "relative_humidity": "60 %"}
    dry = coil(air, {"relative_humidity": "100 %"}, "20 degC")
    assert told(dry, "condensation")
    washer = copy.deepcopy(dry)
    state = {"p": "1 bar", "T": "15 degC"}
    washer["streams"][1]["state"]["T"] = "20 degC"
    washer["streams"].append({"id": "spray", "to": "coil", "fluid": "water", "mass_flow": "?", "state": state})
    assert not told(washer, "condensation")


def test_a_cross_in_parallel_flow_is_impossible() -> None:
    """Hot 80 to 48.5, cold 20 to 62 degC: fine in counterflow."""
    assert told(exchanger("62 degC"), "temperature-cross")
    assert told(exchanger("62 degC", "parallel_flow"), "temperature-impossible")
    assert not told(exchanger("62 degC", "parallel_flow"), "temperature-cross")


def test_a_cross_that_one_shell_pass_cannot_reach_is_impossible() -> None:
    """R = 0.75, P = 0.75: beyond the P of 2/(1 + R + sqrt(1 + R^2)) = 2/3 at which F vanishes (Bowman 1940)."""
    assert told(exchanger("65 degC", "shell_and_tube"), "temperature-impossible")
    assert not told(exchanger("58 degC", "shell_and_tube"), "temperature-impossible")  # P = 0.63


def test_a_fuel_cannot_give_more_than_its_gross_heating_value() -> None:
    def boiler(share: str, basis: str) -> Document:
        document = valve(inlet={"p": "10 bar", "T": "60 degC"}, outlet={"p": "10 bar", "T": "?"})
        document["boundaries"].append({"id": "fire"})
        fuel = {"id": "gas", "kind": "fuel", "to": "fire", "mass_flow": "0.01 kg/s", "heating_value": "40 MJ/kg"}
        document["transfers"] = [
            {**fuel, "basis": basis},
            {"id": "useful", "kind": "heat", "from": "fire", "to": "valve", "rate": "?"},
            {"id": "flue", "kind": "heat", "from": "fire", "rate": "?"},
        ]
        document["relations"] = [{"id": "share", "kind": "ratio", "of": ["useful.rate", "gas.rate"], "value": share}]
        return document

    assert told(boiler("105 %", "gross"), "efficiency-impossible")
    assert not told(boiler("105 %", "net"), "efficiency-impossible")  # a condensing boiler
    assert told(boiler("115 %", "net"), "efficiency-impossible")


# -- the same thing is told once -----------------------------------------------------------------------------------


def test_a_vacuum_that_runs_through_several_streams_is_told_once() -> None:
    document = valve(inlet={"p": "0.3 bar", "T": "150 degC"}, outlet={"p": "0.3 bar", "T": "?"})
    item = only(document, "below-atmosphere")
    assert "so is outlet" in item["message"]


def test_an_advisory_is_not_repeated() -> None:
    found = items(machine("water", STEAM, {"p": "0.5 bar", "x": "0.7"}))
    assert len({tuple(sorted(item.items())) for item in found}) == len(found)


# -- substances ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("composition", "expected"),
    [
        ({"water": 1.0}, set()),
        ({"air": 1.0}, set()),
        ({"ammonia": 1.0}, {"toxic", "flammable"}),
        ({"R134a": 1.0}, {"asphyxiant"}),
        ({"R32": 1.0}, {"flammable"}),  # A2L
        ({"R123": 1.0}, {"toxic"}),  # B1
        ({"methane": 0.9, "nitrogen": 0.1}, {"flammable"}),
        ({"nitrogen": 0.99, "hydrogen": 0.01}, {"flammable"}),
        ({"nitrogen": 0.9999, "hydrogen": 0.0001}, {"asphyxiant"}),
        ({"nitrogen": 0.79, "oxygen": 0.21}, set()),
        ({"nitrogen": 0.85, "oxygen": 0.15}, {"asphyxiant"}),
        ({"nitrogen": 0.6, "oxygen": 0.4}, {"oxidising"}),
        ({"nitrogen": 0.75, "carbon dioxide": 0.1, "water": 0.149, "carbon monoxide": 0.001}, {"toxic"}),
    ],
    ids=lambda value: str(value) if isinstance(value, dict) else "",  # a set has no stable text for the workers
)
def test_a_gas_is_known_by_what_it_is_made_of(composition: dict[str, float], expected: set[str]) -> None:
    assert hazards(composition) == expected


def test_a_leaking_mixture_is_known_by_its_components() -> None:
    document = leak("syngas", {"p": "3 bar", "T": "20 degC"})
    fractions = {"hydrogen": 0.5, "carbon monoxide": 0.3, "nitrogen": 0.2}
    document["fluids"] = {"syngas": {"kind": "gas_mixture", "model": "ideal_gas", "mole_fractions": fractions}}
    assert {"toxic-release", "flammable-release"} <= {item["code"] for item in items(document)}


# -- what only time brings -----------------------------------------------------------------------------------------


def quantities(content: str, **values: tuple[str, float | None]) -> dict[str, Quantity]:
    """name=(kind, value [SI]), value None asks; `initial_p` stands for initial.p."""
    named = {name.replace("_", ".", 1): given for name, given in values.items()}
    return {n: Quantity(f"{content}.{n}", kind, value, value is None) for n, (kind, value) in named.items()}


def shut_in(final_T: float, minimum: float | None = None, limits: tuple[Limit, ...] = ()) -> Case:
    """10 kg of water of 2 bar and 20 degC, warmed in a vessel that it fills."""
    more: dict[str, Any] = {"wall_minimum_temperature": ("temperature", minimum)} if minimum is not None else {}
    water = Content(
        "water", "vessel", "water",
        quantities(
            "water", mass=("mass", 10.0), initial_p=("pressure", 2e5), initial_T=("temperature", 293.15),
            final_T=("temperature", final_T), final_p=("pressure", None), **more,
        ),
        (Stage("constant_volume"),),
    )  # fmt: skip
    heat = Transfer("heat", "heat", None, "vessel", {"energy": Quantity("heat.energy", "energy", None, True)})
    return Case(
        "", "closed", Site(), {}, (Boundary("vessel"),), (), (heat,), (), limits, AnswerOptions(), contents=(water,)
    )


def codes(case: Case) -> set[str]:
    return {advisory.code for advisory in pipeline.solve(case, CATALOGUE).advisories}


def test_a_vessel_full_of_liquid_bursts_when_it_is_warmed() -> None:
    """Water at constant volume gains some 5 bar per kelvin."""
    assert "liquid-full" in codes(shut_in(303.15))
    assert "liquid-full" not in codes(shut_in(293.2))


def over_time(case: Case, transient: TransientResult) -> list[Advisory]:
    """The advisories of a case to which a course over time belongs."""
    built, plan = pipeline.prepare(case, CATALOGUE)
    solution: Solution = replace(pipeline.solve(case, CATALOGUE), transient=transient)
    return advise(built, run(plan), solution)


def course(stopped: str = "", **extremes: tuple[float, float, float, float]) -> TransientResult:
    named = {name.replace("__", "."): ends for name, ends in extremes.items()}
    return TransientResult("time", 600.0, stopped, np.array([0.0, 600.0]), {}, {}, [], named, {})


def test_a_wall_below_its_design_temperature_is_told_with_its_time() -> None:
    cold = course(water__wall__T=(230.0, 120.0, 293.0, 0.0))
    (found,) = [a for a in over_time(shut_in(293.2, minimum=243.0), cold) if a.code == "wall-too-cold"]
    assert found.amounts == (("temperature", 230.0), ("time", 120.0), ("temperature", 243.0))
    assert found.of == "water.wall.T"
    assert not [a for a in over_time(shut_in(293.2, minimum=223.0), cold) if a.code == "wall-too-cold"]


def test_a_calculation_that_stopped_early_says_when_and_why() -> None:
    (found,) = [a for a in over_time(shut_in(293.2), course("The tank is empty.")) if a.code == "stopped-early"]
    assert "The tank is empty." in found.message
    assert found.amounts == (("time", 600.0),)
    assert not [a for a in over_time(shut_in(293.2), course()) if a.code == "stopped-early"]


def test_a_limit_is_held_against_the_whole_course() -> None:
    limit = Limit("water.final.p", None, Quantity("", "pressure", 5e6), "shell")
    peak = course(water__final__p=(2e5, 0.0, 8e6, 90.0))
    (found,) = [a for a in over_time(shut_in(293.2, limits=(limit,)), peak) if a.code == "limit-crossed"]
    assert found.amounts == (("pressure", 8e6), ("pressure", 5e6), ("time", 90.0))
    assert found.told(lambda kind, value: f"{value:g}").startswith("water.final.p is 8e+06, 90 after the start, above")
