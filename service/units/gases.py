"""Symbols of gas amounts told as a volume at reference conditions, as data.

Rows are those of symbols.py, grouped by the reference state that the symbol stands for. The SI value of such a quantity
is normal m3 (0 degC, 101.325 kPa); the others follow by p/T of an ideal gas.
"""

from __future__ import annotations

from .rows import Row

# Reference states of gas volumes [temperature, pressure] in pint's language, by the prefix of the rows below.
GAS_REFERENCES: dict[str, tuple[str, str]] = {
    "normal": ("273.15 * kelvin", "101.325 * kilopascal"),  # DIN 1343, ISO 10780: 0 degC, 101.325 kPa
    "standard": ("288.15 * kelvin", "101.325 * kilopascal"),  # ISO 13443: 15 degC, 101.325 kPa
    "us": ("519.67 * delta_degF", "14.696 * psi"),  # US trade: 60 degF, 14.696 psi
}

NORMAL_VOLUMES: dict[str, tuple[Row, ...]] = {
    "normal": (
        ("Nm3", "meter**3", ()),
        ("kNm3", "1000*meter**3", ()),
        ("NL", "liter", ()),
    ),
    "standard": (
        ("Sm3", "meter**3", ()),
        ("kSm3", "1000*meter**3", ()),
    ),
    "us": (
        ("scf", "foot**3", ("SCF",)),
        ("MMscf", "1000000*foot**3", ("MMSCF",)),
    ),
}

NORMAL_VOLUME_FLOWS: dict[str, tuple[Row, ...]] = {
    "normal": (
        ("Nm3/h", "meter**3/hour", ()),
        ("Nm3/s", "meter**3/second", ()),
        ("Nm3/min", "meter**3/minute", ()),
        ("Nm3/d", "meter**3/day", ()),
        ("kNm3/h", "1000*meter**3/hour", ()),
        ("kNm3/d", "1000*meter**3/day", ()),
        ("NL/s", "liter/second", ()),
        ("NL/min", "liter/minute", ()),
        ("NL/h", "liter/hour", ()),
    ),
    "standard": (
        ("Sm3/h", "meter**3/hour", ()),
        ("Sm3/s", "meter**3/second", ()),
        ("Sm3/min", "meter**3/minute", ()),
        ("Sm3/d", "meter**3/day", ()),
        ("kSm3/h", "1000*meter**3/hour", ()),
        ("kSm3/d", "1000*meter**3/day", ()),
    ),
    "us": (
        ("scfm", "foot**3/minute", ("scf/min", "SCFM")),
        ("scf/s", "foot**3/second", ()),
        ("scfh", "foot**3/hour", ("scf/h", "SCFH")),
        ("scfd", "foot**3/day", ("scf/d", "SCFD")),
        ("MMscfd", "1000000*foot**3/day", ("MMscf/d", "MMSCFD")),
    ),
}

VOLUMETRIC_HEATING_VALUES: dict[str, tuple[Row, ...]] = {
    "normal": (
        ("MJ/Nm3", "megajoule/meter**3", ()),
        ("kJ/Nm3", "kilojoule/meter**3", ()),
        ("J/Nm3", "joule/meter**3", ()),
        ("kWh/Nm3", "kilowatt*hour/meter**3", ()),
        ("kcal/Nm3", "1000*international_calorie/meter**3", ()),
    ),
    "standard": (
        ("MJ/Sm3", "megajoule/meter**3", ()),
        ("kJ/Sm3", "kilojoule/meter**3", ()),
        ("kWh/Sm3", "kilowatt*hour/meter**3", ()),
        ("kcal/Sm3", "1000*international_calorie/meter**3", ()),
    ),
    "us": (("Btu/scf", "Btu_it/foot**3", ()),),
}
