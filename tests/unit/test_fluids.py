"""What holds for every property model: a state comes back from any pair of its properties, and obeys thermodynamics."""

from __future__ import annotations

import math

import pytest

from service.fluids.pairs import PREFERENCE
from service.fluids.protocol import Fluid, State
from service.fluids.simple_fluid import SimpleFluid
from tests.unit.fluid_models import EVAPORATING, SIMPLE, SINGLE_PHASE, WET, model

SINGLE = [(name, p, T) for name, places in SINGLE_PHASE.items() for p, T in places]
ALL = [(name, ("p", "T"), place) for name, p, T in SINGLE for place in [(p, T)]] + [
    (name, ("p", "x"), place) for name, places in WET.items() for place in places
]


def label(case: object) -> str:
    return str(case).replace(" ", "")


def with_degrees(fluid: Fluid, name: str, at: tuple[str, str], place: tuple[float, float]) -> State:
    extras = ("superheat", "subcooling") if name in EVAPORATING else ()
    return fluid.state(at, place, extras)


def pairs_of(fluid: Fluid) -> tuple[tuple[str, str], ...]:
    return fluid.pairs if isinstance(fluid, SimpleFluid) else PREFERENCE


def fits(fluid: Fluid, pair: tuple[str, str], values: dict[str, float]) -> bool:
    """Whether the pair means something at this state."""
    first, second = (values.get(n, math.nan) for n in pair)
    if math.isnan(first) or math.isnan(second):
        return False
    if pair == ("p", "T") and not math.isnan(values["x"]):
        return False
    if pair[1] in ("superheat", "subcooling"):
        return second > 0.0 and math.isnan(values["x"])
    # these pairs have two states each, or hardly tell pressures apart (see the tests of each below)
    return pair not in (("h", "u"), ("s", "u"), ("x", "h"), ("x", "u"), ("x", "s"), ("T", "h"))


@pytest.mark.parametrize(("name", "at", "place"), ALL, ids=label)
def test_every_pair_of_properties_leads_back_to_the_state(
    name: str, at: tuple[str, str], place: tuple[float, float]
) -> None:
    fluid = model(name)
    known = with_degrees(fluid, name, at, place).values
    on_line = known["x"] in (0.0, 1.0)
    tried = 0
    for pair in pairs_of(fluid):
        if not fits(fluid, pair, known):
            continue
        found = fluid.state(pair, (known[pair[0]], known[pair[1]]))
        # a root that ends next to the saturation line is put onto it, which moves T by up to 2e-7 of itself;
        # liquids hardly yield to pressure, so that p from (T, rho) is known to 1e-6 of 100 bar
        assert found.values["T"] == pytest.approx(known["T"], abs=2e-4 if on_line else 1e-5), pair
        assert found.values["p"] == pytest.approx(known["p"], rel=5e-6 if on_line else 1e-6, abs=10.0), pair
        assert found.values["h"] == pytest.approx(known["h"], abs=0.5), pair  # of 1e5 J/kg
        if not on_line:  # from the line itself rounding may lead to either side
            assert found.values["x"] == pytest.approx(known["x"], abs=1e-6, nan_ok=True), pair
        tried += 1
    assert tried >= (4 if name in SIMPLE else 10)


@pytest.mark.parametrize(("name", "at", "place"), ALL, ids=label)
def test_the_given_values_come_back_to_the_last_bit(name: str, at: tuple[str, str], place: tuple[float, float]) -> None:
    state = model(name).state(at, place)
    assert tuple(state.values[n] for n in at) == place
    assert model(name).state(at[::-1], place[::-1]).values == pytest.approx(state.values, nan_ok=True, rel=1e-14)


@pytest.mark.parametrize(("name", "at", "place"), ALL, ids=label)
def test_enthalpy_is_internal_energy_and_flow_work(name: str, at: tuple[str, str], place: tuple[float, float]) -> None:
    v = model(name).state(at, place).values
    scale = abs(v["h"]) + v["p"] * v["v"]
    assert abs(v["h"] - v["u"] - v["p"] * v["v"]) <= 1e-10 * scale
    assert v["rho"] * v["v"] == pytest.approx(1.0, rel=1e-14)


@pytest.mark.parametrize(("name", "p", "T"), SINGLE, ids=label)
def test_entropy_follows_from_enthalpy_along_an_isobar(name: str, p: float, T: float) -> None:
    """T ds = dh at constant p."""
    fluid, step = model(name), 1e-3
    below, above = (fluid.state(("p", "T"), (p, T + d)).values for d in (-step, step))
    dh, ds = above["h"] - below["h"], above["s"] - below["s"]
    # region 3 of IF97 goes through backward equations that are steady to 1e-5 only (IAPWS SR5-05)
    assert T * ds == pytest.approx(dh, rel=2e-2 if name == "IF97" and 623.15 < T < 800.0 and p > 1.6e7 else 1e-5)


@pytest.mark.parametrize("name", EVAPORATING)
def test_saturation_temperature_and_pressure_are_inverse(name: str) -> None:
    fluid = model(name)
    p = WET[name][0][0]
    T = fluid.saturation(p=p)
    assert T is not None
    assert fluid.saturation(T=T) == pytest.approx(p, rel=1e-6)
    assert fluid.state(("p", "x"), (p, 1.0)).values["T"] == pytest.approx(T, rel=1e-9)


@pytest.mark.parametrize("name", EVAPORATING)
def test_there_is_no_saturation_above_the_critical_point_nor_below_the_triple_point(name: str) -> None:
    fluid = model(name)
    assert fluid.limits.p_critical is not None
    assert fluid.saturation(p=1.01 * fluid.limits.p_critical) is None
    assert fluid.saturation(T=0.5 * fluid.limits.T_min) is None
    assert fluid.saturation() is None


@pytest.mark.parametrize("name", SIMPLE)
def test_fluids_of_constant_properties_do_not_evaporate(name: str) -> None:
    assert model(name).saturation(p=1e5) is None


@pytest.mark.parametrize(
    ("name", "pair", "values", "phase"),
    [
        ("water", ("p", "T"), (1e5, 300.0), "liquid"),
        ("water", ("p", "T"), (1e5, 400.0), "vapour"),
        ("water", ("p", "T"), (1e5, 700.0), "gas"),
        ("water", ("p", "T"), (3e7, 700.0), "supercritical"),
        ("water", ("p", "T"), (3e7, 500.0), "liquid"),
        ("water", ("p", "x"), (1e5, 0.5), "two_phase"),
        ("water", ("p", "x"), (1e5, 0.0), "liquid"),
        ("water", ("p", "x"), (1e5, 1.0), "vapour"),
        ("IF97", ("p", "h"), (1e5, 1e6), "two_phase"),
        ("IF97", ("p", "T"), (3e7, 700.0), "supercritical"),
        ("ideal gas", ("p", "T"), (1e5, 300.0), "gas"),
        ("constant liquid", ("p", "T"), (1e5, 300.0), "liquid"),
        ("solid", ("p", "T"), (1e5, 300.0), "solid"),
    ],
)
def test_phases_are_named_in_our_words(
    name: str, pair: tuple[str, str], values: tuple[float, float], phase: str
) -> None:
    assert model(name).state(pair, values).phase == phase


@pytest.mark.parametrize("name", EVAPORATING)
def test_superheat_and_subcooling_count_from_the_saturation_line(name: str) -> None:
    fluid = model(name)
    p = WET[name][0][0]
    hot = fluid.state(("p", "superheat"), (p, 12.0), ("superheat", "subcooling"))
    cold = fluid.state(("p", "subcooling"), (p, 3.0), ("subcooling",))
    dew = fluid.state(("p", "x"), (p, 1.0)).values["T"]
    bubble = fluid.state(("p", "x"), (p, 0.0)).values["T"]
    assert hot.values["T"] == pytest.approx(dew + 12.0, abs=1e-9)
    assert cold.values["T"] == pytest.approx(bubble - 3.0, abs=1e-9)
    assert hot.values["superheat"] == 12.0
    assert hot.values["subcooling"] == pytest.approx(bubble - dew - 12.0, abs=1e-9)
    again = fluid.state(("T", "superheat"), (hot.values["T"], 12.0))
    assert again.values["p"] == pytest.approx(p, rel=1e-6)


@pytest.mark.parametrize("name", EVAPORATING)
def test_no_superheat_is_saturated_vapour(name: str) -> None:
    fluid = model(name)
    p = WET[name][0][0]
    assert fluid.state(("p", "superheat"), (p, 0.0)).values["h"] == fluid.state(("p", "x"), (p, 1.0)).values["h"]
    assert fluid.state(("p", "subcooling"), (p, 0.0)).values["x"] == 0.0


def test_heat_capacity_and_speed_of_sound_mean_nothing_in_wet_steam() -> None:
    for name in ("water", "IF97"):
        wet = model(name).state(("p", "x"), (1e6, 0.5), ("cp", "speed_of_sound", "viscosity")).values
        assert all(math.isnan(wet[n]) for n in ("cp", "speed_of_sound", "viscosity"))
        dry = model(name).state(("p", "T"), (1e6, 500.0), ("cp", "speed_of_sound", "viscosity", "unheard of")).values
        assert dry["cp"] > 2000.0  # cp of steam near saturation, about 2.5 kJ/(kg K)
        assert 400.0 < dry["speed_of_sound"] < 600.0
        assert math.isnan(dry["unheard of"])


@pytest.mark.parametrize(
    ("known", "chosen"),
    [
        (("p", "T", "h"), ("p", "h")),
        (("p", "T"), ("p", "T")),
        (("p", "T", "x"), ("p", "x")),
        (("T", "rho", "u"), ("rho", "u")),
        (("p", "T", "rho"), ("p", "T")),
        (("h", "s"), ("h", "s")),
        (("p",), None),
        (("rho", "v"), None),
        (("superheat", "x"), None),
    ],
)
def test_the_best_conditioned_pair_is_chosen(known: tuple[str, ...], chosen: tuple[str, str] | None) -> None:
    assert model("water").inputs(known) == chosen
    assert model("water").inputs(frozenset(known)) == chosen


def test_an_ideal_gas_is_not_fixed_by_two_functions_of_temperature() -> None:
    assert model("ideal gas").inputs(("T", "h")) is None
    assert model("ideal gas").inputs(("h", "u")) is None
    assert model("constant liquid").inputs(("T", "rho")) is None


@pytest.mark.parametrize("name", EVAPORATING)
def test_bounds_hold_the_states_of_the_suite(name: str) -> None:
    fluid = model(name)
    for p, T in SINGLE_PHASE[name]:
        values = fluid.state(("p", "T"), (p, T)).values
        for prop in ("p", "T", "h", "s", "u", "rho", "v"):
            low, high = fluid.bounds(prop)
            assert low <= values[prop] <= high
    assert fluid.bounds("x") == (0.0, 1.0)


@pytest.mark.parametrize("name", SIMPLE)
def test_bounds_of_simple_models_are_their_limits(name: str) -> None:
    fluid = model(name)
    assert fluid.bounds("T") == (fluid.limits.T_min, fluid.limits.T_max)
    low, high = fluid.bounds("h")
    assert low < fluid.state(("p", "T"), (1e5, 300.0)).values["h"] < high


# pairs that more than one state fits, or that hardly tell pressures apart: what comes back has the given values


@pytest.mark.parametrize("name", ["water", "IF97", "R134a", "nitrogen"])
@pytest.mark.parametrize("pair", [("h", "u"), ("s", "u"), ("T", "h")], ids=label)
def test_an_ill_conditioned_pair_gives_a_state_that_has_both_values(name: str, pair: tuple[str, str]) -> None:
    fluid = model(name)
    p, T = SINGLE_PHASE[name][1]
    known = fluid.state(("p", "T"), (p, T)).values
    found = fluid.state(pair, (known[pair[0]], known[pair[1]])).values
    there = fluid.state(("p", "h"), (found["p"], found["h"])).values
    scale = {"T": 1.0, "h": 1e6, "s": 1e3, "u": 1e6}  # [K], [J/kg], [J/(kg K)]: of the size of the values
    for prop in pair:
        assert there[prop] == pytest.approx(known[prop], abs=1e-5 * scale[prop])


def test_of_two_states_the_one_at_the_lower_pressure_is_taken() -> None:
    """Water at 25 degC has h = 200 kJ/kg as wet steam and as liquid near 100 MPa."""
    found = model("water").state(("T", "h"), (298.15, 2e5))
    assert found.phase == "two_phase"


# closed formulas of the simple models, by hand


def test_ideal_gas_by_hand() -> None:
    """R = 8.31446261815324/0.02896 = 287.10161 J/(kg K); 300 K: h = 1005 * 26.85; rho = 1e5/(R 300)."""
    v = model("ideal gas").state(("p", "T"), (1e5, 300.0)).values
    assert v["h"] == pytest.approx(26984.25, rel=1e-12)
    assert v["rho"] == pytest.approx(1e5 / (287.101609742 * 300.0), rel=1e-9)
    assert v["s"] == pytest.approx(
        1005.0 * math.log(300.0 / 273.15) - 287.101609742 * math.log(1e5 / 101325.0), rel=1e-9
    )


def test_constant_liquid_by_hand() -> None:
    """870 kg/m3, 2100 J/(kg K), 300 K, 30 bar: h = 2100 * 26.85 + (3e6 - 101325)/870 = 59716.87 J/kg."""
    v = model("constant liquid").state(("p", "T"), (3e6, 300.0)).values
    assert v["h"] == pytest.approx(56385.0 + 2898675.0 / 870.0, rel=1e-14)
    assert v["s"] == pytest.approx(2100.0 * math.log(300.0 / 273.15), rel=1e-14)
    assert v["u"] == pytest.approx(v["h"] - 3e6 / 870.0, rel=1e-12)
