"""The quantities that items of a case can have: their kinds, and the magnitudes a search starts from (SI).

One table serves the reader of requests, the builder of equations and the writer of answers.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

INFINITY = float("inf")


@dataclass(frozen=True, slots=True)
class Trait:
    """kind: quantity kind; scale: typical magnitude; lower, upper: physical bounds for a search."""

    kind: str
    scale: float
    lower: float = -INFINITY
    upper: float = INFINITY


STATE: Mapping[str, Trait] = {
    "p": Trait("pressure", 1e5, 0.0, 1e9),
    "T": Trait("temperature", 100.0, 0.0, 1e4),
    "h": Trait("specific_energy", 1e5),
    "s": Trait("specific_entropy", 1e3),
    "u": Trait("specific_energy", 1e5),
    "rho": Trait("density", 10.0, 0.0),
    "v": Trait("specific_volume", 0.1, 0.0),
    "x": Trait("dimensionless", 1.0, 0.0, 1.0),
    "superheat": Trait("temperature_difference", 10.0),
    "subcooling": Trait("temperature_difference", 10.0),
    "relative_humidity": Trait("dimensionless", 1.0, 0.0, 1.0),
    "humidity_ratio": Trait("humidity_ratio", 0.01, 0.0, 10.0),
    "wet_bulb": Trait("temperature", 100.0, 0.0, 1e4),
    "dew_point": Trait("temperature", 100.0, 0.0, 1e4),
}

STREAM: Mapping[str, Trait] = {
    "mass_flow": Trait("mass_flow", 1.0),
    "dry_air_flow": Trait("mass_flow", 1.0),
    "molar_flow": Trait("molar_flow", 100.0),
    "volume_flow": Trait("volume_flow", 1.0),
    "normal_volume_flow": Trait("normal_volume_flow", 1.0),
    "velocity": Trait("velocity", 10.0, 0.0),
    "bore": Trait("length", 0.1, 1e-6),
    "elevation": Trait("length", 10.0),
}

TOTAL: Mapping[str, Trait] = {"mass": Trait("mass", 1.0)}
"""Quantities of a stream over a whole period."""

TRANSFER: Mapping[str, Trait] = {
    "rate": Trait("power", 1e5),
    "energy": Trait("energy", 1e5),
    "mass": Trait("mass", 1.0),
    "normal_volume": Trait("normal_volume", 1.0),
    "temperature": Trait("temperature", 100.0, 0.0, 1e4),
    "UA": Trait("conductance", 1e3, 0.0, 1e12),
    "source_temperature": Trait("temperature", 100.0, 0.0, 1e4),
    "mass_flow": Trait("mass_flow", 1.0),
    "normal_volume_flow": Trait("normal_volume_flow", 1.0),
    "heating_value": Trait("specific_energy", 1e7, 0.0),
}

CONTENT: Mapping[str, Trait] = {
    "mass": Trait("mass", 1.0),
    "volume": Trait("volume", 1.0, 0.0),
    "expansion_work": Trait("energy", 1e5),
}
"""Quantities of a content beside its states; mass and volume also at each end (`gas.initial.volume`)."""

PROCESS: Mapping[str, Trait] = {
    "n": Trait("dimensionless", 1.0, -100.0, 100.0),
    "external_pressure": Trait("pressure", 1e5, 0.0, 1e9),
}

WALL: Mapping[str, Trait] = {
    "mass": Trait("mass", 100.0, 1e-6),
    "cp": Trait("specific_entropy", 500.0, 1.0),
    "area": Trait("area", 1.0, 1e-9),
    "h_inside": Trait("heat_transfer_coefficient", 100.0, 0.0),
    "h_outside": Trait("heat_transfer_coefficient", 10.0, 0.0),
    "ambient_temperature": Trait("temperature", 300.0, 0.0, 1e4),
    "temperature": Trait("temperature", 300.0, 0.0, 1e4),
    "minimum_temperature": Trait("temperature", 250.0, 0.0, 1e4),
}
"""Quantities of a content's wall (`tank.wall.mass`): temperature is that at the beginning, minimum_temperature that of
the design."""

RELATION: Mapping[str, Trait] = {
    "isentropic_efficiency": Trait("dimensionless", 1.0, 1e-3, 10.0),
    "polytropic_efficiency": Trait("dimensionless", 1.0, 1e-3, 10.0),
    "lmtd_UA": Trait("conductance", 1e3, 0.0, 1e12),
    "effectiveness": Trait("dimensionless", 1.0, 0.0, 1.0),
    "bore": Trait("length", 0.01, 1e-6, 10.0),
    "area": Trait("area", 1e-4, 1e-12, 100.0),
    "discharge_coefficient": Trait("dimensionless", 1.0, 1e-4, 2.0),
    "downstream_pressure": Trait("pressure", 1e5, 0.0, 1e9),
    "mass_flux": Trait("mass_flux", 1e3, 0.0, 1e7),
}
"""`value` of the relations that have a kind of their own, and the further quantities of a restriction.

The kind of `value` of difference, ratio and sum follows from what they tie (see `value_kind`).
"""


def value_kind(relation: str, of: str) -> str:
    """Kind of a relation's `value`, given the kind of the quantities that it ties."""
    if relation in RELATION:
        return RELATION[relation].kind
    if relation == "ratio":
        return "dimensionless"
    if relation == "difference" and of in ("temperature", "pressure"):
        return f"{of}_difference"
    return of


STREAM_OR_STATE: Mapping[str, Trait] = {**STREAM, **STATE}
