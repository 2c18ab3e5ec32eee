"""Partial derivatives of every model against central differences of its own states."""

from __future__ import annotations

import math

import pytest

from service.errors import StateAmbiguous
from tests.unit.fluid_models import EVAPORATING, SIMPLE, SINGLE_PHASE, WET, model

OF = ("p", "T", "h", "s", "u", "rho", "v")
SINGLE = [
    (name, place)
    for name, places in SINGLE_PHASE.items()
    for place in places
    # region 3 of IF97 is steady to 1e-5 only (IAPWS SR5-05), which spoils differences, not slopes: see Maxwell below
    if not (name == "IF97" and place[0] > 1.6e7 and 623.15 < place[1] < 863.15)
]
INNER = [(name, (p, x)) for name, places in WET.items() for p, x in places if 0.0 < x < 1.0]


def scale(name: str) -> float:
    return {"p": 1e5, "T": 300.0, "h": 1e5, "u": 1e5, "s": 1e3, "rho": 1.0, "v": 1e-3, "x": 1.0}[name]


def check(name: str, at: tuple[str, str], place: tuple[float, float], pair: tuple[str, str], rel: float) -> None:
    fluid = model(name)
    state = fluid.state(at, place)
    values = (state.values[pair[0]], state.values[pair[1]])
    analytic = fluid.partials(state, pair, OF)
    for k in (0, 1):
        step = 1e-5 * max(abs(values[k]), 1e-2 * scale(pair[k]))
        moved = [
            fluid.state(pair, tuple(v + s * step * (i == k) for i, v in enumerate(values))).values for s in (-1, 1)
        ]
        for of in OF:
            difference = (moved[1][of] - moved[0][of]) / (2.0 * step)
            # relative to the derivative, or to a millionth of the property over the step where it hardly varies
            floor = 1e-6 * abs(state.values[of]) / step
            assert analytic[of][k] == pytest.approx(difference, rel=rel, abs=floor), (of, pair[k])


@pytest.mark.parametrize("pair", [("p", "T"), ("p", "h"), ("p", "s"), ("rho", "u")], ids=str)
@pytest.mark.parametrize(("name", "place"), SINGLE, ids=str)
def test_slopes_of_single_phases_equal_differences(
    name: str, place: tuple[float, float], pair: tuple[str, str]
) -> None:
    if pair == ("rho", "u") and name in ("constant liquid", "solid"):
        pair = ("h", "s")
    if (name, pair) == ("IF97", ("rho", "u")) and place == (1e3, 350.0):
        pair = ("p", "u")  # next to the lowest pressure of the formulation
    check(name, ("p", "T"), place, pair, 2e-4)


@pytest.mark.parametrize("pair", [("p", "x"), ("p", "h"), ("p", "s"), ("rho", "u")], ids=str)
@pytest.mark.parametrize(("name", "place"), INNER, ids=str)
def test_slopes_of_wet_states_equal_differences(name: str, place: tuple[float, float], pair: tuple[str, str]) -> None:
    check(name, ("p", "x"), place, pair, 1e-3)


def test_slopes_of_region_3_obey_maxwell() -> None:
    """(dh/dp)_T = v - T (dv/dT)_p, and (dh/dT)_p = T (ds/dT)_p."""
    fluid = model("IF97")
    state = fluid.state(("p", "T"), (3e7, 700.0))
    slopes = fluid.partials(state, ("p", "T"), ("h", "s", "v", "u"))
    v, T, p = state.values["v"], 700.0, 3e7
    assert slopes["h"][0] == pytest.approx(v - T * slopes["v"][1], rel=1e-9)
    assert slopes["h"][1] == pytest.approx(T * slopes["s"][1], rel=1e-12)
    assert slopes["u"][1] == pytest.approx(slopes["h"][1] - p * slopes["v"][1], rel=1e-9)
    # against the other equation of state, within the difference of the two models
    other = model("water")
    theirs = other.partials(other.state(("p", "T"), (p, T)), ("p", "T"), ("h", "v"))
    assert slopes["h"] == pytest.approx(theirs["h"], rel=5e-3)
    assert slopes["v"] == pytest.approx(theirs["v"], rel=5e-3)


@pytest.mark.parametrize("name", EVAPORATING)
def test_superheat_has_slopes(name: str) -> None:
    """With p and superheat given: dT/d(superheat) = 1, dT/dp = dT_dew/dp."""
    fluid = model(name)
    p = WET[name][0][0]
    state = fluid.state(("p", "superheat"), (p, 10.0))
    slopes = fluid.partials(state, ("p", "superheat"), ("T", "h"))
    below, above = (fluid.saturation(p=p * (1 + d)) for d in (-1e-4, 1e-4))
    assert below is not None
    assert above is not None
    assert slopes["T"][1] == pytest.approx(1.0, rel=1e-9)
    assert slopes["T"][0] == pytest.approx((above - below) / (2e-4 * p), rel=1e-4)


def test_extras_have_slopes_by_differences() -> None:
    for name in ("water", "IF97"):
        fluid = model(name)
        state = fluid.state(("p", "T"), (1e6, 500.0))
        slope = fluid.partials(state, ("p", "T"), ("cp", "x"))
        high, low = (fluid.state(("p", "T"), (1e6, T), ("cp",)).values["cp"] for T in (500.5, 499.5))
        assert slope["cp"][1] == pytest.approx(high - low, rel=1e-3)
        assert math.isnan(slope["x"][0])


def test_pairs_that_do_not_vary_independently_are_told() -> None:
    gas = model("ideal gas")
    with pytest.raises(StateAmbiguous):
        gas.partials(gas.state(("p", "T"), (1e5, 300.0)), ("T", "h"), ("s",))
    steam = model("water")
    with pytest.raises(StateAmbiguous):
        steam.partials(steam.state(("p", "x"), (1e5, 0.5)), ("p", "T"), ("h",))


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
def test_the_slope_of_an_input_is_one(name: str) -> None:
    fluid = model(name)
    state = fluid.state(("p", "T"), SINGLE_PHASE[name][0])
    slopes = fluid.partials(state, ("p", "h"), ("p", "h"))
    assert slopes["p"] == pytest.approx((1.0, 0.0), abs=1e-9)
    assert slopes["h"] == pytest.approx((0.0, 1.0), abs=1e-9)
