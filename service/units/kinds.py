"""The kinds of quantity, as data: what each is called, its SI unit and the units in which it is shown.

A kind is what a quantity *is*, not its dimension: a pressure is no pressure difference, a temperature no temperature
difference, a torque would be no energy, although each pair shares its SI unit. Symbols here are those of symbols.py.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

System = Literal["metric", "SI", "US"]
SYSTEMS: tuple[System, ...] = ("metric", "SI", "US")


@dataclass(frozen=True, slots=True)
class KindRow:
    """One kind of quantity.

    name, title: how a program and a person call it; article: "a" or "an" before the title;
    si: the table's symbol of the SI unit, and si_built_from the same as pint spells it;
    display and coherent: symbols for metric, SI, US: what an answer is shown in, and what multiplies out in a formula
    with numbers (kg/s times kJ/kg is kW; lb/h times Btu/lb is Btu/h);
    positive: only values above zero are possible; bare_number: the unit may be left out; note: one sentence for a user;
    usual: symbols to name in an error where the first of the table are not the ones to name.
    """

    name: str
    title: str
    si: str
    si_built_from: str
    display: tuple[str, str, str]
    coherent: tuple[str, str, str]
    positive: bool = False
    bare_number: bool = False
    note: str = ""
    usual: tuple[str, ...] = ()

    @property
    def article(self) -> str:
        return "an" if self.title[0] in "aeiou" else "a"


_PRESSURE_NOTE = (
    "Without a mark a pressure is absolute: bar is the same as bara. "
    "barg, kPag and psig count from the site's atmospheric pressure."
)
_DIFFERENCE_NOTE = "A difference has no zero: write bar, kPa or psi without g or a."
_NORMAL_NOTE = (
    "An amount of gas, told as its volume at reference conditions: N is 0 degC and 101.325 kPa, S is 15 degC and "
    "101.325 kPa, scf is 60 degF and 14.696 psi (ideal gas)."
)
_HEAT_NOTE = "kcal and Btu are those of the International Table: 1 kcal = 4186.8 J, 1 Btu/lb = 2326 J/kg."

KIND_ROWS: tuple[KindRow, ...] = (
    KindRow(
        "pressure", "pressure", "Pa", "pascal", ("bar", "Pa", "psia"), ("bar", "Pa", "psia"),
        positive=True, note=_PRESSURE_NOTE, usual=("bar", "barg", "kPa", "kPag", "psia", "psig"),
    ),
    KindRow(
        "pressure_difference", "pressure difference", "Pa", "pascal", ("bar", "Pa", "psi"), ("bar", "Pa", "psi"),
        note=_DIFFERENCE_NOTE, usual=("bar", "mbar", "kPa", "Pa", "mmH2O", "psi"),
    ),
    KindRow(
        "temperature", "temperature", "K", "kelvin", ("degC", "K", "degF"), ("K", "K", "degR"),
        positive=True, note="A level, not a difference.",
    ),
    KindRow(
        "temperature_difference", "temperature difference", "K", "kelvin",
        ("K", "K", "delta_degF"), ("K", "K", "delta_degF"),
        note="A difference of 1 K is 1 delta_degC or 1.8 delta_degF; degC and degF are levels.",
    ),
    KindRow("mass", "mass", "kg", "kilogram", ("kg", "kg", "lb"), ("kg", "kg", "lb"), note="t is 1000 kg."),
    KindRow(
        "mass_flow", "mass flow", "kg/s", "kilogram/second", ("kg/s", "kg/s", "lb/h"), ("kg/s", "kg/s", "lb/h"),
        note="t is 1000 kg.", usual=("kg/s", "t/h", "kg/h", "lb/h"),
    ),
    KindRow(
        "molar_flow", "molar flow", "mol/s", "mole/second",
        ("kmol/h", "mol/s", "lbmol/h"), ("kmol/s", "mol/s", "lbmol/h"),
    ),
    KindRow(
        "volume_flow", "volume flow", "m3/s", "meter**3/second",
        ("m3/h", "m3/s", "ft3/min"), ("m3/s", "m3/s", "ft3/h"),
        note="The actual volume at the state of the stream. gal and gpm are US gallons, bbl is 42 US gallons.",
        usual=("m3/h", "m3/s", "L/min", "ft3/min", "gpm"),
    ),
    KindRow(
        "normal_volume_flow", "normal volume flow", "Nm3/s", "meter**3/second",
        ("Nm3/h", "Nm3/s", "scfm"), ("Nm3/s", "Nm3/s", "scfh"), note=_NORMAL_NOTE,
        usual=("Nm3/h", "Sm3/h", "scfm", "MMscfd"),
    ),
    KindRow(
        "normal_volume", "normal volume", "Nm3", "meter**3", ("Nm3", "Nm3", "scf"), ("Nm3", "Nm3", "scf"),
        note=_NORMAL_NOTE,
    ),
    KindRow(
        "volume", "volume", "m3", "meter**3", ("m3", "m3", "ft3"), ("m3", "m3", "ft3"),
        note="gal is the US gallon, bbl is 42 US gallons.",
    ),
    KindRow("length", "length", "m", "meter", ("m", "m", "ft"), ("m", "m", "ft")),
    KindRow("area", "area", "m2", "meter**2", ("m2", "m2", "ft2"), ("m2", "m2", "ft2")),
    KindRow("velocity", "velocity", "m/s", "meter/second", ("m/s", "m/s", "ft/s"), ("m/s", "m/s", "ft/s")),
    KindRow("time", "time", "s", "second", ("s", "s", "s"), ("s", "s", "h")),
    KindRow(
        "energy", "energy", "J", "joule", ("kJ", "J", "Btu"), ("kJ", "J", "Btu"),
        note=_HEAT_NOTE, usual=("kJ", "MJ", "kWh", "kcal", "Btu"),
    ),
    KindRow(
        "power", "power", "W", "watt", ("kW", "W", "Btu/h"), ("kW", "W", "Btu/h"),
        note=_HEAT_NOTE + " hp is 550 ft lbf/s.", usual=("kW", "MW", "GJ/h", "Btu/h", "MMBtu/h", "hp"),
    ),
    KindRow(
        "specific_energy", "specific energy", "J/kg", "joule/kilogram",
        ("kJ/kg", "J/kg", "Btu/lb"), ("kJ/kg", "J/kg", "Btu/lb"), note=_HEAT_NOTE,
        usual=("kJ/kg", "MJ/kg", "kcal/kg", "Btu/lb"),
    ),
    KindRow(
        "specific_entropy", "specific entropy or heat capacity", "J/kg/K", "joule/kilogram/kelvin",
        ("kJ/kg/K", "J/kg/K", "Btu/lb/degF"), ("kJ/kg/K", "J/kg/K", "Btu/lb/degR"), note=_HEAT_NOTE,
    ),
    KindRow(
        "entropy", "entropy or heat capacity", "J/K", "joule/kelvin",
        ("kJ/K", "J/K", "Btu/degR"), ("kJ/K", "J/K", "Btu/degR"), note=_HEAT_NOTE,
    ),
    KindRow(
        "density", "density", "kg/m3", "kilogram/meter**3",
        ("kg/m3", "kg/m3", "lb/ft3"), ("kg/m3", "kg/m3", "lb/ft3"), positive=True,
    ),
    KindRow(
        "specific_volume", "specific volume", "m3/kg", "meter**3/kilogram",
        ("m3/kg", "m3/kg", "ft3/lb"), ("m3/kg", "m3/kg", "ft3/lb"), positive=True,
    ),
    KindRow(
        "mass_flux", "mass flux", "kg/m2/s", "kilogram/meter**2/second",
        ("kg/m2/s", "kg/m2/s", "lb/ft2/s"), ("kg/m2/s", "kg/m2/s", "lb/ft2/h"),
    ),
    KindRow(
        "conductance", "conductance (UA) or entropy flow", "W/K", "watt/kelvin",
        ("kW/K", "W/K", "Btu/h/degF"), ("kW/K", "W/K", "Btu/h/degR"), note=_HEAT_NOTE,
    ),
    KindRow(
        "heat_transfer_coefficient", "heat transfer coefficient", "W/m2/K", "watt/meter**2/kelvin",
        ("W/m2/K", "W/m2/K", "Btu/h/ft2/degF"), ("kW/m2/K", "W/m2/K", "Btu/h/ft2/degF"), note=_HEAT_NOTE,
    ),
    KindRow(
        "volumetric_heating_value", "volumetric heating value", "J/Nm3", "joule/meter**3",
        ("MJ/Nm3", "J/Nm3", "Btu/scf"), ("kJ/Nm3", "J/Nm3", "Btu/scf"), note=_NORMAL_NOTE,
    ),
    KindRow(
        "molar_mass", "molar mass", "kg/mol", "kilogram/mole",
        ("kg/kmol", "kg/mol", "lb/lbmol"), ("kg/kmol", "kg/mol", "lb/lbmol"), positive=True,
    ),
    KindRow("amount", "amount of substance", "mol", "mole", ("kmol", "mol", "lbmol"), ("kmol", "mol", "lbmol")),
    KindRow(
        "viscosity", "dynamic viscosity", "Pa*s", "pascal*second",
        ("mPa*s", "Pa*s", "cP"), ("Pa*s", "Pa*s", "lb/ft/h"), positive=True,
    ),
    KindRow(
        "thermal_conductivity", "thermal conductivity", "W/m/K", "watt/meter/kelvin",
        ("W/m/K", "W/m/K", "Btu/h/ft/degF"), ("kW/m/K", "W/m/K", "Btu/h/ft/degF"), positive=True, note=_HEAT_NOTE,
    ),
    KindRow(
        "dimensionless", "dimensionless number", "-", "dimensionless", ("-", "-", "-"), ("-", "-", "-"),
        bare_number=True, note="A bare number will do.",
    ),
    KindRow(
        "humidity_ratio", "humidity ratio", "kg/kg", "dimensionless",
        ("g/kg", "kg/kg", "gr/lb"), ("kg/kg", "kg/kg", "lb/lb"),
        bare_number=True, note="Mass of water per mass of dry air; a bare number is kg/kg.",
    ),
    KindRow(
        "acceleration", "acceleration", "m/s2", "meter/second**2", ("m/s2", "m/s2", "ft/s2"), ("m/s2", "m/s2", "ft/s2")
    ),
)  # fmt: skip

KINDS: tuple[str, ...] = tuple(row.name for row in KIND_ROWS)
