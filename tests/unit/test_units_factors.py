"""Every unit of the closed table against factors worked out by hand, against print, and against pint.

HAND holds one entry per symbol, written from exact definitions only; a symbol of the table without an entry fails.
PRINTED holds what NIST SP 811 (2008), Appendix B.8, prints for the same unit (read in transcriptions of it), compared
at half a unit of the last printed figure; "exact" marks the factors that are printed in bold there.
"""

from __future__ import annotations

import re

import pint
import pytest

from service.units import UnitTable
from service.units.kinds import KIND_ROWS

# Exact definitions. Pound, foot, gallon: international yard and pound agreement of 1959 and NIST Handbook 44;
# standard gravity: CGPM 1901; calorie and Btu of the International Table: 5th International Conference on the
# Properties of Steam, 1956 (1 cal = 4.1868 J, and 1 Btu/lb = 2326 J/kg); atmosphere: CGPM 1954;
# conventional columns of water (1000 kg/m3) and mercury (13 595.1 kg/m3): NIST SP 811 footnote 12.
G = 9.80665  # m/s2
LB = 0.45359237  # kg
GRAIN = LB / 7000  # kg
FT = 0.3048  # m
IN = 0.0254  # m
YARD = 0.9144  # m
MILE = 1609.344  # m
GAL = 231 * IN**3  # m3, US liquid gallon
IMP_GAL = 4.54609e-3  # m3
BBL = 42 * GAL  # m3, petroleum barrel
LBF = LB * G  # N
CAL = 4.1868  # J
BTU = 2326.0 * LB  # J
ATM = 101325.0  # Pa
DEG_F = 5 / 9  # K
MIN, HOUR, DAY = 60.0, 3600.0, 86400.0  # s
HG = 13595.1 * G  # Pa per m of mercury
WATER = 1000.0 * G  # Pa per m of water
LBMOL = 453.59237  # mol
# Amount of gas in a reference m3, per normal m3 (ideal gas: p/T over p/T of 0 degC, 101.325 kPa).
SM3 = 273.15 / 288.15  # 15 degC, 101.325 kPa
SCF = FT**3 * (14.696 * LBF / IN**2 / ATM) * (273.15 / (519.67 * DEG_F))  # 60 degF, 14.696 psi

PRESSURES = {
    "bar": 1e5, "mbar": 100.0, "Pa": 1.0, "hPa": 100.0, "kPa": 1e3, "MPa": 1e6, "psi": LBF / IN**2, "atm": ATM,
    "at": G * 1e4, "torr": ATM / 760, "mmHg": HG / 1e3, "inHg": HG * IN, "mmH2O": WATER / 1e3, "cmH2O": WATER / 100,
    "mH2O": WATER, "inH2O": WATER * IN, "ftH2O": WATER * FT, "N/m2": 1.0, "kN/m2": 1e3, "N/mm2": 1e6,
    "lbf/ft2": LBF / FT**2,
}  # fmt: skip
ABSOLUTE = {
    "bara": 1e5, "mbara": 100.0, "kPaa": 1e3, "MPaa": 1e6, "psia": LBF / IN**2, "ata": G * 1e4, "mmHga": HG / 1e3,
    "inHga": HG * IN, "mmH2Oa": WATER / 1e3, "inH2Oa": WATER * IN,
}  # fmt: skip
GAUGE = {
    "barg": 1e5, "mbarg": 100.0, "Pag": 1.0, "kPag": 1e3, "MPag": 1e6, "psig": LBF / IN**2, "atg": G * 1e4,
    "mmHgg": HG / 1e3, "inHgg": HG * IN, "mmH2Og": WATER / 1e3, "inH2Og": WATER * IN,
}  # fmt: skip

HAND: dict[str, dict[str, float]] = {
    "pressure": PRESSURES | ABSOLUTE | GAUGE,
    "pressure_difference": PRESSURES | {"mmWC": WATER / 1e3, "inWC": WATER * IN},
    "temperature": {"degC": 1.0, "K": 1.0, "degF": DEG_F, "degR": DEG_F},
    "temperature_difference": {"K": 1.0, "delta_degC": 1.0, "delta_degF": DEG_F, "delta_degR": DEG_F},
    "mass": {
        "kg": 1.0, "t": 1e3, "g": 1e-3, "mg": 1e-6, "lb": LB, "klb": 1e3 * LB, "oz": LB / 16, "short_ton": 2000 * LB,
        "long_ton": 2240 * LB,
    },
    "mass_flow": {
        "kg/s": 1.0, "t/h": 1e3 / HOUR, "kg/h": 1 / HOUR, "kg/min": 1 / MIN, "kg/d": 1 / DAY, "t/d": 1e3 / DAY,
        "t/min": 1e3 / MIN, "g/s": 1e-3, "g/min": 1e-3 / MIN, "g/h": 1e-3 / HOUR, "mg/s": 1e-6, "lb/h": LB / HOUR,
        "klb/h": 1e3 * LB / HOUR, "lb/s": LB, "lb/min": LB / MIN, "lb/d": LB / DAY, "short_ton/h": 2000 * LB / HOUR,
        "long_ton/h": 2240 * LB / HOUR,
    },
    "amount": {"kmol": 1e3, "mol": 1.0, "mmol": 1e-3, "lbmol": LBMOL},
    "molar_flow": {
        "kmol/h": 1e3 / HOUR, "kmol/s": 1e3, "kmol/min": 1e3 / MIN, "kmol/d": 1e3 / DAY, "mol/s": 1.0,
        "mol/min": 1 / MIN, "mol/h": 1 / HOUR, "mmol/s": 1e-3, "lbmol/h": LBMOL / HOUR, "lbmol/min": LBMOL / MIN,
        "lbmol/s": LBMOL,
    },
    "molar_mass": {"kg/kmol": 1e-3, "g/mol": 1e-3, "kg/mol": 1.0, "lb/lbmol": 1e-3},
    "density": {
        "kg/m3": 1.0, "g/cm3": 1e3, "g/mL": 1e3, "kg/L": 1e3, "g/L": 1.0, "g/m3": 1e-3, "t/m3": 1e3,
        "lb/ft3": LB / FT**3, "lb/in3": LB / IN**3, "lb/gal": LB / GAL,
    },
    "specific_volume": {"m3/kg": 1.0, "cm3/g": 1e-3, "L/kg": 1e-3, "m3/t": 1e-3, "ft3/lb": FT**3 / LB},
    "humidity_ratio": {"g/kg": 1e-3, "kg/kg": 1.0, "gr/lb": 1 / 7000, "lb/lb": 1.0},
    "dimensionless": {"-": 1.0, "%": 1e-2, "‰": 1e-3, "ppm": 1e-6},
    "length": {
        "m": 1.0, "mm": 1e-3, "cm": 1e-2, "km": 1e3, "um": 1e-6, "in": IN, "ft": FT, "yd": YARD, "mi": MILE,
    },
    "area": {"m2": 1.0, "cm2": 1e-4, "mm2": 1e-6, "ft2": FT**2, "in2": IN**2},
    "volume": {
        "m3": 1.0, "L": 1e-3, "mL": 1e-6, "cm3": 1e-6, "mm3": 1e-9, "ft3": FT**3, "in3": IN**3, "gal": GAL,
        "imp_gal": IMP_GAL, "bbl": BBL,
    },
    "volume_flow": {
        "m3/h": 1 / HOUR, "m3/s": 1.0, "m3/min": 1 / MIN, "m3/d": 1 / DAY, "L/s": 1e-3, "L/min": 1e-3 / MIN,
        "L/h": 1e-3 / HOUR, "mL/min": 1e-6 / MIN, "cm3/s": 1e-6, "cm3/min": 1e-6 / MIN, "ft3/s": FT**3,
        "ft3/min": FT**3 / MIN, "ft3/h": FT**3 / HOUR, "gpm": GAL / MIN, "gal/h": GAL / HOUR, "gal/d": GAL / DAY,
        "imp_gal/min": IMP_GAL / MIN, "bbl/d": BBL / DAY, "bbl/h": BBL / HOUR,
    },
    "normal_volume_flow": {
        "Nm3/h": 1 / HOUR, "Nm3/s": 1.0, "Nm3/min": 1 / MIN, "Nm3/d": 1 / DAY, "kNm3/h": 1e3 / HOUR,
        "kNm3/d": 1e3 / DAY, "NL/s": 1e-3, "NL/min": 1e-3 / MIN, "NL/h": 1e-3 / HOUR,
        "Sm3/h": SM3 / HOUR, "Sm3/s": SM3, "Sm3/min": SM3 / MIN, "Sm3/d": SM3 / DAY, "kSm3/h": 1e3 * SM3 / HOUR,
        "kSm3/d": 1e3 * SM3 / DAY,
        "scfm": SCF / MIN, "scf/s": SCF, "scfh": SCF / HOUR, "scfd": SCF / DAY, "MMscfd": 1e6 * SCF / DAY,
    },
    "normal_volume": {
        "Nm3": 1.0, "kNm3": 1e3, "NL": 1e-3, "Sm3": SM3, "kSm3": 1e3 * SM3, "scf": SCF, "MMscf": 1e6 * SCF,
    },
    "volumetric_heating_value": {
        "MJ/Nm3": 1e6, "kJ/Nm3": 1e3, "J/Nm3": 1.0, "kWh/Nm3": 3.6e6, "kcal/Nm3": 1e3 * CAL, "MJ/Sm3": 1e6 / SM3,
        "kJ/Sm3": 1e3 / SM3, "kWh/Sm3": 3.6e6 / SM3, "kcal/Sm3": 1e3 * CAL / SM3, "Btu/scf": BTU / SCF,
    },
    "velocity": {
        "m/s": 1.0, "m/min": 1 / MIN, "km/h": 1e3 / HOUR, "cm/s": 1e-2, "mm/s": 1e-3, "ft/s": FT, "ft/min": FT / MIN,
        "ft/h": FT / HOUR, "mi/h": MILE / HOUR,
    },
    "acceleration": {"m/s2": 1.0, "ft/s2": FT},
    "time": {"s": 1.0, "min": MIN, "h": HOUR, "d": DAY, "ms": 1e-3, "week": 7 * DAY},
    "energy": {
        "kJ": 1e3, "J": 1.0, "MJ": 1e6, "GJ": 1e9, "TJ": 1e12, "Wh": 3.6e3, "kWh": 3.6e6, "MWh": 3.6e9, "GWh": 3.6e12,
        "kcal": 1e3 * CAL, "Mcal": 1e6 * CAL, "Gcal": 1e9 * CAL, "Btu": BTU, "kBtu": 1e3 * BTU, "MMBtu": 1e6 * BTU,
        "ft*lbf": FT * LBF,
    },
    "power": {
        "kW": 1e3, "W": 1.0, "MW": 1e6, "GW": 1e9, "J/s": 1.0, "kJ/s": 1e3, "kJ/min": 1e3 / MIN, "kJ/h": 1e3 / HOUR,
        "MJ/s": 1e6, "MJ/h": 1e6 / HOUR, "GJ/h": 1e9 / HOUR, "GJ/d": 1e9 / DAY, "MWh/d": 3.6e9 / DAY,
        "kcal/h": 1e3 * CAL / HOUR, "Mcal/h": 1e6 * CAL / HOUR, "Gcal/h": 1e9 * CAL / HOUR, "Btu/h": BTU / HOUR,
        "Btu/min": BTU / MIN, "Btu/s": BTU, "kBtu/h": 1e3 * BTU / HOUR, "MMBtu/h": 1e6 * BTU / HOUR,
        "hp": 550 * FT * LBF, "metric_hp": 75 * G, "TR": 12000 * BTU / HOUR, "ft*lbf/s": FT * LBF,
    },
    "specific_energy": {
        "kJ/kg": 1e3, "J/kg": 1.0, "MJ/kg": 1e6, "J/g": 1e3, "kJ/g": 1e6, "GJ/t": 1e6, "MJ/t": 1e3, "kWh/kg": 3.6e6,
        "kWh/t": 3.6e3, "MWh/t": 3.6e6, "kcal/kg": 1e3 * CAL, "Btu/lb": 2326.0, "ft*lbf/lb": FT * G, "m2/s2": 1.0,
    },
    "specific_entropy": {
        "kJ/kg/K": 1e3, "J/kg/K": 1.0, "J/g/K": 1e3, "kcal/kg/K": 1e3 * CAL, "Btu/lb/degF": 4186.8,
        "Btu/lb/degR": 4186.8,
    },
    "entropy": {
        "kJ/K": 1e3, "J/K": 1.0, "MJ/K": 1e6, "kcal/K": 1e3 * CAL, "Btu/degF": BTU * 1.8, "Btu/degR": BTU * 1.8,
    },
    "mass_flux": {
        "kg/m2/s": 1.0, "kg/m2/h": 1 / HOUR, "lb/ft2/s": LB / FT**2, "lb/ft2/h": LB / FT**2 / HOUR,
    },
    "conductance": {
        "W/K": 1.0, "kW/K": 1e3, "MW/K": 1e6, "kJ/h/K": 1e3 / HOUR, "kcal/h/K": 1e3 * CAL / HOUR,
        "Btu/h/degF": BTU * 1.8 / HOUR, "Btu/h/degR": BTU * 1.8 / HOUR,
    },
    "heat_transfer_coefficient": {
        "W/m2/K": 1.0, "kW/m2/K": 1e3, "W/cm2/K": 1e4, "kJ/h/m2/K": 1e3 / HOUR, "kcal/h/m2/K": 1e3 * CAL / HOUR,
        "Btu/h/ft2/degF": BTU * 1.8 / HOUR / FT**2,
    },
    "thermal_conductivity": {
        "W/m/K": 1.0, "mW/m/K": 1e-3, "kW/m/K": 1e3, "kcal/h/m/K": 1e3 * CAL / HOUR,
        "Btu/h/ft/degF": BTU * 1.8 / HOUR / FT, "Btu*in/h/ft2/degF": BTU * 1.8 / HOUR / FT**2 * IN,
    },
    "viscosity": {
        "Pa*s": 1.0, "mPa*s": 1e-3, "uPa*s": 1e-6, "cP": 1e-3, "P": 0.1, "kg/m/s": 1.0, "lb/ft/s": LB / FT,
        "lb/ft/h": LB / FT / HOUR,
    },
}  # fmt: skip

# NIST SP 811 (2008), Appendix B.8.
PRINTED: dict[tuple[str, str], str] = {
    ("pressure", "atm"): "1.013 25 E+05 exact", ("pressure", "at"): "9.806 65 E+04 exact",
    ("pressure", "bar"): "1.0 E+05 exact", ("pressure", "mbar"): "1.0 E+02 exact",
    ("pressure", "inHg"): "3.386 389 E+03", ("pressure", "mmHg"): "1.333 224 E+02",
    ("pressure", "inH2O"): "2.490 889 E+02", ("pressure", "ftH2O"): "2.989 067 E+03",
    ("pressure", "cmH2O"): "9.806 65 E+01 exact", ("pressure", "mmH2O"): "9.806 65 E+00 exact",
    ("pressure", "psi"): "6.894 757 E+03", ("pressure", "torr"): "1.333 224 E+02",
    ("pressure", "lbf/ft2"): "4.788 026 E+01",
    ("mass", "lb"): "4.535 924 E-01", ("mass", "oz"): "2.834 952 E-02", ("mass", "short_ton"): "9.071 847 E+02",
    ("mass", "long_ton"): "1.016 047 E+03", ("mass", "t"): "1.0 E+03 exact",
    ("mass_flow", "lb/h"): "1.259 979 E-04", ("mass_flow", "lb/min"): "7.559 873 E-03",
    ("mass_flow", "lb/s"): "4.535 924 E-01",
    ("density", "lb/ft3"): "1.601 846 E+01", ("density", "lb/in3"): "2.767 990 E+04",
    ("density", "lb/gal"): "1.198 264 E+02", ("density", "g/cm3"): "1.0 E+03 exact",
    ("length", "in"): "2.54 E-02 exact", ("length", "ft"): "3.048 E-01 exact", ("length", "yd"): "9.144 E-01 exact",
    ("length", "mi"): "1.609 344 E+03 exact",
    ("area", "ft2"): "9.290 304 E-02 exact", ("area", "in2"): "6.4516 E-04 exact",
    ("volume", "ft3"): "2.831 685 E-02", ("volume", "gal"): "3.785 412 E-03",
    ("volume", "imp_gal"): "4.546 09 E-03 exact", ("volume", "bbl"): "1.589 873 E-01",
    ("volume", "L"): "1.0 E-03 exact",
    ("volume_flow", "ft3/min"): "4.719 474 E-04", ("volume_flow", "gpm"): "6.309 020 E-05",
    ("volume_flow", "gal/d"): "4.381 264 E-08",
    ("velocity", "ft/h"): "8.466 667 E-05", ("velocity", "ft/min"): "5.08 E-03 exact",
    ("velocity", "ft/s"): "3.048 E-01 exact", ("acceleration", "ft/s2"): "3.048 E-01 exact",
    ("time", "h"): "3.6 E+03 exact", ("time", "d"): "8.64 E+04 exact", ("time", "min"): "6.0 E+01 exact",
    ("energy", "Btu"): "1.055 056 E+03", ("energy", "ft*lbf"): "1.355 818 E+00",
    ("energy", "kWh"): "3.6 E+06 exact", ("energy", "kcal"): "4.1868 E+03 exact",
    ("power", "Btu/h"): "2.930 711 E-01", ("power", "Btu/s"): "1.055 056 E+03", ("power", "hp"): "7.456 999 E+02",
    ("power", "metric_hp"): "7.354 988 E+02", ("power", "TR"): "3.516 853 E+03",
    ("power", "ft*lbf/s"): "1.355 818 E+00",
    ("specific_energy", "Btu/lb"): "2.326 E+03 exact", ("specific_energy", "kcal/kg"): "4.1868 E+03 exact",
    ("specific_entropy", "Btu/lb/degF"): "4.1868 E+03 exact",
    ("specific_entropy", "Btu/lb/degR"): "4.1868 E+03 exact",
    ("entropy", "Btu/degF"): "1.899 101 E+03", ("entropy", "Btu/degR"): "1.899 101 E+03",
    ("heat_transfer_coefficient", "Btu/h/ft2/degF"): "5.678 263 E+00",
    ("thermal_conductivity", "Btu/h/ft/degF"): "1.730 735 E+00",
    ("viscosity", "cP"): "1.0 E-03 exact", ("viscosity", "P"): "1.0 E-01 exact",
    ("viscosity", "lb/ft/h"): "4.133 789 E-04", ("viscosity", "lb/ft/s"): "1.488 164 E+00",
}  # fmt: skip

# Zeros of the temperature scales [K]: CGPM 1954 and NIST SP 811 B.8 (t/degF + 459.67)/1.8.
ZEROS = {"degC": 273.15, "K": 0.0, "degF": 459.67 / 1.8, "degR": 0.0}

SYMBOLS = [(kind, symbol) for kind, factors in HAND.items() for symbol in factors]


@pytest.fixture(scope="module")
def table() -> UnitTable:
    return UnitTable.build()


def test_every_symbol_of_the_table_has_a_hand_checked_factor_and_no_other(table: UnitTable) -> None:
    assert {name: set(kind.symbols) for name, kind in table.kinds.items()} == {
        name: set(factors) for name, factors in HAND.items()
    }


@pytest.mark.parametrize(("kind", "symbol"), SYMBOLS)
def test_a_factor_equals_the_one_from_exact_definitions(table: UnitTable, kind: str, symbol: str) -> None:
    unit = table.unit(symbol, kind)
    assert unit.symbol == symbol
    # A few roundings of the hand-made product, each 1.1e-16.
    assert unit.factor == pytest.approx(HAND[kind][symbol], rel=2e-15)


@pytest.mark.parametrize(("kind", "symbol"), list(PRINTED))
def test_a_factor_equals_the_printed_one_to_its_last_figure(table: UnitTable, kind: str, symbol: str) -> None:
    mantissa, exponent, *mark = re.sub(r"(?<=\d) (?=\d)", "", PRINTED[kind, symbol]).split()
    power = 10.0 ** int(exponent[1:])
    printed = float(mantissa) * power
    half_a_figure = 0.5000001 * 10.0 ** -len(mantissa.split(".")[1]) * power
    tolerance = 2e-15 * printed if mark == ["exact"] else half_a_figure
    assert table.unit(symbol, kind).factor == pytest.approx(printed, rel=0, abs=tolerance)


@pytest.mark.parametrize(("symbol", "zero"), ZEROS.items())
def test_a_temperature_scale_has_its_zero_where_it_is_defined(table: UnitTable, symbol: str, zero: float) -> None:
    assert table.unit(symbol, "temperature").offset == pytest.approx(zero, rel=2e-15, abs=0)


def test_only_temperatures_have_an_offset_and_only_marked_pressures_are_gauge(table: UnitTable) -> None:
    units = [table.unit(symbol, kind) for kind, symbol in SYMBOLS]
    assert {unit.symbol for unit in units if unit.offset} == {"degC", "degF"}
    assert {(unit.kind, unit.symbol) for unit in units if unit.gauge} == {("pressure", symbol) for symbol in GAUGE}


# Where pint, asked for the bare name, means another unit than the plant does: ratio of pint's to ours.
PINT_MEANS_ANOTHER = {
    r"Btu|BTU": 1055.056 / BTU,  # pint's Btu is that of ISO 31-4, rounded
    r"cal": 4.184 / CAL,  # pint's cal is thermochemical
    r"bbl": 31.5 / 42,  # pint's barrel is that of other liquids
}
# Where pint reads the text as another kind of thing: bar times gram, petasiemens, mass per area.
PINT_READS_ANOTHER_KIND = re.compile(r".*( [ag]|\([ag]\))|cu ft|cu in|PS|TR|kg/cm2")


def test_every_symbol_and_alias_agrees_with_pint_where_pint_knows_it(table: UnitTable) -> None:
    registry = pint.UnitRegistry(cache_folder=None)
    compared = 0
    for row in KIND_ROWS:
        if row.name == "temperature" or "normal" in row.name or row.name == "volumetric_heating_value":
            continue  # scales with a zero are checked above; pint has no gas volumes
        for text in table.kinds[row.name].units:
            if PINT_READS_ANOTHER_KIND.fullmatch(text):
                continue
            try:
                quantity = registry.Quantity(1.0, re.sub(r"(?<=[a-z])([23])\b", r"**\1", text))
            except Exception:  # noqa: BLE001  pint raises a dozen types for what it does not know
                continue
            ratio = next((ratio for name, ratio in PINT_MEANS_ANOTHER.items() if re.search(name, text)), 1.0)
            ours = table.unit(text, row.name).factor
            assert quantity.to(row.si_built_from).magnitude == pytest.approx(ours * ratio, rel=1e-12), text
            compared += 1
    assert compared > 250  # so that a change in pint cannot empty this test


def test_the_other_reading_of_several_divisors_is_the_unit_of_no_kind() -> None:
    """Why `kJ/kg K` may be accepted: read as kJ K/kg it would be none of the quantities that a case knows."""
    registry = pint.UnitRegistry(cache_folder=None)
    known = {registry.Quantity(1.0, row.si_built_from).dimensionality for row in KIND_ROWS}
    checked = 0
    for _, symbol in SYMBOLS:
        first, *divisors = (
            re.sub(r"(?<=[a-z])([23])\b", r"**\1", symbol).replace("degR", "K").replace("deg", "delta_deg").split("/")
        )
        if len(divisors) > 1:
            checked += 1
            assert registry.Quantity(1.0, f"{first}/{'*'.join(divisors)}").dimensionality not in known, symbol
    assert checked > 20
