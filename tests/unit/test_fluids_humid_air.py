"""Humid air: one zero with water, consistent entropy, every pair of inputs, and refusals that help."""

from __future__ import annotations

import math
import threading

import iapws
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from service.errors import CaseError, StateAmbiguous, StateOutOfRange
from service.fluids import humid_air
from service.fluids import humid_air_relations as air
from service.fluids.protocol import FluidSpec

ATMOSPHERE = 101_325.0
AIR = humid_air.build(FluidSpec(kind="humid_air"))
STATES = [
    (ATMOSPHERE, 300.0, 0.010),
    (ATMOSPHERE, 265.0, 0.001),
    (ATMOSPHERE, 373.15, 0.10),
    (5e5, 330.0, 0.003),
    (ATMOSPHERE, 500.0, 0.05),
    (7e4, 290.0, 0.004),
]


def at(p: float, T: float, w: float) -> dict[str, float]:
    return AIR.state(("p", "T", "humidity_ratio"), (p, T, w)).values


@pytest.mark.parametrize("T", [273.16, 300.0, 350.0])
def test_water_in_air_and_water_on_its_own_share_one_zero_of_enthalpy(T):
    # at 10 Pa the gases do not feel each other; IAPWS-95 from the independent library `iapws`
    p, w = 10.0, 0.1
    in_air = (air.enthalpy(p, T, w) - air.enthalpy(p, T, 0.0)) / w
    alone = iapws.IAPWS95(T=T, P=air.amounts(w)[0] * p / 1e6).h * 1e3
    # 3 J/kg: the gas constants of the two formulations differ by 1.2e-5, which is 2 J/kg over 80 K of latent heat
    assert in_air == pytest.approx(alone, abs=3.0)


@pytest.mark.parametrize("T", [273.16, 300.0, 350.0])
def test_water_in_air_and_water_on_its_own_share_one_zero_of_entropy(T):
    p, w = 40.0, 0.1
    y = air.amounts(w)[0]
    in_air = (air.entropy(p, T, w) - air.entropy((1.0 - y) * p, T, 0.0)) / w
    alone = iapws.IAPWS95(T=T, P=y * p / 1e6).s * 1e3
    # 0.2 J/(kg K): 1.2e-5 (as above) of 9 to 12 kJ/(kg K), and R ln p is part of it
    assert in_air == pytest.approx(alone, abs=0.2)


@pytest.mark.parametrize("T", [280.0, 300.0, 330.0, 350.0])
def test_condensing_from_saturated_air_creates_no_entropy(T):
    """Equal chemical potentials: d(h - T s)/dW of saturated air is h - T s of liquid water at the same p and T."""
    p = ATMOSPHERE
    ws = air.saturated(p, T)
    step = 1e-3 * ws
    above, below = (air.enthalpy(p, T, w) - T * air.entropy(p, T, w) for w in (ws + step, ws - step))
    water = iapws.IAPWS95(T=T, P=p / 1e6)
    miss = (above - below) / (2 * step) - (water.h - T * water.s) * 1e3
    # on the scale of R T a miss of 2e-4 is a vapour pressure 0.02 % off; the model's enhancement factor has 0.05 %
    assert abs(miss) < 2e-4 * 461.5 * T


@pytest.mark.parametrize(("p", "T", "w"), STATES)
def test_entropy_belongs_to_enthalpy_and_volume(p, T, w):
    """dh = T ds + v dp along T and along p."""
    dT, dp = 1e-4 * T, 1e-4 * p
    dh = air.enthalpy(p, T + dT, w) - air.enthalpy(p, T - dT, w)
    ds = air.entropy(p, T + dT, w) - air.entropy(p, T - dT, w)
    assert T * ds == pytest.approx(dh, rel=3e-6)
    dh = air.enthalpy(p + dp, T, w) - air.enthalpy(p - dp, T, w)
    ds = air.entropy(p + dp, T, w) - air.entropy(p - dp, T, w)
    assert dh - T * ds == pytest.approx(air.volume(p, T, w) * 2 * dp, rel=1e-6)


def test_dry_air_has_its_zero_at_0_degc_and_one_atmosphere():
    state = at(ATMOSPHERE, 273.15, 0.0)
    # the reference state of ASHRAE RP-1485; 1e-3 J/kg on the scale of cp times a millikelvin
    assert state["h"] == pytest.approx(0.0, abs=1e-3)
    assert state["s"] == pytest.approx(0.0, abs=1e-5)


@pytest.mark.parametrize(("p", "T", "w"), STATES)
def test_every_pair_of_inputs_leads_back_to_the_same_state(p, T, w):
    state = at(p, T, w)
    for pair in AIR.pairs:
        if {"wet_bulb", "h"} <= set(pair) and state["wet_bulb"] < 273.16:
            continue  # refused over ice, see below
        back = AIR.state(pair, tuple(state[name] for name in pair)).values
        assert back["T"] == pytest.approx(T, rel=1e-10), pair
        assert back["humidity_ratio"] == pytest.approx(w, rel=1e-8), pair


@given(
    p=st.floats(3e4, 2e6),
    T=st.floats(260.0, 500.0),
    part=st.floats(0.01, 1.0),
    pair=st.sampled_from(AIR.pairs[:10]),
)
@settings(max_examples=60, deadline=None)
def test_random_states_return_from_their_inputs(p, T, part, pair):
    ws = air.saturated(p, T)
    w = part * min(ws, 1.0)
    state = at(p, T, w)
    assume(all(math.isfinite(state[name]) for name in pair))
    back = AIR.state(pair, tuple(state[name] for name in pair)).values
    assert back["T"] == pytest.approx(T, rel=1e-9)
    # W from a frost point or an ice bulb carries the rounding of a small difference: scale 1e-3 kg/kg
    assert back["humidity_ratio"] == pytest.approx(w, rel=1e-7, abs=1e-10)


@pytest.mark.parametrize(("p", "T", "w"), [s for s in STATES if s[1] > 280.0])
def test_wet_bulb_is_the_temperature_of_adiabatic_saturation(p, T, w):
    B = at(p, T, w)["wet_bulb"]
    saturated = AIR.state(("p", "T", "relative_humidity"), (p, B, 1.0)).values
    water = iapws.IAPWS95(T=B, P=p / 1e6).h * 1e3
    supplied = at(p, T, w)["h"] + (saturated["humidity_ratio"] - w) * water
    # closure on the scale of the saturated air's enthalpy; the two IAPWS-95 programs agree to 1e-8
    assert supplied == pytest.approx(saturated["h"], rel=1e-7)


@pytest.mark.parametrize("other", ["h", "s"])
def test_dense_hot_and_wet_air_is_found_where_its_heat_capacity_is_far_from_that_of_a_gas(other):
    p, T, w = 8.26e6, 526.6, 0.8
    state = at(p, T, w)
    back = AIR.state(("p", "humidity_ratio", other), (p, w, state[other])).values
    assert back["T"] == pytest.approx(T, rel=1e-10)


def test_saturated_air_has_one_temperature_three_times():
    state = AIR.state(("p", "T", "relative_humidity"), (ATMOSPHERE, 300.0, 1.0)).values
    assert state["wet_bulb"] == pytest.approx(300.0, rel=1e-9)
    assert state["dew_point"] == pytest.approx(300.0, rel=1e-9)


def test_an_ideal_fan_keeps_entropy_and_humidity():
    inlet = at(ATMOSPHERE, 293.15, 0.008)
    pair = ("p", "humidity_ratio", "s")
    outlet = AIR.state(pair, (ATMOSPHERE + 3000.0, 0.008, inlet["s"])).values
    # small pressure rise: dh = v dp, with the mean of both volumes good to (dp/p)^2/12
    volume = 1.008 * (inlet["v"] + outlet["v"]) / 2.0
    assert outlet["h"] - inlet["h"] == pytest.approx(volume * 3000.0, rel=2e-4)


@pytest.mark.parametrize(
    ("inputs", "values", "says"),
    [
        (("p", "T", "humidity_ratio"), (ATMOSPHERE, 290.0, 0.02), "would be fog"),
        (("p", "T", "relative_humidity"), (ATMOSPHERE, 290.0, 1.2), "relative_humidity"),
        (("p", "T", "relative_humidity"), (ATMOSPHERE, 290.0, 60.0), "relative_humidity"),
        (("p", "T", "relative_humidity"), (ATMOSPHERE, 400.0, 0.9), "means more than"),
        (("p", "T", "wet_bulb"), (ATMOSPHERE, 290.0, 295.0), "the wet bulb of 21.85 degC lies above"),
        (("p", "T", "wet_bulb"), (ATMOSPHERE, 320.0, 280.0), "even dry air"),
        (("p", "T", "dew_point"), (ATMOSPHERE, 290.0, 291.0), "the dew point of 17.85 degC lies above"),
        (("p", "T", "h"), (ATMOSPHERE, 290.0, 1e6), "h lies between"),
        (("p", "humidity_ratio", "h"), (ATMOSPHERE, 0.02, 2e4), "h = 20 kJ/kg lies outside"),
        (("p", "T", "humidity_ratio"), (ATMOSPHERE, 900.0, 0.01), "T = 626.85 degC"),
        (("p", "T", "humidity_ratio"), (1e9, 300.0, 0.01), "p = 10000 bar"),
        (("p", "T", "humidity_ratio"), (ATMOSPHERE, 300.0, -0.01), "humidity_ratio"),
        (("p", "T", "humidity_ratio"), (ATMOSPHERE, math.nan, 0.01), "finite"),
        (("p", "wet_bulb", "h"), (ATMOSPHERE, 270.0, 8_000.0), "over ice"),
        (("p", "wet_bulb", "h"), (ATMOSPHERE, 293.15, 9e4), "do not belong together"),
    ],
)
def test_impossible_air_is_refused_in_words(inputs, values, says):
    with pytest.raises(StateOutOfRange, match=says.replace("+", r"\+")):
        AIR.state(inputs, values)


def test_no_air_is_invented_in_the_jump_of_the_wet_bulb_between_ice_and_water():
    """Over ice the bulb ends at 0.01 degC; every wet bulb just below it must come back from the state it leads to."""
    refused = 0
    for b in np.linspace(272.5, 273.159, 12).tolist():
        try:
            state = AIR.state(("p", "humidity_ratio", "wet_bulb"), (ATMOSPHERE, 0.002, b)).values
        except StateOutOfRange:
            refused += 1
            continue
        assert at(ATMOSPHERE, state["T"], 0.002)["wet_bulb"] == pytest.approx(b, rel=1e-6)
    assert 0 < refused < 12


def test_inputs_that_say_the_same_twice_are_not_accepted():
    assert AIR.inputs({"p", "humidity_ratio", "dew_point"}) is None
    with pytest.raises(StateAmbiguous, match="do not fix a state"):
        AIR.state(("p", "humidity_ratio", "dew_point"), (ATMOSPHERE, 0.01, 287.0))


def test_air_needs_its_pressure():
    assert AIR.inputs({"T", "relative_humidity", "humidity_ratio"}) is None
    assert AIR.inputs({"p", "T", "relative_humidity"}) == ("p", "T", "relative_humidity")


def test_dry_air_has_no_dew_point():
    state = at(ATMOSPHERE, 300.0, 0.0)
    assert math.isnan(state["dew_point"])
    assert state["relative_humidity"] == 0.0


def test_a_bad_row_costs_only_itself():
    T = np.array([290.0, 290.0, 300.0])
    w = np.array([0.005, 0.5, 0.01])
    inputs = ("p", "T", "humidity_ratio")
    columns, errors = AIR.columns(inputs, (np.full(3, ATMOSPHERE), T, w), ("h", "wet_bulb"))
    assert set(errors) == {1}
    assert isinstance(errors[1], CaseError)
    assert np.isnan(columns["h"][1])
    for row in (0, 2):
        expected = at(ATMOSPHERE, T[row], w[row])
        assert columns["h"][row] == expected["h"]
        assert columns["wet_bulb"][row] == expected["wet_bulb"]


def test_partial_derivatives_agree_with_the_heat_capacity():
    state = AIR.state(("p", "T", "humidity_ratio"), (ATMOSPHERE, 300.0, 0.01), ("cp",))
    slopes = AIR.partials(state, ("p", "T", "humidity_ratio"), ("h",))["h"]
    # the library's own cp per kg of dry air is a difference quotient over 2 mK
    assert slopes[1] == pytest.approx(state.values["cp"], rel=1e-5)


def test_partial_derivatives_turn_around():
    state = AIR.state(("p", "T", "humidity_ratio"), (ATMOSPHERE, 300.0, 0.01))
    forward = AIR.partials(state, ("p", "T", "humidity_ratio"), ("h",))["h"][1]
    backward = AIR.partials(state, ("p", "h", "humidity_ratio"), ("T",))["T"][1]
    assert forward * backward == pytest.approx(1.0, rel=1e-9)


def test_partial_derivatives_exist_on_the_saturation_line():
    state = AIR.state(("p", "T", "relative_humidity"), (ATMOSPHERE, 300.0, 1.0))
    slopes = AIR.partials(state, ("p", "T", "humidity_ratio"), ("h",))["h"]
    # one kg of water vapour at 300 K brings about 2550 kJ: IAPWS R6-95 h" = 2549.9 kJ/kg at saturation
    assert slopes[2] == pytest.approx(2.5499e6, rel=1e-3)


def test_threads_get_the_answers_of_one_thread():
    wanted = [at(ATMOSPHERE, 290.0 + k, 0.005)["wet_bulb"] for k in range(20)]
    got: dict[int, list[float]] = {}

    def work(number: int) -> None:
        got[number] = [at(ATMOSPHERE, 290.0 + k, 0.005)["wet_bulb"] for k in range(20)]

    threads = [threading.Thread(target=work, args=(n,)) for n in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert all(got[n] == wanted for n in range(4))


def test_search_bounds_hold_every_state():
    for p, T, w in STATES:
        for name, value in at(p, T, w).items():
            low, high = AIR.bounds(name)
            assert low <= value <= high, name
