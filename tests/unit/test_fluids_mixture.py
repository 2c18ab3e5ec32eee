"""Gas mixtures: ideal and real agree where they must, condensation is refused, every pair of inputs works."""

from __future__ import annotations

import math
import random
import threading

import cantera
import CoolProp
import CoolProp.CoolProp as CoolPropLibrary
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from service.errors import StateAmbiguous, StateOutOfRange, UnknownFluid
from service.fluids import gas_mixture
from service.fluids.ideal_part import ideal_part
from service.fluids.protocol import FluidSpec

FLUE_GAS = {"N2": 0.71, "CO2": 0.09, "H2O": 0.17, "O2": 0.03}
NATURAL_GAS = {"methane": 0.93, "ethane": 0.04, "propane": 0.01, "n-butane": 0.002, "CO2": 0.008, "N2": 0.01}
SYNTHESIS_GAS = {"H2": 0.75, "N2": 0.25}
DRY_AIR = {"N2": 0.7812, "O2": 0.2096, "Ar": 0.0092}


def ideal(fractions: dict[str, float]) -> gas_mixture.IdealGasMixture:
    built = gas_mixture.build(FluidSpec(kind="gas_mixture", mole_fractions=fractions, model="ideal_gas"))
    assert isinstance(built, gas_mixture.IdealGasMixture)
    return built


def real(fractions: dict[str, float]) -> gas_mixture.RealGasMixture:
    built = gas_mixture.build(FluidSpec(kind="gas_mixture", mole_fractions=fractions, model="real_gas"))
    assert isinstance(built, gas_mixture.RealGasMixture)
    return built


IDEAL_FLUE_GAS = ideal(FLUE_GAS)
REAL_FLUE_GAS = real(FLUE_GAS)
REAL_NATURAL_GAS = real(NATURAL_GAS)


# --- the ideal part ---------------------------------------------------------------------------------------------------

# every pure fluid of the library, but the one whose form of cp is refused
COVERED = [name for name in CoolPropLibrary.get_global_param_string("fluids_list").split(",") if name != "n-Undecane"]


@pytest.mark.parametrize("name", COVERED)
def test_ideal_part_agrees_with_the_equation_of_state_at_vanishing_density(name):
    part = ideal_part(name)
    handle = CoolPropLibrary.AbstractState("HEOS", name)
    handle.specify_phase(CoolProp.iphase_gas)
    T, rho = min(max(1.3 * part.T_triple, 300.0), part.T_max), 1e-6
    handle.update(CoolProp.DmolarT_INPUTS, rho, T)
    h, s, cp = part.dimensionless(T)
    R = handle.gas_constant()
    # 1e-6 mol/m3 leaves 1e-9 of real-gas effects; one refrigerant's tabulated reducing temperature is rounded (2e-5)
    rel = 2e-5 if name == "R123" else 1e-8
    assert h == pytest.approx(handle.hmolar() / (R * T), rel=rel, abs=rel * cp)
    assert s - math.log(rho / part.rho_reducing) == pytest.approx(handle.smolar() / R, rel=rel, abs=rel * cp)
    assert cp == pytest.approx(handle.cp0molar() / R, rel=rel)


def test_a_heat_capacity_of_unknown_form_is_refused_by_name():
    with pytest.raises(UnknownFluid, match="n-Undecane cannot be part of a gas mixture"):
        ideal({"n-undecane": 1.0})


# Species of the GRI-Mech 3.0 thermodynamics (NASA polynomials) as distributed with Cantera: an independent source.
# The tolerance of 0.5 % of the enthalpy difference is what the two fits differ by (ethane and steam the most).
SPECIES = {"N2": "N2", "O2": "O2", "CO2": "CO2", "H2O": "H2O", "CO": "CO", "H2": "H2", "Ar": "AR", "ethane": "C2H6"}


@pytest.mark.parametrize("name", SPECIES)
@pytest.mark.parametrize("T", [500.0, 1000.0, 1500.0, 2000.0])
def test_enthalpy_of_a_component_agrees_with_nasa_polynomials(name, T):
    gas = ideal({name: 1.0})
    thermo = cantera.Solution("gri30.yaml").species(SPECIES[name]).thermo
    ours = gas.thermal(T)[0] - gas.thermal(300.0)[0]
    assert gas.molar_mass is not None
    assert ours * gas.molar_mass * 1e3 == pytest.approx(thermo.h(T) - thermo.h(300.0), rel=5e-3)


@pytest.mark.parametrize("T", [400.0, 800.0, 1400.0])
@pytest.mark.parametrize("p", [1e5, 2e6])
def test_flue_gas_agrees_with_cantera(T, p):
    solution = cantera.Solution("gri30.yaml")
    values = []
    for temperature, pressure in ((300.0, 1e5), (T, p)):
        solution.TPX = temperature, pressure, FLUE_GAS
        state = IDEAL_FLUE_GAS.state(("p", "T"), (pressure, temperature)).values
        values.append((state["h"] - solution.enthalpy_mass, state["s"] - solution.entropy_mass))
    # differences of h and s between two states, on the scale of cp dT and cp ln T: 0.3 %
    assert abs(values[1][0] - values[0][0]) < 3e-3 * 1150.0 * (T - 300.0)
    assert abs(values[1][1] - values[0][1]) < 3e-3 * 1150.0 * math.log(T / 300.0)


# --- ideal mixtures ---------------------------------------------------------------------------------------------------


def test_mixing_two_gases_at_equal_pressure_creates_the_entropy_of_mixing():
    # -R sum x ln x = R ln 2 for equal parts: exact for ideal gases
    halves, nitrogen, argon = ideal({"N2": 0.5, "Ar": 0.5}), ideal({"N2": 1.0}), ideal({"Ar": 1.0})
    s = {g: g.state(("p", "T"), (1e5, 300.0)).values["s"] * (g.molar_mass or 0.0) for g in (halves, nitrogen, argon)}
    assert s[halves] - 0.5 * (s[nitrogen] + s[argon]) == pytest.approx(8.314462618 * math.log(2.0), rel=1e-9)


def test_nitrogen_in_a_mixture_has_the_zero_of_nitrogen_on_its_own():
    handle = CoolPropLibrary.AbstractState("HEOS", "Nitrogen")
    handle.update(CoolProp.PT_INPUTS, 10.0, 400.0)
    # 1e-5: nitrogen's own equation of 2000 has the gas constant 8.31451 J/(mol K), a mixture that of CODATA 2018
    state = ideal({"nitrogen": 1.0}).state(("p", "T"), (10.0, 400.0)).values
    assert state["h"] == pytest.approx(handle.hmass(), rel=1e-5)
    assert state["s"] == pytest.approx(handle.smass(), rel=1e-5)


@pytest.mark.parametrize("fractions", [FLUE_GAS, NATURAL_GAS, SYNTHESIS_GAS, DRY_AIR])
def test_every_pair_of_inputs_of_an_ideal_mixture_returns_the_state(fractions):
    fluid = ideal(fractions)
    state = fluid.state(("p", "T"), (3e5, 480.0)).values
    for pair in fluid.pairs:
        back = fluid.state(pair, tuple(state[name] for name in pair)).values
        assert back["T"] == pytest.approx(480.0, rel=1e-12), pair
        assert back["p"] == pytest.approx(3e5, rel=1e-11), pair


@given(p=st.floats(1e3, 1e7), T=st.floats(200.0, 1900.0), other=st.sampled_from(["h", "s", "u"]))
@settings(max_examples=100, deadline=None)
def test_random_ideal_states_return_from_their_inputs(p, T, other):
    state = IDEAL_FLUE_GAS.state(("p", "T"), (p, T)).values
    assert IDEAL_FLUE_GAS.state(("p", other), (p, state[other])).values["T"] == pytest.approx(T, rel=1e-12)


@pytest.mark.parametrize("other", ["T", "h", "s", "u"])
def test_columns_in_numpy_equal_single_states(other):
    T = np.linspace(250.0, 1900.0, 23)
    p = np.geomspace(1e4, 1e7, 23)
    singles = [IDEAL_FLUE_GAS.state(("p", "T"), pair).values for pair in zip(p.tolist(), T.tolist(), strict=True)]
    given_column = np.array([single[other] for single in singles])
    columns, errors = IDEAL_FLUE_GAS.columns(("p", other), (p, given_column), ("T", "h", "s", "rho", "cp"))
    assert not errors
    for name, column in columns.items():
        expected = np.array([single[name] for single in singles])
        scale = np.abs(expected).max()
        assert np.abs(column - expected).max() < 1e-12 * scale, name


@pytest.mark.parametrize("model", [IDEAL_FLUE_GAS, REAL_FLUE_GAS])
def test_a_bad_row_costs_only_itself(model):
    p = np.array([1e5, 1e5, math.nan, 1e5])
    T = np.array([400.0, 9000.0, 500.0, 600.0])
    columns, errors = model.columns(("p", "T"), (p, T), ("h",))
    assert set(errors) == {1, 2}
    assert np.isnan(columns["h"][[1, 2]]).all()
    assert columns["h"][3] == pytest.approx(model.state(("p", "T"), (1e5, 600.0)).values["h"], rel=1e-13)


def test_enthalpy_with_temperature_leaves_the_pressure_of_an_ideal_gas_open():
    assert IDEAL_FLUE_GAS.inputs({"T", "h"}) is None
    with pytest.raises(StateAmbiguous, match="do not fix a state"):
        IDEAL_FLUE_GAS.state(("T", "h"), (400.0, 7e5))


# --- compositions -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("fractions", "says"),
    [
        ({"N2": 0.7, "O2": 0.2}, "sum to 0.9"),
        ({"N2": 0.79, "O2": 0.21001}, "sum to 1.00001"),
        ({"N2": 1.2, "O2": -0.2}, "between 0 and 1"),
        ({"N2": 0.5, "nitrogen": 0.5}, "named twice"),
        ({"air": 0.9, "water": 0.1}, "is a mixture itself"),
        ({"phlogiston": 1.0}, "no component named"),
        ({"x" * 5000: 1.0}, "no component named"),
        ({"REFPROP::N2": 1.0}, "no component named"),
        ({}, "no components"),
        ({f"gas{n}": 0.01 for n in range(100)}, "at most 20"),
        ({"N2": math.nan}, "between 0 and 1"),
    ],
)
def test_compositions_that_cannot_be_are_refused_in_words(fractions, says):
    with pytest.raises(UnknownFluid, match=says) as caught:
        ideal(fractions)
    assert len(caught.value.detail) < 300


def test_a_sum_that_is_rounded_in_the_seventh_digit_is_taken_as_one():
    gas = ideal({"N2": 0.7900004, "O2": 0.21})
    assert math.fsum(gas.mole_fractions.values()) == pytest.approx(1.0, abs=1e-15)


def test_an_unknown_model_is_refused():
    with pytest.raises(UnknownFluid, match="no model"):
        gas_mixture.build(FluidSpec(kind="gas_mixture", mole_fractions={"N2": 1.0}, model="cubic"))


def test_a_pair_without_parameters_is_refused_for_real_gases_only():
    pair = {"ammonia": 0.5, "water": 0.5}
    assert ideal(pair).molar_mass == pytest.approx(0.01752, rel=1e-3)  # mean of 17.03 and 18.02 g/mol
    with pytest.raises(UnknownFluid, match="parameters of a pair"):
        real(pair)


# --- real mixtures ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("fractions", [FLUE_GAS, NATURAL_GAS, SYNTHESIS_GAS, DRY_AIR])
def test_real_and_ideal_mixtures_agree_at_low_pressure(fractions):
    p, T = 200.0, 500.0
    a, b = (build(fractions).state(("p", "T"), (p, T)).values for build in (ideal, real))
    # second virial coefficients of some 1e-4 m3/mol: B p/(R T) of 5e-6
    for name in ("h", "s", "u", "rho", "cp"):
        assert b[name] == pytest.approx(a[name], rel=2e-5), name


@pytest.mark.parametrize(
    ("fractions", "p", "T"),
    [(FLUE_GAS, 1.2e5, 700.0), (NATURAL_GAS, 50e5, 300.0), (SYNTHESIS_GAS, 150e5, 450.0), (DRY_AIR, 200e5, 300.0)],
)
def test_every_pair_of_inputs_of_a_real_mixture_returns_the_state(fractions, p, T):
    fluid = real(fractions)
    state = fluid.state(("p", "T"), (p, T)).values
    for pair in (pair for pair in fluid.pairs if pair not in {("T", "h"), ("T", "u")}):
        back = fluid.state(pair, tuple(state[name] for name in pair)).values
        assert back["T"] == pytest.approx(T, rel=1e-9), pair
        assert back["p"] == pytest.approx(p, rel=1e-8), pair


def test_flue_gas_at_300_k_and_50_bar_is_refused_because_it_condenses():
    # with the gas phase imposed the library answers 553 kJ/kg here without a warning; the two-phase value is 305
    with pytest.raises(StateOutOfRange, match="would condense") as caught:
        REAL_FLUE_GAS.state(("p", "T"), (50e5, 300.0))
    assert "dew point is 169.5" in caught.value.detail


@pytest.mark.parametrize(("pair", "value"), [("h", 3e5), ("s", 4000.0), ("rho", 5.0)])
def test_values_that_belong_below_the_dew_point_are_refused(pair, value):
    with pytest.raises(StateOutOfRange, match="would condense"):
        REAL_FLUE_GAS.state(("p", pair), (1e5, value))


def test_dew_point_of_humid_flue_gas_is_that_of_its_water():
    # Raoult: p_w = 0.17 bar; IAPWS R7-97 region 4 gives T_sat(17 kPa) = 329.75 K; gas solubility is negligible
    assert REAL_FLUE_GAS.dew_point(1e5) == pytest.approx(329.75, abs=0.2)
    assert IDEAL_FLUE_GAS.dew_point(1e5) == pytest.approx(329.75, abs=0.05)
    assert ideal(SYNTHESIS_GAS).dew_point(1e5) is None


@pytest.mark.parametrize("fractions", [FLUE_GAS, NATURAL_GAS, DRY_AIR])
def test_states_agree_with_the_general_flash_of_the_library(fractions):
    fluid = real(fractions)
    general = CoolPropLibrary.AbstractState("HEOS", "&".join(fluid.mole_fractions))
    general.set_mole_fractions(list(fluid.mole_fractions.values()))
    choice = random.Random(7)
    compared = 0
    for _ in range(12):
        p = math.exp(choice.uniform(math.log(5e4), math.log(2e7)))
        dew = fluid.saturation(p=p)
        assert dew is not None
        T = dew * choice.uniform(1.03, 1.4)
        general.update(CoolProp.PT_INPUTS, p, T)
        state = fluid.state(("p", "T"), (p, T)).values
        assert state["h"] == pytest.approx(general.hmass(), rel=1e-8)
        assert state["rho"] == pytest.approx(general.rhomass(), rel=1e-8)
        compared += 1
    assert compared == 12


def test_dense_gas_beyond_the_reach_of_the_librarys_density_search_is_found():
    state = REAL_NATURAL_GAS.state(("p", "T"), (3.4e7, 290.0)).values
    back = REAL_NATURAL_GAS.state(("T", "rho"), (290.0, state["rho"])).values
    assert back["p"] == pytest.approx(3.4e7, rel=1e-8)


@pytest.mark.parametrize("fluid", [IDEAL_FLUE_GAS, REAL_FLUE_GAS])
def test_partial_derivatives_are_those_of_differences(fluid):
    p, T = 4e5, 600.0
    state = fluid.state(("p", "T"), (p, T))
    slopes = fluid.partials(state, ("p", "T"), ("h", "s", "u", "rho", "v"))
    dT, dp = 0.05, 40.0
    for name, (by_p, by_T) in slopes.items():
        along_T = [fluid.state(("p", "T"), (p, T + step)).values[name] for step in (-dT, dT)]
        along_p = [fluid.state(("p", "T"), (p + step, T)).values[name] for step in (-dp, dp)]
        assert by_T == pytest.approx((along_T[1] - along_T[0]) / (2 * dT), rel=1e-6), name
        scale = abs(state.values[name]) / p  # h of an ideal gas does not depend on p at all
        assert by_p == pytest.approx((along_p[1] - along_p[0]) / (2 * dp), rel=1e-5, abs=1e-8 * scale), name


def test_partial_derivatives_turn_around():
    state = REAL_NATURAL_GAS.state(("p", "T"), (50e5, 300.0))
    forward = REAL_NATURAL_GAS.partials(state, ("p", "T"), ("h",))["h"][1]
    assert REAL_NATURAL_GAS.partials(state, ("p", "h"), ("T",))["T"][1] * forward == pytest.approx(1.0, rel=1e-9)


def test_throttled_natural_gas_cools():
    # Joule-Thomson coefficient of methane-rich gas near 300 K and 50 bar: 4 to 5 K/MPa (GPSA data book, from memory)
    inlet = REAL_NATURAL_GAS.state(("p", "T"), (50e5, 300.0)).values
    outlet = REAL_NATURAL_GAS.state(("p", "h"), (40e5, inlet["h"])).values
    assert 4.0 < inlet["T"] - outlet["T"] < 5.0


def test_threads_get_the_answers_of_one_thread():
    wanted = [REAL_FLUE_GAS.state(("p", "T"), (1e5, 400.0 + k)).values["h"] for k in range(40)]
    got: dict[int, list[float]] = {}

    def work(number: int) -> None:
        got[number] = [REAL_FLUE_GAS.state(("p", "T"), (1e5, 400.0 + k)).values["h"] for k in range(40)]

    threads = [threading.Thread(target=work, args=(n,)) for n in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert all(got[n] == wanted for n in range(4))


@pytest.mark.parametrize("fluid", [IDEAL_FLUE_GAS, REAL_FLUE_GAS, REAL_NATURAL_GAS])
def test_search_bounds_hold_a_common_state(fluid):
    state = fluid.state(("p", "T"), (3e5, 500.0)).values
    for name in ("p", "T", "h", "s", "u", "rho", "v"):
        low, high = fluid.bounds(name)
        assert low <= state[name] <= high, name
