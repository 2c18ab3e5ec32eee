"""The unit table: what it accepts, what it refuses and how it says so, and conversion there and back."""

from __future__ import annotations

import math
import re
import subprocess
import sys
from collections.abc import Iterator

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.errors import CaseError, StateOutOfRange, UnitNotUnderstood, UnitOfWrongKind
from service.units import KINDS, MAX_LENGTH, SPELLING_RULES, SYSTEMS, System, Unit, UnitTable
from service.units.hints import TRAPS
from service.units.spelling import spellings

ATMOSPHERE = 101_325.0  # [Pa] CGPM 1954
TABLE = pytest.fixture(scope="module", name="table")(UnitTable.build)
SPELLINGS_OF_A_UNIT = 1_000  # [-] far above any; a rule that ran wild would pass it


def refusal(table: UnitTable, text: str, kind: str) -> CaseError:
    with pytest.raises((UnitNotUnderstood, UnitOfWrongKind)) as caught:
        table.unit(text, kind, "outlet.p")
    return caught.value


def outcome(table: UnitTable, text: str, kind: str) -> Unit | CaseError:
    try:
        return table.unit(text, kind)
    except (UnitNotUnderstood, UnitOfWrongKind) as error:
        return error


def every_unit(table: UnitTable) -> Iterator[Unit]:
    for kind in table.kinds.values():
        for symbol in kind.symbols:
            yield table.unit(symbol, kind.name)


# What plants write -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "kind", "symbol"),
    [
        ("°C", "temperature", "degC"),
        ("deg C", "temperature", "degC"),  # degree times coulomb to a parser
        ("°F", "temperature", "degF"),
        ("m³/h", "volume_flow", "m3/h"),
        ("m^3/h", "volume_flow", "m3/h"),
        ("m3/hr", "volume_flow", "m3/h"),
        ("m3 h-1", "volume_flow", "m3/h"),
        ("l/min", "volume_flow", "L/min"),
        ("GPM", "volume_flow", "gpm"),
        ("acfm", "volume_flow", "ft3/min"),
        ("Nm³/h", "normal_volume_flow", "Nm3/h"),
        ("SCFM", "normal_volume_flow", "scfm"),
        ("MMSCFD", "normal_volume_flow", "MMscfd"),
        ("bar(g)", "pressure", "barg"),  # bar times gram to a parser
        ("bar(a)", "pressure", "bara"),
        ("kPa(g)", "pressure", "kPag"),
        ("PSIG", "pressure", "psig"),
        ("kgf/cm²", "pressure", "at"),
        ("kg/cm2g", "pressure", "atg"),
        ("mmWG", "pressure", "mmH2Og"),
        ("mmWC", "pressure_difference", "mmWC"),
        ("kJ/(kg K)", "specific_entropy", "kJ/kg/K"),
        ("kJ/(kg·K)", "specific_entropy", "kJ/kg/K"),
        ("kJ/(kg*K)", "specific_entropy", "kJ/kg/K"),
        ("kJ/kg K", "specific_entropy", "kJ/kg/K"),  # kJ K/kg to a parser
        ("kJ/kg.K", "specific_entropy", "kJ/kg/K"),
        ("kJ/kg·K", "specific_entropy", "kJ/kg/K"),
        ("kJ/kg-K", "specific_entropy", "kJ/kg/K"),
        ("kJ/kgK", "specific_entropy", "kJ/kg/K"),
        ("kJ/(kg °C)", "specific_entropy", "kJ/kg/K"),
        ("kJ kg⁻¹ K⁻¹", "specific_entropy", "kJ/kg/K"),
        ("Btu/lb-°F", "specific_entropy", "Btu/lb/degF"),
        ("BTU/lb/F", "specific_entropy", "Btu/lb/degF"),
        ("Btu/lbm", "specific_energy", "Btu/lb"),
        ("W/m²K", "heat_transfer_coefficient", "W/m2/K"),
        ("W/(m²·K)", "heat_transfer_coefficient", "W/m2/K"),
        ("W m-2 K-1", "heat_transfer_coefficient", "W/m2/K"),
        ("BTU/(hr·ft²·°F)", "heat_transfer_coefficient", "Btu/h/ft2/degF"),
        ("Btu/h-ft2-F", "heat_transfer_coefficient", "Btu/h/ft2/degF"),
        ("W/mK", "thermal_conductivity", "W/m/K"),
        ("Btu·in/(h·ft²·°F)", "thermal_conductivity", "Btu*in/h/ft2/degF"),
        ("MMBTU/hr", "power", "MMBtu/h"),
        ("MWe", "power", "MW"),
        ("hp(metric)", "power", "metric_hp"),
        ("kW h", "energy", "kWh"),
        ("ft-lbf", "energy", "ft*lbf"),
        ("Pa·s", "viscosity", "Pa*s"),
        ("Pa.s", "viscosity", "Pa*s"),
        ("µPa·s", "viscosity", "uPa*s"),
        ("lb-mol/hr", "molar_flow", "lbmol/h"),
        ("t/day", "mass_flow", "t/d"),
        ("lbm/hr", "mass_flow", "lb/h"),
        ("Δ°C", "temperature_difference", "delta_degC"),
        ("days", "time", "d"),
        ("percent", "dimensionless", "%"),
        ("", "dimensionless", "-"),
        ("", "humidity_ratio", "kg/kg"),
    ],
)
def test_a_common_spelling_is_understood_as_the_plant_means_it(
    table: UnitTable, text: str, kind: str, symbol: str
) -> None:
    assert table.unit(text, kind) is table.unit(symbol, kind)


def test_the_spelling_rules_that_clients_are_told_hold(table: UnitTable) -> None:
    quoted = [re.findall(r"`([^`]+)`", rule) for rule in SPELLING_RULES]
    assert all(len(texts) > 1 for texts in quoted)
    for meant, *others in quoted:
        kind = next(name for name in KINDS if meant in table.kinds[name].symbols)
        assert all(table.unit(text, kind).symbol == meant for text in others)


def test_every_regular_spelling_stands_for_its_symbol(table: UnitTable) -> None:
    for unit in every_unit(table):
        texts = spellings(unit.symbol)
        assert texts[0] == unit.symbol
        assert len(texts) < SPELLINGS_OF_A_UNIT
        assert all(len(text) <= MAX_LENGTH and table.unit(text, unit.kind) is unit for text in texts)


def test_a_spelling_for_two_units_of_one_kind_stops_the_start() -> None:
    one, other = Unit("kg", "mass", 1.0), Unit("t", "mass", 1e3)
    entries = {name: [(Unit("x", name, 1.0), ())] for name in KINDS}
    entries["mass"] = [(one, ("big",)), (other, ("big",))]
    with pytest.raises(ValueError, match="'big' stands for both kg and t"):
        UnitTable(entries)


# What is refused ---------------------------------------------------------------------------------------------------

HOSTILE = [
    "9**9**9**9", "9**9**9", "m**9**9**9", "m**(9**9**9)", "2**(2**(2**(2**(2**2))))", "m" + "**2" * 500, "m" * 100_000,
    "x" * 1000, "m**1e999", "m**-1e999", "m**nan", "m*1e999", "*".join("m" * 2000), "(" * 2000 + "m" + ")" * 2000,
    "-" * 5000 + "m", "\x00", "m\x00", "m\u200b", "m\n", "m;", "m'", "m#c", "m; s", "m²³", " ", "lambda: 1",
    "__import__", "\ud800", "m" * MAX_LENGTH, "m" * (MAX_LENGTH + 1), "🜂", "\u202em", "{}", "%s",
    "{0.__class__}", "${jndi:x}",
]  # fmt: skip
"""Texts that hang, crash or fool a parser of units (measured on one), and a few that fool formatters."""


@pytest.mark.parametrize("kind", ["pressure", "length", "dimensionless"])
@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: ascii(text[:24]))
def test_a_hostile_text_is_answered_with_a_short_error(table: UnitTable, text: str, kind: str) -> None:
    error = refusal(table, text, kind)
    message = error.detail + error.issues[0].hint
    assert len(message) < 500  # a problem document holds 20 of them in 16 kB
    assert message.isprintable()


@pytest.mark.parametrize(
    ("text", "kind", "hint"),
    [
        ("pa", "pressure", "Pa"),  # picoyear to a parser
        ("kpa", "pressure", "kPa"),
        ("Bar", "pressure", "bar"),
        ("mw", "power", "MW"),  # milliwatt to a parser that ignores case
        ("mW", "power", "MW"),
        ("KJ", "energy", "kJ"),
        ("kwh", "energy", "kWh"),
        ("cal", "energy", "kcal"),
        ("C", "temperature", "degC"),  # coulomb
        ("F", "temperature", "degF"),  # farad
        ("degc", "temperature", "degC"),
        ("ton", "mass", "short_ton"),
        ("ton/h", "mass_flow", "t/h"),
        ("a", "time", "d"),  # year
        ("a", "pressure", "bar"),
        ("cfm", "volume_flow", "ft3/min"),  # centifermi
        ("cfm", "normal_volume_flow", "scfm"),
        ("slpm", "normal_volume_flow", "NL/min"),
        ("MBtu/h", "power", "MMBtu/h"),
        ("kJ/kg*K", "specific_entropy", "kJ/(kg*K)"),
        ("60 rpm", "velocity", "m/s"),
        ("N*m", "energy", "torque"),
        ("Nm", "energy", "torque"),
        ("Hz", "time", "s"),
        ("g", "acceleration", "m/s2"),
        ("1", "pressure", "bar"),
        ("", "pressure", "barg"),
        (" ", "mass_flow", "kg/s"),
        ("kg /s", "mass_flow", "kg/s"),
    ],
)
def test_a_spelling_without_a_single_meaning_is_refused_with_what_to_write(
    table: UnitTable, text: str, kind: str, hint: str
) -> None:
    error = refusal(table, text, kind)
    assert error.issues[0].address == "outlet.p"
    assert hint in error.issues[0].hint


def test_what_is_suggested_is_accepted(table: UnitTable) -> None:
    suggested = 0
    for kind in table.kinds.values():
        for text in ("pa", "kj/KG", "M3/H", "btu", "zzz", kind.symbols[0] + "x"):
            result = outcome(table, text, kind.name)
            hint = result.issues[0].hint if isinstance(result, CaseError) else ""
            for name in hint.partition("Did you mean ")[2].rstrip("?").split(" or "):
                if name:
                    suggested += 1
                    assert table.unit(name, kind.name).kind == kind.name
    assert suggested > len(KINDS)  # so that a change of wording cannot empty this test


def test_a_trap_is_not_a_unit_of_any_kind_it_gives_advice_for(table: UnitTable) -> None:
    for texts, kinds, advice in TRAPS:
        assert set(kinds) <= set(KINDS)
        for text in texts:
            assert all(isinstance(outcome(table, text, kind), CaseError) for kind in kinds), text
        assert advice.startswith("Write ")


def test_a_unit_of_the_wrong_kind_is_refused_with_both_kinds_and_units_that_would_do(table: UnitTable) -> None:
    error = refusal(table, "kg/s", "pressure")
    assert isinstance(error, UnitOfWrongKind)
    assert error.detail == "'kg/s' is a unit of mass flow; a pressure is expected here."
    assert error.issues[0].hint == "Units that would do: bar, barg, kPa, kPag, psia, psig."


@pytest.mark.parametrize(
    ("text", "kind", "hint"),
    [
        ("degC", "temperature_difference", "delta_degC"),
        ("degF", "temperature_difference", "delta_degF"),
        ("delta_degC", "temperature", "degC"),
        ("barg", "pressure_difference", "neither gauge nor absolute"),
        ("mmWC", "pressure", "mmH2Og"),
        ("m3/h", "normal_volume_flow", "reference conditions"),
        ("Nm3/h", "volume_flow", "normal_volume_flow"),
        ("Nm3/h", "mass_flow", "normal_volume_flow"),
        ("kWh", "power", "kW, not kWh"),
        ("kW", "energy", "kWh, not kW"),
        ("kg", "mass_flow", "kg/s"),
    ],
)
def test_a_related_kind_is_told_apart_with_advice(table: UnitTable, text: str, kind: str, hint: str) -> None:
    error = refusal(table, text, kind)
    assert isinstance(error, UnitOfWrongKind)
    assert hint in error.issues[0].hint


@pytest.mark.parametrize("text", [None, 3, 4.5, ["bar"], {"a": 1}, b"bar"])
def test_a_unit_that_is_no_text_is_refused(table: UnitTable, text: object) -> None:
    with pytest.raises(UnitNotUnderstood, match="A unit is a text"):
        table.unit(text, "pressure")  # type: ignore[arg-type]


@given(text=st.text(max_size=40), kind=st.sampled_from(KINDS))
def test_any_text_is_a_listed_spelling_or_refused_in_plain_words(table: UnitTable, text: str, kind: str) -> None:
    result = outcome(table, text, kind)
    if isinstance(result, CaseError):
        assert (result.detail + result.issues[0].hint).isprintable()
        return
    known = table.kinds[kind]
    allowed = {spelling for name in known.units for spelling in spellings(name)}
    assert text in allowed or (text == "" and known.bare_number_allowed)


@given(text=st.text(alphabet="kgmsJhW3/*() .-KCFabrt°", max_size=12), kind=st.sampled_from(KINDS))
def test_text_made_of_the_letters_of_units_is_a_unit_of_its_kind_or_refused(
    table: UnitTable, text: str, kind: str
) -> None:
    result = outcome(table, text, kind)
    assert result.issues[0].hint if isinstance(result, CaseError) else result.kind == kind


# Conversion --------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("site", [101_325.0, 100_200.0, 84_000.0])  # [Pa] sea level, the demo plant, a high site
def test_a_gauge_pressure_counts_from_the_site_and_an_absolute_one_does_not(table: UnitTable, site: float) -> None:
    gauge, absolute = table.unit("barg", "pressure"), table.unit("bar", "pressure")
    assert table.to_si(40.0, gauge, site) == pytest.approx(40e5 + site, rel=1e-15)  # by definition
    assert table.to_si(40.0, absolute, site) == 40e5
    assert table.from_si(site, gauge, site) == 0.0
    assert table.to_si(0.0, table.unit("psig", "pressure"), site) == site


def test_a_vacuum_reads_as_a_negative_gauge_pressure(table: UnitTable) -> None:
    # 95 % vacuum at the standard atmosphere: 0.05 atm absolute.
    assert table.from_si(0.05 * ATMOSPHERE, table.unit("kPag", "pressure"), ATMOSPHERE) == pytest.approx(
        -0.95 * 101.325, rel=1e-15
    )


@pytest.mark.parametrize(
    ("value", "symbol", "kelvin"),
    [
        (0.0, "degC", 273.15),  # CGPM 1954
        (100.0, "degC", 373.15),
        (32.0, "degF", 273.15),  # (t + 459.67)/1.8, NIST SP 811 B.8
        (212.0, "degF", 373.15),
        (-40.0, "degF", 233.15),
        (491.67, "degR", 273.15),  # T/1.8, same
        (300.0, "K", 300.0),
    ],
)
def test_a_temperature_is_a_level(table: UnitTable, value: float, symbol: str, kelvin: float) -> None:
    unit = table.unit(symbol, "temperature")
    assert table.to_si(value, unit, ATMOSPHERE) == pytest.approx(kelvin, rel=2e-16 * 4)
    assert table.from_si(kelvin, unit, ATMOSPHERE) == pytest.approx(value, abs=4e-13)  # a few roundings of 460


@pytest.mark.parametrize(
    ("symbol", "kelvin"), [("K", 10.0), ("delta_degC", 10.0), ("delta_degF", 10 / 1.8), ("degR", 10 / 1.8)]
)
def test_a_temperature_difference_has_no_zero(table: UnitTable, symbol: str, kelvin: float) -> None:
    unit = table.unit(symbol, "temperature_difference")
    assert table.to_si(10.0, unit, ATMOSPHERE) == pytest.approx(kelvin, rel=4e-16)
    assert table.to_si(0.0, unit, ATMOSPHERE) == 0.0


@pytest.mark.parametrize(
    ("symbol", "kind", "factor"),
    [("degC", "temperature", 1.0), ("degF", "temperature", 1 / 1.8), ("barg", "pressure", 1e5)],
)
def test_an_uncertainty_scales_without_the_zero(table: UnitTable, symbol: str, kind: str, factor: float) -> None:
    assert table.difference_factor(table.unit(symbol, kind)) == pytest.approx(factor, rel=4e-16)


def test_gas_volumes_at_three_reference_states_hold_the_same_amount(table: UnitTable) -> None:
    # p V / (R T) of each reference state, R from the SI of 2019 (8.314462618 J/(mol K)).
    def moles(volume: float, pressure: float, temperature: float) -> float:
        return pressure * volume / (8.314462618 * temperature)

    psi = 0.45359237 * 9.80665 / 0.0254**2
    for symbol, volume, pressure, temperature in [
        ("Nm3", 1.0, 101_325.0, 273.15),
        ("Sm3", 1.0, 101_325.0, 288.15),
        ("scf", 0.3048**3, 14.696 * psi, (60 + 459.67) / 1.8),
    ]:
        normal = table.to_si(1.0, table.unit(symbol, "normal_volume"), ATMOSPHERE)
        assert moles(normal, 101_325.0, 273.15) == pytest.approx(moles(volume, pressure, temperature), rel=1e-14)


def test_a_fuel_gives_the_same_heat_whatever_the_reference_of_its_volume(table: UnitTable) -> None:
    # 36 MJ/Nm3 times 1000 Nm3/h is 10 MW.
    for flow, value in [("Nm3/h", "MJ/Nm3"), ("Sm3/h", "MJ/Sm3"), ("scfm", "Btu/scf")]:
        f, v = table.unit(flow, "normal_volume_flow"), table.unit(value, "volumetric_heating_value")
        shown_flow, shown_value = table.from_si(1000 / 3600, f, ATMOSPHERE), table.from_si(36e6, v, ATMOSPHERE)
        heat = table.to_si(shown_flow, f, ATMOSPHERE) * table.to_si(shown_value, v, ATMOSPHERE)
        assert heat == pytest.approx(10e6, rel=1e-15 * 4)
    # In the reference of the trade itself: (Btu/scf) times (scf/h) is Btu/h.
    btu_per_scf, scfh = table.unit("Btu/scf", "volumetric_heating_value"), table.unit("scfh", "normal_volume_flow")
    assert btu_per_scf.factor * scfh.factor == pytest.approx(table.unit("Btu/h", "power").factor, rel=1e-15 * 4)


@given(
    value=st.floats(-1e12, 1e12).filter(lambda value: value == 0.0 or abs(value) > 1e-200),  # no underflow on the way
    site=st.floats(5e4, 1.1e5),
    pick=st.integers(min_value=0),
)
def test_a_value_comes_back_from_si_as_it_was(table: UnitTable, value: float, site: float, pick: int) -> None:
    units = list(every_unit(table))
    unit = units[pick % len(units)]
    back = table.from_si(table.to_si(value, unit, site), unit, site)
    zero = (site if unit.gauge else unit.offset) / unit.factor  # what is added and taken off again, in the unit
    assert back == pytest.approx(value, rel=1e-15, abs=4 * 2.2e-16 * max(abs(value), abs(zero)))


@given(values=st.lists(st.floats(-1e6, 1e6), min_size=1, max_size=20), pick=st.integers(min_value=0))
def test_a_column_converts_as_its_single_values_do(table: UnitTable, values: list[float], pick: int) -> None:
    units = list(every_unit(table))
    unit = units[pick % len(units)]
    column = np.array(values)
    there = table.to_si(column, unit, ATMOSPHERE)
    assert there.tolist() == [table.to_si(value, unit, ATMOSPHERE) for value in values]
    assert table.from_si(there, unit, ATMOSPHERE).tolist() == [
        table.from_si(value, unit, ATMOSPHERE) for value in there.tolist()
    ]
    assert column.tolist() == values  # the argument is left alone


# What cannot exist -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "symbol", "kind"),
    [
        (-300.0, "degC", "temperature"),
        (-273.15, "degC", "temperature"),
        (-500.0, "degF", "temperature"),
        (-1.2, "barg", "pressure"),
        (0.0, "bar", "pressure"),
        (-1.0, "kg/m3", "density"),
        (math.nan, "bar", "pressure"),
        (math.inf, "kW", "power"),
    ],
)
def test_a_value_that_cannot_exist_is_refused(table: UnitTable, value: float, symbol: str, kind: str) -> None:
    with pytest.raises(StateOutOfRange) as caught:
        table.require_possible(table.to_si(value, table.unit(symbol, kind), ATMOSPHERE), kind, "inlet.T")
    assert caught.value.issues[0].address == "inlet.T"


@pytest.mark.parametrize(
    ("value", "symbol", "kind"),
    [
        (-273.0, "degC", "temperature"),
        (-0.9, "barg", "pressure"),
        (-5.0, "kW", "power"),
        (-3.0, "K", "temperature_difference"),
    ],
)
def test_a_value_that_can_exist_passes(table: UnitTable, value: float, symbol: str, kind: str) -> None:
    table.require_possible(table.to_si(value, table.unit(symbol, kind), ATMOSPHERE), kind)


# Presentation ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("system", SYSTEMS)
@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_has_units_to_be_shown_in(table: UnitTable, kind: str, system: System) -> None:
    for unit in (table.display(kind, system), table.coherent(kind, system)):
        assert unit is table.unit(unit.symbol, kind)
        if system == "SI":
            assert (unit.factor, unit.offset, unit.gauge) == (1.0, 0.0, False)
            assert unit.symbol == table.kinds[kind].si_unit


COHERENT_PRODUCTS = [
    ("power", ("mass_flow", "specific_energy")),
    ("power", ("conductance", "temperature_difference")),
    ("mass_flow", ("mass_flux", "area")),
    ("power", ("heat_transfer_coefficient", "area", "temperature_difference")),
    ("power", ("normal_volume_flow", "volumetric_heating_value")),
    ("energy", ("power", "time")),
    ("energy", ("mass", "specific_energy")),
    ("energy", ("entropy", "temperature")),
    ("specific_energy", ("specific_entropy", "temperature")),
    ("conductance", ("mass_flow", "specific_entropy")),
    ("mass", ("density", "volume")),
    ("mass", ("amount", "molar_mass")),
    ("mass_flow", ("density", "volume_flow")),
    ("mass_flow", ("molar_flow", "molar_mass")),
    ("volume_flow", ("mass_flow", "specific_volume")),
    ("mass", ("mass_flow", "time")),
]


@pytest.mark.parametrize("system", SYSTEMS)
@pytest.mark.parametrize(("result", "factors"), COHERENT_PRODUCTS)
def test_coherent_units_multiply_out(table: UnitTable, system: System, result: str, factors: tuple[str, ...]) -> None:
    product_of_factors = math.prod(table.coherent(kind, system).factor for kind in factors)
    assert product_of_factors == pytest.approx(table.coherent(result, system).factor, rel=1e-14)


def test_kinds_tell_a_client_what_they_accept(table: UnitTable) -> None:
    assert tuple(table.kinds) == KINDS
    for kind in table.kinds.values():
        assert kind.title
        assert kind.si_unit in kind.symbols
        assert len(set(kind.units)) == len(kind.units)
        assert set(kind.symbols) <= set(kind.units)
    assert {name for name, kind in table.kinds.items() if kind.bare_number_allowed} == {
        "dimensionless",
        "humidity_ratio",
    }
    assert "bar is the same as bara" in table.kinds["pressure"].note


def test_importing_the_units_builds_nothing_and_leaves_pint_alone() -> None:
    code = "import sys, service.units; raise SystemExit('pint' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False, timeout=60).returncode == 0


def test_nothing_of_pint_is_left_in_the_table(table: UnitTable) -> None:
    seen: list[object] = [getattr(table, name) for name in UnitTable.__slots__]
    count = 0
    while seen:
        item = seen.pop()
        count += 1
        assert not type(item).__module__.startswith("pint")
        if hasattr(item, "items"):
            seen += [part for pair in item.items() for part in pair]
        elif isinstance(item, (tuple, list)):
            seen += item
        elif hasattr(item, "__dataclass_fields__"):
            seen += [getattr(item, name) for name in item.__dataclass_fields__]
        else:
            assert isinstance(item, (str, float, bool))
    assert count > len(KINDS)
