"""What is known to go wrong in property libraries, met with an error of ours that says the range and what to do."""

from __future__ import annotations

import math
import re
import threading

import pytest

from service.errors import CaseError, StateAmbiguous, StateOutOfRange
from service.fluids.catalogue import FluidCatalogue
from service.fluids.protocol import Fluid
from tests.unit.fluid_models import EVAPORATING, SIMPLE, SPECS, WET, model

WATERS = ("water", "IF97")


def refused(fluid: Fluid, pair: tuple[str, str], values: tuple[float, float]) -> StateOutOfRange:
    with pytest.raises(StateOutOfRange) as caught:
        fluid.state(pair, values)
    return caught.value


@pytest.mark.parametrize("T", [3000.0, 1e6])
@pytest.mark.parametrize("name", EVAPORATING)
def test_a_temperature_above_the_range_is_refused_with_the_range(name: str, T: float) -> None:
    fluid = model(name)
    error = refused(fluid, ("p", "T"), (1e5, T))
    assert f"{fluid.limits.T_max - 273.15:.6g} degC" in error.detail
    assert error.issues[0].address == "T"
    assert error.issues[0].hint


@pytest.mark.parametrize("name", EVAPORATING)
def test_a_pressure_above_the_range_is_refused_with_the_range(name: str) -> None:
    fluid = model(name)
    T = 0.5 * (fluid.limits.T_min + fluid.limits.T_max)
    error = refused(fluid, ("p", "T"), (1.01 * fluid.limits.p_max, T))
    assert f"{fluid.limits.p_max / 1e5:.6g} bar" in error.detail


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
@pytest.mark.parametrize("p", [0.0, -1e5, math.inf, -math.inf, math.nan])
def test_a_pressure_that_cannot_be_is_refused(name: str, p: float) -> None:
    fluid = model(name)
    refused(fluid, ("p", "T"), (p, 400.0))
    refused(fluid, ("p", "h"), (p, 1e5))


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
@pytest.mark.parametrize("value", [math.inf, -math.inf, math.nan])
def test_numbers_that_are_not_finite_are_refused_by_name(name: str, value: float) -> None:
    fluid = model(name)
    for prop in ("T", "h", "s", "u"):
        error = refused(fluid, ("p", prop), (1e5, value))
        assert "not a finite number" in error.detail or "outside" in error.detail
        assert prop in error.detail


def test_ice_is_told_with_the_melting_temperature() -> None:
    """At 1 bar water freezes at 273.1526 K: IAPWS R14-08(2011), melting pressure of ice Ih, by the library."""
    error = refused(model("water"), ("p", "T"), (1e5, 250.0))
    assert "0.00261752 degC" in error.detail
    assert "solid" in error.detail


def test_cold_water_under_pressure_is_liquid_down_to_its_melting_line() -> None:
    """At 100 MPa ice melts near -8.9 degC (IAPWS R14-08): liquid at -8 degC, ice at -10 degC."""
    assert model("water").state(("p", "T"), (1e8, 265.15)).phase == "liquid"
    assert "freezes" in refused(model("water"), ("p", "T"), (1e8, 263.15)).detail
    assert "solid" in refused(model("water"), ("p", "T"), (8e8, 280.0)).detail


@pytest.mark.parametrize("name", EVAPORATING)
def test_below_the_range_of_temperature_is_refused(name: str) -> None:
    fluid = model(name)
    error = refused(fluid, ("p", "T"), (1e5, 0.9 * fluid.limits.T_min))
    assert error.issues[0].address == "T"


@pytest.mark.parametrize("name", EVAPORATING)
def test_quality_at_a_temperature_below_the_triple_point_is_refused(name: str) -> None:
    """The library answers here without complaint."""
    fluid = model(name)
    assert fluid.limits.T_triple is not None
    refused(fluid, ("T", "x"), (fluid.limits.T_triple - 10.0, 0.5))


@pytest.mark.parametrize("name", EVAPORATING)
@pytest.mark.parametrize("x", [1.2, -0.01, math.nan, math.inf])
def test_a_quality_outside_of_zero_to_one_is_refused(name: str, x: float) -> None:
    error = refused(model(name), ("p", "x"), (5e5, x))
    assert "x" in error.detail
    refused(model(name), ("x", "T"), (x, 250.0))


@pytest.mark.parametrize("name", EVAPORATING)
def test_quality_above_the_critical_pressure_names_the_saturation_line(name: str) -> None:
    fluid = model(name)
    assert fluid.limits.p_critical is not None
    error = refused(fluid, ("p", "x"), (1.1 * fluid.limits.p_critical, 0.5))
    assert "critical point" in error.detail
    refused(fluid, ("p", "superheat"), (1.1 * fluid.limits.p_critical, 5.0))


@pytest.mark.parametrize("name", EVAPORATING)
def test_a_negative_superheat_is_refused(name: str) -> None:
    assert "subcooling" in refused(model(name), ("p", "superheat"), (5e5, -1.0)).issues[0].hint
    assert "superheat" in refused(model(name), ("p", "subcooling"), (5e5, -1.0)).issues[0].hint


@pytest.mark.parametrize("name", [n for n in EVAPORATING if n != "R410A"])
def test_pressure_and_temperature_on_the_saturation_line_ask_for_x(name: str) -> None:
    fluid, p = model(name), WET[name][0][0]
    T = fluid.state(("p", "x"), (p, 0.5)).values["T"]
    with pytest.raises(StateAmbiguous) as caught:
        fluid.state(("p", "T"), (p, T))
    assert "x" in caught.value.issues[0].hint
    assert "saturation line" in caught.value.detail


def test_a_blend_between_boiling_and_dew_point_asks_for_x() -> None:
    fluid = model("R410A")
    T = fluid.state(("p", "x"), (5e5, 0.5)).values["T"]
    with pytest.raises(StateAmbiguous) as caught:
        fluid.state(("p", "T"), (5e5, T))
    assert "between boiling and dew point" in caught.value.detail


@pytest.mark.parametrize("name", EVAPORATING)
@pytest.mark.parametrize("h", [-1e7, 3e7])
def test_an_enthalpy_out_of_range_is_refused_with_the_range_and_the_zero(name: str, h: float) -> None:
    error = refused(model(name), ("p", "h"), (1e6, h))
    assert error.detail.count("kJ/kg") >= 3
    assert "zero" in error.issues[0].hint


@pytest.mark.parametrize("name", WATERS)
def test_an_enthalpy_that_no_temperature_gives_at_this_pressure_is_refused_with_what_it_does_give(name: str) -> None:
    error = refused(model(name), ("p", "h"), (1e5, -1500.0))
    assert "h goes from" in error.detail


def test_if97_ends_at_500_bar_above_800_degc() -> None:
    """IAPWS R7-97(2012): 273.15-1073.15 K to 100 MPa, 1073.15-2273.15 K to 50 MPa."""
    fluid = model("IF97")
    assert fluid.state(("p", "T"), (5e7, 1800.0)).phase == "supercritical"
    assert fluid.state(("p", "T"), (1e8, 1073.15)).phase == "supercritical"
    error = refused(fluid, ("p", "T"), (6e7, 1100.0))
    assert "500 bar" in error.detail
    assert "helmholtz" in error.issues[0].hint
    refused(fluid, ("p", "T"), (1e5, 273.1))
    refused(fluid, ("p", "T"), (500.0, 300.0))


def test_every_message_can_be_told_in_other_units() -> None:
    for pair, values in [
        (("p", "T"), (1e5, 3000.0)), (("p", "x"), (1e5, 1.2)), (("p", "h"), (1e6, 3e7)), (("p", "T"), (2e9, 500.0)),
        (("p", "x"), (1e8, 0.5)), (("p", "h"), (1e5, -1500.0)), (("p", "T"), (1e5, 250.0)),
    ]:  # fmt: skip
        issue = refused(model("water"), pair, values).issues[0]
        assert issue.amounts
        text = issue.told(lambda kind, value: f"<{kind}>")
        assert "<" in text
        assert not re.search(r"[{}]", text)


def test_a_name_with_braces_stays_as_it_is() -> None:
    from service.fluids.protocol import FluidSpec

    fluid = FluidCatalogue().resolve(FluidSpec("ideal_gas", molar_mass=0.03, cp=1000.0, label="a{0}b"))
    assert "a{0}b" in refused(fluid, ("p", "T"), (1e5, 1e5)).detail


def test_two_properties_that_fix_no_state_are_told() -> None:
    for name in ("water", "IF97", "ideal gas"):
        for pair in (("rho", "v"), ("T", "wet_bulb"), ("p", "p")):
            with pytest.raises(CaseError):
                model(name).state(pair, (1.0, 1.0))
    with pytest.raises(StateAmbiguous):
        model("water").state(("p",), (1e5,))


@pytest.mark.parametrize("name", ["water", "IF97", "R410A"])
def test_values_at_odds_with_each_other_are_refused_after_a_search(name: str) -> None:
    """The middle of one property's range with the lowest value of the other: no state has both."""
    fluid = model(name)
    for first, second in (("rho", "u"), ("h", "u"), ("h", "s"), ("T", "h"), ("T", "s")):
        low, high = fluid.bounds(first)
        error = refused(fluid, (first, second), (0.4 * low + 0.6 * high, fluid.bounds(second)[0]))
        assert second in error.detail


def work(fluid: Fluid, out: list[tuple[float, ...]]) -> None:
    for k in range(150):
        p, T = 1e5 + 1e4 * k, 350.0 + k
        try:
            h = fluid.state(("p", "T"), (p, T)).values["h"]
        except StateAmbiguous:
            continue
        v = fluid.state(("p", "h"), (0.5 * p, h)).values
        out.append((h, v["T"], v["s"], v["rho"], v["x"] if v["x"] == v["x"] else -1.0))


@pytest.mark.parametrize("name", ["water", "IF97", "nitrogen"])
def test_threads_that_share_a_fluid_get_the_serial_answers_bit_by_bit(name: str) -> None:
    fluid = FluidCatalogue().resolve(SPECS[name])
    serial: list[tuple[float, ...]] = []
    work(fluid, serial)
    results: list[list[tuple[float, ...]]] = [[] for _ in range(8)]
    threads = [threading.Thread(target=work, args=(fluid, out)) for out in results]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert all(out == serial for out in results)


def test_threads_that_resolve_at_once_get_one_object() -> None:
    catalogue = FluidCatalogue()
    found: list[Fluid] = []
    threads = [threading.Thread(target=lambda: found.append(catalogue.resolve("propane"))) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len({id(fluid) for fluid in found}) == 1
