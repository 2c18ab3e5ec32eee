"""Well-known textbook examples beyond checks.json. All numbers: value from memory, with the source named.

Tolerances are absolute, in SI units: half a unit in the last printed digit plus what the source's tables (printed to
0.1 kJ/kg, some with interpolation) or its constant heat capacity allow.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from tests.published.steady_cases import Read, at, case, efficiency, heat, stream, tie, work


@dataclass(frozen=True, slots=True)
class Example:
    """expected: what → (value [SI], absolute tolerance [SI], how to read it off the answers)."""

    source: str
    document: dict[str, Any]
    expected: dict[str, tuple[float, float, Read]]


CENGEL = "Çengel & Boles, Thermodynamics: An Engineering Approach, 7th ed., Example {} (value from memory)"
MORAN = "Moran & Shapiro, Fundamentals of Engineering Thermodynamics, 5th ed., Example {} (value from memory)"
FOOT, POUND, BTU = 0.3048, 0.45359237, 1055.05585262

EXAMPLES: dict[str, Example] = {
    "air slowed down in a diffuser": Example(
        CENGEL.format("5-4"),
        case([
            stream("inlet", None, "diffuser", "air", p="80 kPa", T="10 degC", velocity="200 m/s", mass_flow="?",
                   bore="713.65 mm"),  # 0.4 m2
            stream("outlet", "diffuser", None, None, p="100 kPa", velocity="0 m/s", T="?"),
        ]),
        # printed 78.8 kg/s and 303 K; the outlet's velocity is taken as nothing, its pressure hardly matters
        {"m": (78.8, 0.06, at("inlet.mass_flow")), "T2": (303.0, 0.5, at("outlet.T"))},
    ),
    "steam accelerated in a nozzle that loses heat": Example(
        CENGEL.format("5-5E"),
        case([
            stream("inlet", None, "nozzle", "water", p="250 psia", T="700 degF", mass_flow="10 lb/s",
                   bore="6.0555 in", velocity="?"),  # 0.2 ft2
            stream("outlet", "nozzle", None, None, p="200 psia", velocity="900 ft/s", T="?"),
        ], transfers=[heat("loss", "nozzle", rate="43200 Btu/h")]),  # 1.2 Btu/lb at 10 lb/s
        # printed 134.4 ft/s and 662.0 degF
        {"V1": (134.4 * FOOT, 0.1 * FOOT, at("inlet.velocity")),
         "T2": ((662.0 + 459.67) / 1.8, 0.3 / 1.8, at("outlet.T"))},
    ),
    "refrigerant condensed by water": Example(
        CENGEL.format("5-10"),
        case([
            stream("hot", None, "refrigerant-side", "R134a", p="1 MPa", T="70 degC", mass_flow="6 kg/min"),
            stream("liquid", "refrigerant-side", None, None, p="1 MPa", T="35 degC"),
            stream("water-in", None, "water-side", "water", p="300 kPa", T="15 degC", mass_flow="?"),
            stream("water-out", "water-side", None, None, p="300 kPa", T="25 degC"),
        ], transfers=[heat("duty", "refrigerant-side", "water-side")]),
        # printed 29.1 kg/min and 1218 kJ/min; R134a tables of the source to 0.1 kJ/kg in 203 kJ/kg
        {"m_w": (29.1 / 60, 0.06 / 60, at("water-in.mass_flow")), "Q": (1218e3 / 60, 2e3 / 60, at("duty.rate"))},
    ),
    "electric heating of air in a duct": Example(
        CENGEL.format("5-11"),
        case([
            stream("cold", None, "duct", "air", p="100 kPa", T="17 degC", volume_flow="150 m3/min"),
            stream("warm", "duct", None, None, p="100 kPa", T="?"),
        ], transfers=[
            {"id": "heater", "kind": "electrical_work", "to": "duct", "rate": "15 kW"},
            heat("loss", "duct", rate="200 W"),
        ]),
        {"T2": (273.15 + 21.9, 0.06, at("warm.T"))},  # printed 21.9 degC, with cp = 1.005 kJ/(kg K)
    ),
    "ideal vapour-compression refrigeration": Example(
        CENGEL.format("11-1"),
        case([
            stream("vapour", "evaporator", "compressor", "R134a", p="0.14 MPa", saturated="vapour",
                   mass_flow="0.05 kg/s"),
            stream("hot-gas", "compressor", "condenser", "R134a", p="0.8 MPa"),
            stream("liquid", "condenser", "valve", "R134a", p="0.8 MPa", saturated="liquid"),
            stream("flashed", "valve", "evaporator", "R134a", p="0.14 MPa"),
        ], transfers=[heat("cooling", None, "evaporator"), work("shaft", None, "compressor"),
                      heat("rejected", "condenser")],
           relations=[efficiency("ideal", "vapour", "hot-gas", 1.0),
                      tie("cop", "ratio", "cooling.rate", "shaft.rate")]),
        # printed 7.18 kW, 1.81 kW, 9.0 kW and 3.97
        {"Q_L": (7180.0, 15.0, at("cooling.rate")), "W": (1810.0, 8.0, at("shaft.rate")),
         "Q_H": (9000.0, 50.0, at("rejected.rate")), "COP": (3.97, 0.02, at("cop.value"))},
    ),
    "pressing a liquid and pressing its vapour": Example(
        CENGEL.format("7-12"),
        case([
            stream("liquid", None, "pump", "water", p="100 kPa", saturated="liquid", mass_flow="1 kg/s"),
            stream("pressed-liquid", "pump", None, None, p="1 MPa"),
            stream("vapour", None, "compressor", "water", p="100 kPa", saturated="vapour", mass_flow="1 kg/s"),
            stream("pressed-vapour", "compressor", None, None, p="1 MPa"),
        ], transfers=[work("pump-shaft", None, "pump"), work("compressor-shaft", None, "compressor")],
           relations=[efficiency("ideal-pump", "liquid", "pressed-liquid", 1.0),
                      efficiency("ideal-compressor", "vapour", "pressed-vapour", 1.0)]),
        # printed 0.94 kJ/kg (v dp) and 518.6 kJ/kg
        {"pump": (940.0, 6.0, at("pump-shaft.rate")), "compressor": (518.6e3, 0.6e3, at("compressor-shaft.rate"))},
    ),
    "power of an air compressor that loses heat": Example(
        MORAN.format("4.5"),
        case([
            stream("inlet", None, "compressor", "air", p="1 bar", T="290 K", velocity="6 m/s", bore="356.8248 mm"),
            stream("exit", "compressor", None, None, p="7 bar", T="450 K", velocity="2 m/s"),
        ], transfers=[heat("loss", "compressor", rate="3 kW"), work("shaft", None, "compressor")]),  # 180 kJ/min
        {"W": (119.4e3, 0.4e3, at("shaft.rate"))},  # printed -119.4 kW; air as an ideal gas in the source
    ),
    "quality of steam by a throttling calorimeter": Example(
        MORAN.format("4.9"),
        case([
            stream("main", None, "calorimeter", "water", p="20 bar", x="?"),
            stream("exhaust", "calorimeter", None, None, p="1 bar", T="120 degC"),
        ]),
        {"x": (0.956, 0.001, at("main.x"))},
    ),
    "efficiency of an air turbine from its work": Example(
        MORAN.format("6.12"),
        case([
            stream("inlet", None, "turbine", "air", p="3 bar", T="390 K", mass_flow="1 kg/s"),
            stream("exit", "turbine", None, None, p="1 bar"),
        ], transfers=[work("shaft", "turbine", rate="74 kW")], relations=[efficiency("eta", "inlet", "exit")]),
        {"eta": (0.70, 0.005, at("eta.value"))},  # printed 0.70
    ),
}  # fmt: skip
