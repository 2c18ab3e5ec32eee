"""What to answer to spellings that are common in plants but have no single meaning, as data."""

from __future__ import annotations

TRAPS: dict[str, str] = {
    "C": "Write degC (K or delta_degC for a difference).",
    "F": "Write degF (delta_degF for a difference).",
    "R": "Write degR.",
    "deg": "Write degC, degF, K or degR.",
    "celsius": "Write degC.",
    "fahrenheit": "Write degF.",
    "ton": "Write t (1000 kg), short_ton (2000 lb) or long_ton (2240 lb).",
    "tons": "Write t (1000 kg), short_ton (2000 lb) or long_ton (2240 lb).",
    "ton/h": "Write t/h (1000 kg/h), short_ton/h or long_ton/h.",
    "ton/hr": "Write t/h (1000 kg/h), short_ton/h or long_ton/h.",
    "tons/h": "Write t/h (1000 kg/h), short_ton/h or long_ton/h.",
    "tons/hr": "Write t/h (1000 kg/h), short_ton/h or long_ton/h.",
    "a": "Write d, or h: the length of a year is not agreed.",
    "year": "Write d, or h: the length of a year is not agreed.",
    "cfm": "Write ft3/min (actual volume) or scfm (60 degF, 14.696 psi).",
    "CFM": "Write ft3/min (actual volume) or scfm (60 degF, 14.696 psi).",
    "cfh": "Write ft3/h (actual volume) or scfh (60 degF, 14.696 psi).",
    "slpm": "Write NL/min (0 degC, 101.325 kPa), or L/min for the actual volume: slpm has several reference states.",
    "cal": "Write kcal (4186.8 J, International Table) or J: there are several calories.",
    "cal/g": "Write kcal/kg (4186.8 J/kg, International Table) or J/g: there are several calories.",
    "therm": "Write MMBtu or MJ: the US therm and the EC therm differ.",
    "MBtu": "Write kBtu (a thousand) or MMBtu (a million).",
    "MBTU": "Write kBtu (a thousand) or MMBtu (a million).",
    "MBtu/h": "Write kBtu/h (a thousand) or MMBtu/h (a million).",
    "MBTU/h": "Write kBtu/h (a thousand) or MMBtu/h (a million).",
    "MBH": "Write kBtu/h.",
    "Mlb/h": "Write klb/h (a thousand pounds an hour).",
    "Mscf": "Write scf or MMscf: M is read as a thousand by some and as a million by others.",
    "Mscfd": "Write scfd or MMscfd: M is read as a thousand by some and as a million by others.",
    "mcf": "Write scf or ft3.",
    "bhp": "Write hp (550 ft lbf/s) or kW: bhp may be a brake or a boiler horsepower.",
    "ppmv": "Write ppm.",
    "kJ/kg*K": "Write kJ/kg/K or kJ/(kg*K).",
    "kJ/kg/degF": "Write kJ/kg/K.",
    "N*m": "Write J for energy; a torque is no quantity of a case.",
    "Nm": "Write J for energy; a torque is no quantity of a case.",
    "mW": "Write MW, kW or W: no plant is told in milliwatts.",
}

PAIRS: dict[tuple[str, str], str] = {
    (
        "temperature_difference",
        "temperature",
    ): "degC and degF are levels; for a difference write K, delta_degC or delta_degF.",
    (
        "temperature",
        "temperature_difference",
    ): "delta_degC and delta_degF are differences; write a level in degC, K or degF.",
    ("pressure_difference", "pressure"): "A difference is neither gauge nor absolute; write bar, kPa, mbar or psi.",
    ("pressure", "pressure_difference"): "Say whether it is absolute (mmH2Oa) or gauge (mmH2Og).",
    (
        "volume_flow",
        "normal_volume_flow",
    ): "This is an actual volume; give an amount at reference conditions as normal_volume_flow.",
    (
        "normal_volume_flow",
        "volume_flow",
    ): "Name the reference conditions (Nm3/h, Sm3/h, scfm), or give an actual volume as volume_flow.",
    ("volume", "normal_volume"): "This is an actual volume: write m3, L or ft3.",
    ("normal_volume", "volume"): "Name the reference conditions: Nm3, Sm3 or scf.",
    ("power", "energy"): "A power is an energy per time: kW, not kWh.",
    ("energy", "power"): "An energy is a power times a time: kWh, not kW.",
    ("mass_flow", "mass"): "A flow is per time: kg/s, t/h or lb/h.",
    ("mass", "mass_flow"): "A mass is no flow: kg, t or lb.",
    ("mass_flow", "volume_flow"): "A volume flow is given as volume_flow.",
    ("mass_flow", "normal_volume_flow"): "A volume flow of gas is given as normal_volume_flow.",
    ("mass_flow", "molar_flow"): "An amount of substance per time is given as molar_flow.",
}
"""(kind wanted, kind given) -> what to do about it."""
