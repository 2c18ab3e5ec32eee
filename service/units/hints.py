"""What to answer to spellings that are common in plants but have no single meaning, as data."""

from __future__ import annotations

_TEMPERATURES = ("temperature", "temperature_difference")
_GAS = ("volume_flow", "normal_volume_flow", "volume", "normal_volume", "volumetric_heating_value")
_HEAT = ("energy", "power", "specific_energy", "specific_entropy", "entropy", "conductance", "volumetric_heating_value")

TRAPS: tuple[tuple[tuple[str, ...], tuple[str, ...], str], ...] = (
    (("C", "celsius", "Celsius", "deg"), _TEMPERATURES, "Write degC (K or delta_degC for a difference)."),
    (("F", "fahrenheit", "Fahrenheit"), _TEMPERATURES, "Write degF (delta_degF for a difference)."),
    (("R", "rankine", "Rankine"), _TEMPERATURES, "Write degR."),
    (("ton", "tons", "T"), ("mass",), "Write t (1000 kg), short_ton (2000 lb) or long_ton (2240 lb)."),
    (
        ("ton/h", "tons/h", "ton/hr", "tons/hr", "T/h"),
        ("mass_flow",),
        "Write t/h (1000 kg/h), short_ton/h (2000 lb/h) or long_ton/h (2240 lb/h).",
    ),
    (("lbs", "lbs/h", "lbs/hr", "#/h", "#/hr"), ("mass", "mass_flow"), "Write lb, lb/h."),
    (("Mlb/h", "Mlb/hr", "MPPH"), ("mass_flow",), "Write klb/h (a thousand pounds an hour)."),
    (("a", "y", "yr", "year", "years", "month"), ("time",), "Write d or h: the length of a year is not agreed."),
    (("cfm", "CFM"), _GAS, "Write ft3/min (actual volume) or scfm (60 degF, 14.696 psi)."),
    (("cfh", "CFH"), _GAS, "Write ft3/h (actual volume) or scfh (60 degF, 14.696 psi)."),
    (
        ("slpm", "SLPM", "slm", "sccm"),
        _GAS,
        "Write NL/min (0 degC, 101.325 kPa), or L/min for the actual volume: slpm has several reference states.",
    ),
    (
        ("Mscf", "MSCF", "Mscfd", "MSCFD", "mcf", "Mcf", "MCF", "Mcfd", "MCFD"),
        _GAS,
        "Write scf, MMscf, scfd or MMscfd: M is read as a thousand by some and as a million by others.",
    ),
    (("cal", "cal/g", "cal/h", "cal/s"), _HEAT, "Write kcal (4186.8 J) or J: there are several calories."),
    (("therm", "therms", "thm", "therm/h"), _HEAT, "Write MMBtu or MJ: the US therm and the EC therm differ."),
    (
        ("MBtu", "MBTU", "mmBtu", "MBtu/h", "MBTU/h", "MBtu/hr", "MBTU/hr", "MBH"),
        _HEAT,
        "Write kBtu (a thousand) or MMBtu (a million).",
    ),
    (("bhp", "BHP"), ("power",), "Write hp (550 ft lbf/s) or kW: bhp may be a brake or a boiler horsepower."),
    (("mW",), ("power",), "Write MW, kW or W: no plant is told in milliwatts."),
    (("ton", "tons", "RT"), ("power",), "Write TR (refrigeration, 12000 Btu/h) or kW."),
    (("N*m", "N·m", "N m", "Nm", "J/rev"), ("energy",), "Write J for energy; a torque is no quantity of a case."),
    (("kJ/kg*K", "J/kg*K"), ("specific_entropy",), "Write kJ/kg/K or kJ/(kg*K)."),
    (("ppmv", "ppmw", "mol%", "wt%", "vol%"), ("dimensionless",), "Write % or ppm."),
    (("g",), ("acceleration",), "Write m/s2: 1 g is 9.80665 m/s2."),
)
"""(spellings, kinds for which the advice holds, what to write instead)."""

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
