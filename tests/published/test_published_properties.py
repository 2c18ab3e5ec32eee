"""Published property values against our own fluids: IAPWS verification tables and psychrometric tables.

Backward equations of IAPWS-IF97 approximate the inverse of the forward equations. A program that inverts exactly may
differ from a backward equation's printed digits by the consistency that IAPWS allows; that is the tolerance here,
never more. Entries that no state of ours can express stand at the end, with what is tested instead.
"""

from __future__ import annotations

import pytest
from iapws import iapws97

from service.fluids.catalogue import FluidCatalogue
from service.fluids.protocol import Fluid, FluidSpec
from tests.published import checks

CATALOGUE = FluidCatalogue()
IF97 = CATALOGUE.resolve(FluidSpec(kind="pure", name="water", model="IF97"))
WATER = CATALOGUE.resolve(FluidSpec(kind="pure", name="water", model="helmholtz"))
HUMID_AIR = CATALOGUE.resolve("humid_air")

OURS = {"p": "p", "v": "v", "h": "h", "u": "u", "s": "s", "cp": "cp", "cv": "cv", "w": "speed_of_sound"}
"""The sources' symbols -> our names."""


def check_state(check: str, fluid: Fluid, inputs: tuple[str, ...], values: tuple[float, ...]) -> None:
    """Every published property of a state, at the accuracy that the source prints."""
    wanted = checks.expected(check)
    extras = tuple(OURS[row.name] for row in wanted if OURS[row.name] in {"cp", "cv", "speed_of_sound"})
    state = fluid.state(inputs, values, extras).values
    misses = [row.miss(state[OURS[row.name]]) for row in wanted]
    assert not any(misses), misses


@pytest.mark.parametrize("check", [f"IF97-R{region}-{n}" for region in (1, 2, 5) for n in (1, 2, 3)])
def test_if97_tables_of_regions_1_2_and_5(check):
    si = checks.given(check)
    check_state(check, IF97, ("p", "T"), (si["p_Pa"], si["T_K"]))


@pytest.mark.parametrize("check", ["IF97-R3-1", "IF97-R3-2", "IF97-R3-3"])
def test_if97_table_of_region_3_from_the_printed_pressure(check):
    """Region 3 is written in (T, rho); we come from the printed p and T, by the backward equation v(p, T).

    IAPWS SR5-05(2016) allows v(p, T) 0.001 % in v (0.01 % in its sub-regions near the critical point); h and s are
    consistent to 0.001 %, cp and the speed of sound, which change fastest there, to 0.01 % (table 2 of SR5-05, value
    from memory). Near the critical point (T = 650 K, rho = 200) the printed p carries nine digits.
    """
    si = checks.given(check)
    rows = {row.name: row for row in checks.expected(check)}
    state = IF97.state(("p", "T"), (rows["p"].value, si["T_K"]), ("cp", "speed_of_sound")).values
    assert state["rho"] == pytest.approx(si["rho_kg_m3"], rel=1e-4)
    for name, rel in {"h": 1e-5, "u": 1e-5, "s": 1e-5, "cp": 1e-3, "w": 1e-3}.items():
        assert state[OURS[name]] == pytest.approx(rows[name].value, rel=rel), name


REGION_3_SUBREGIONS = [row.name for row in checks.expected("IF97-R3-vpT")]


@pytest.mark.parametrize("name", REGION_3_SUBREGIONS)
def test_if97_volume_of_the_subregions_of_region_3(name):
    row = next(row for row in checks.expected("IF97-R3-vpT") if row.name == name)
    T, p = (float(x) for x in checks.arguments(name)[:2])
    found = IF97.state(("p", "T"), (p * 1e6, T)).values["v"]
    # an exact inverse may differ from the backward equation by 0.001 %: IAPWS SR5-05(2016), section 2
    assert found == pytest.approx(row.value, rel=1e-5)


# --- backward equations: the consistency that IAPWS allows against the forward equations ---------------------------

# [K] R7-97(2012): regions 1, 2a and 2b/2c; T(p,h) table 23's text, T(p,s) table 28's text (values from memory)
CONSISTENCY_OF_T = {"IF97-R1-Tph": 0.025, "IF97-R1-Tps": 0.025, "IF97-R2-Tph": 0.025, "IF97-R2-Tps": 0.025}
CONSISTENCY_OF_T |= {"IF97-R3-Tph": 0.025}  # [K] SR3-03(2014), section 3 (value from memory)


def cases(*names: str) -> list[tuple[str, str]]:
    return [(check, row.name) for check in names for row in checks.expected(check)]


@pytest.mark.parametrize(("check", "name"), cases(*CONSISTENCY_OF_T))
def test_if97_temperature_from_pressure_and_enthalpy_or_entropy(check, name):
    row = next(row for row in checks.expected(check) if row.name == name)
    p, second = (float(x) for x in checks.arguments(name))
    other = "h" if check.endswith("ph") else "s"
    found = IF97.state(("p", other), (p * 1e6, second * 1e3)).values["T"]
    assert abs(found - row.value) < CONSISTENCY_OF_T[check]


@pytest.mark.parametrize(("check", "name"), cases("IF97-R4-ps", "IF97-R4-Ts"))
def test_if97_saturation_line(check, name):
    row = next(row for row in checks.expected(check) if row.name == name)
    (argument,) = (float(x) for x in checks.arguments(name))
    found = IF97.saturation(T=argument) if check.endswith("ps") else IF97.saturation(p=argument * 1e6)
    assert found is not None
    assert not row.miss(found)
    # the same through a state: saturated liquid
    key, value = ("T", argument) if check.endswith("ps") else ("p", argument * 1e6)
    state = IF97.state((key, "x"), (value, 0.0)).values
    assert not row.miss(state["p" if key == "T" else "T"])


# p(h,s): relative consistency. SR2-01(2014), table 1 (values from memory): region 1 0.6 % up to 2.5 MPa, else 15 kPa;
# region 2 0.0035 % (2a) and 0.0088 % (2b, 2c)
@pytest.mark.parametrize(("check", "name"), cases("IF97-R1-phs", "IF97-R2-phs"))
def test_if97_pressure_from_enthalpy_and_entropy(check, name):
    row = next(row for row in checks.expected(check) if row.name == name)
    h, s = (float(x) * 1e3 for x in checks.arguments(name))
    found = IF97.state(("h", "s"), (h, s)).values["p"]
    if check == "IF97-R1-phs":
        allowed = 0.006 * row.value if row.value <= 2.5e6 else 15e3
    else:
        allowed = 8.8e-5 * row.value
    assert abs(found - row.value) <= allowed


@pytest.mark.parametrize(("check", "name"), cases("IF97-R4-Ths"))
def test_if97_saturation_temperature_from_enthalpy_and_entropy(check, name):
    row = next(row for row in checks.expected(check) if row.name == name)
    h, s = (float(x) * 1e3 for x in checks.arguments(name))
    state = IF97.state(("h", "s"), (h, s))
    assert state.phase == "two_phase"
    # SR4-04(2014), table 28 (value from memory): T(h,s) agrees with the saturation equation within 0.86 mK
    assert abs(state.values["T"] - row.value) < 8.6e-4


def test_if97_derivatives_in_region_1():
    si = checks.given("IF97-R1-deriv")
    rows = {row.name: row for row in checks.expected("IF97-R1-deriv")}
    state = IF97.state(("p", "T"), (si["p_Pa"], si["T_K"]))
    by_p, by_T = IF97.partials(state, ("p", "T"), ("v",))["v"]
    v = state.values["v"]
    assert not rows["alpha_v"].miss(by_T / v)
    assert not rows["kappa_T"].miss(-by_p / v)
    assert not rows["dpdT_v"].miss(-by_T / by_p)


# --- IAPWS-95 ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("check", [f"R6-95-T7-{n}" for n in range(1, 12)])
def test_iapws_95_single_phase(check):
    si = checks.given(check)
    check_state(check, WATER, ("T", "rho"), (si["T_K"], si["rho_kg_m3"]))


@pytest.mark.parametrize("check", ["R6-95-T8-1", "R6-95-T8-2", "R6-95-T8-3"])
def test_iapws_95_saturation(check):
    T = checks.given(check)["T_K"]
    liquid, vapour = (WATER.state(("T", "x"), (T, x)).values for x in (0.0, 1.0))
    for row in checks.expected(check):
        if row.name == "ps":
            assert not row.miss(liquid["p"])
            continue
        name, phase = row.name.rsplit("_", 1)
        assert not row.miss((liquid if phase == "l" else vapour)[name])


def test_enthalpy_of_compressed_liquid():
    si = checks.given("CS-15")
    rows = {row.name: row for row in checks.expected("CS-15")}
    compressed = WATER.state(("p", "T"), (si["p"], si["T"])).values
    saturated = WATER.state(("T", "x"), (si["T"], 0.0)).values
    assert not rows["h"].miss(compressed["h"])
    assert not rows["h_f"].miss(saturated["h"])
    # the source's correction takes v = 0.001 m3/kg for the liquid's 0.001043
    assert saturated["v"] == pytest.approx(0.001, rel=0.05)
    assert not rows["h_corr"].miss(saturated["h"] + 0.001 * (si["p"] - saturated["p"]))


# --- humid air -----------------------------------------------------------------------------------------------------


def test_state_point_of_the_psychrometric_chart():
    si = checks.given("PS-10")
    state = HUMID_AIR.state(("p", "T", "wet_bulb"), (si["p"], si["T"], si["Twb"])).values
    # v is printed per kg of dry air, our rho is of the moist air
    found = {"W": state["humidity_ratio"], "h": state["h"], "Tdp": state["dew_point"], "RH": state["relative_humidity"]}
    found["v"] = (1.0 + state["humidity_ratio"]) * state["v"]
    misses = [row.miss(found[row.name]) for row in checks.expected("PS-10")]
    assert not any(misses), misses


def test_inlet_state_of_the_cooling_coil():
    si = checks.given("PS-12")
    state = HUMID_AIR.state(("p", "T", "relative_humidity"), (si["p"], si["T1"], si["RH1"])).values
    found = {"W1": state["humidity_ratio"], "h1": state["h"], "v1": (1.0 + state["humidity_ratio"]) * state["v"]}
    misses = [row.miss(found[row.name]) for row in checks.expected("PS-12") if row.name in found]
    assert len(misses) == 3
    assert not any(misses), misses


@pytest.mark.parametrize("name", [row.name for row in checks.expected("PS-15")])
def test_table_of_saturated_moist_air(name):
    row = next(row for row in checks.expected("PS-15") if row.name == name)
    (celsius,) = (float(x) for x in checks.arguments(name))
    p = checks.given("PS-15")["p"]
    state = HUMID_AIR.state(("p", "T", "relative_humidity"), (p, celsius + 273.15, 1.0)).values
    assert not row.miss(state["humidity_ratio" if name.startswith("Ws") else "h"])


# --- what no state of ours can express -----------------------------------------------------------------------------


@pytest.mark.parametrize("check", ["IF97-R2meta-1", "IF97-R2meta-2", "IF97-R2meta-3"])
def test_we_answer_stable_liquid_where_the_table_is_of_metastable_vapour(check):
    """Subcooled vapour is no equilibrium state: at its p and T our answer must be the liquid's."""
    si = checks.given(check)
    state = IF97.state(("p", "T"), (si["p_Pa"], si["T_K"]))
    assert state.phase == "liquid"
    published = {row.name: row.value for row in checks.expected(check)}
    assert state.values["h"] < 0.5 * published["h"]


def test_boundary_between_regions_2_and_3_in_the_independent_library():
    """The boundary is no property of water; the library against which our states are held must have it right."""
    (line,) = checks.expected("IF97-B23")
    (inverse,) = checks.expected("IF97-B23inv")

    assert not line.miss(iapws97._P23_T(623.15) * 1e6)
    assert not inverse.miss(iapws97._t_P(16.5291643))


def test_every_property_entry_of_the_file_is_tested_here():
    tested = {
        *(f"IF97-R{region}-{n}" for region in (1, 2, 3, 5) for n in (1, 2, 3)),
        *(f"IF97-R2meta-{n}" for n in (1, 2, 3)),
        *CONSISTENCY_OF_T,
        *("IF97-R3-vpT", "IF97-R4-ps", "IF97-R4-Ts", "IF97-R1-phs", "IF97-R2-phs", "IF97-R4-Ths"),
        *("IF97-B23", "IF97-B23inv"),
        *(f"R6-95-T7-{n}" for n in range(1, 12)),
        *(f"R6-95-T8-{n}" for n in range(1, 4)),
    }
    assert set(checks.ids("properties")) == tested
