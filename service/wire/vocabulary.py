"""The words of the case language: every property with its quantity kind, every item with its members.

One table, read by the parser, by the checks of references, by the presentation and by the tests that hold
the JSON Schemas to it. Data, not code.
"""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from service.balance import properties


def _table(**kinds: str) -> Mapping[str, str]:
    return MappingProxyType(kinds)


STATE: Mapping[str, str] = MappingProxyType({name: trait.kind for name, trait in properties.STATE.items()})
"""State property → quantity kind. `saturated` is a word beside these and stands for x = 0 or 1."""

STREAM: Mapping[str, str] = MappingProxyType(
    {name: trait.kind for name, trait in {**properties.STREAM, **properties.TOTAL}.items()}
)
"""Property of a stream itself → quantity kind."""

SIZE = _table(mass="mass", volume="volume", velocity="velocity", elevation="length")
"""Property of a content at one end of the period, beside its state."""

CONTENT: Mapping[str, str] = MappingProxyType({name: trait.kind for name, trait in properties.CONTENT.items()})
PROCESS: Mapping[str, str] = MappingProxyType({name: trait.kind for name, trait in properties.PROCESS.items()})
"""Quantities of a content as a whole, and of its process (or of a stage of it)."""

ENDS = ("initial", "final")

WALL: Mapping[str, str] = MappingProxyType({name: trait.kind for name, trait in properties.WALL.items()})
"""Quantities of a content's wall."""

ALONG = MappingProxyType({**STATE, "mass": "mass", "volume": "volume"})
"""Properties of a content that change over time in the rate form: `tank.p`; with a wall also `tank.wall.T`."""

FLOWS = ("mass_flow", "molar_flow", "volume_flow", "normal_volume_flow")
"""Properties of a stream that may be tables over time."""

TABLED = MappingProxyType({"rate": "power", "mass_flow": "mass_flow", "normal_volume_flow": "normal_volume_flow"})
"""Properties of a transfer that may be tables over time."""

DRAWS = ("mixed", "liquid", "vapour")
BETWEEN = ("linear", "steps")
FORMS = ("rate", "integrated")
PROCESSES = (
    "constant_volume",
    "constant_pressure",
    "isothermal",
    "polytropic",
    "adiabatic_reversible",
    "constant_external_pressure",
    "linear",
)

STREAM_ALL: Mapping[str, str] = MappingProxyType({**STREAM, **STATE})

DERIVED_STATE = _table(
    cp="specific_entropy",
    cv="specific_entropy",
    kappa="dimensionless",
    speed_of_sound="velocity",
    viscosity="viscosity",
    conductivity="thermal_conductivity",
    molar_mass="molar_mass",
    mole_fraction_water="dimensionless",
)
"""Properties that are told of a state but cannot be given."""

SATURATED = MappingProxyType({"liquid": 0.0, "vapour": 1.0})

HEAT_LAW = _table(UA="conductance", source_temperature="temperature")
TRANSFER: Mapping[str, Mapping[str, str]] = MappingProxyType(
    {
        "heat": _table(rate="power", energy="energy", temperature="temperature"),
        "shaft_work": _table(rate="power", energy="energy"),
        "electrical_work": _table(rate="power", energy="energy"),
        "expansion_work": _table(rate="power", energy="energy"),
        "fuel": _table(
            rate="power",
            energy="energy",
            mass="mass",
            normal_volume="normal_volume",
            mass_flow="mass_flow",
            normal_volume_flow="normal_volume_flow",
            heating_value="specific_energy",
        ),
    }
)
"""Transfer kind → property → quantity kind. A heating value beside a normal volume flow is a volumetric one."""

FUEL_BASES = ("net", "gross")

FOLLOWS_ADDRESSES = "follows from the addresses"
"""Stands for the kind of a value that depends on what the relation ties together."""

RELATION: Mapping[str, Mapping[str, str]] = MappingProxyType(
    {
        "equal": _table(),
        "difference": _table(value=FOLLOWS_ADDRESSES),
        "ratio": _table(value="dimensionless"),
        "sum": _table(value=FOLLOWS_ADDRESSES),
        "isentropic_efficiency": _table(value="dimensionless"),
        "polytropic_efficiency": _table(value="dimensionless"),
        "lmtd_UA": _table(value="conductance"),
        "effectiveness": _table(value="dimensionless"),
        "restriction": _table(
            bore="length",
            area="area",
            discharge_coefficient="dimensionless",
            downstream_pressure="pressure",
            mass_flux="mass_flux",
        ),
    }
)
"""Relation kind → property → quantity kind."""

RELATION_STREAMS: Mapping[str, tuple[str, ...]] = MappingProxyType(
    {
        "isentropic_efficiency": ("from", "to"),
        "polytropic_efficiency": ("from", "to"),
        "lmtd_UA": ("hot_in", "hot_out", "cold_in", "cold_out"),
        "effectiveness": ("hot_in", "hot_out", "cold_in", "cold_out"),
        "restriction": ("stream",),
    }
)
"""Relation kind → the streams it speaks of, by role; the kinds that are missing here tie addresses (`of`)."""

OPENINGS = frozenset({"bore", "area"})
"""Sizes that are above zero, although other lengths may be below."""

ARRANGEMENTS = ("counterflow", "parallel_flow", "shell_and_tube")

DIFFERENCE_OF = MappingProxyType({"temperature": "temperature_difference", "pressure": "pressure_difference"})
"""Kinds whose difference is another kind; every other difference keeps its kind."""

FLUID: Mapping[str, Mapping[str, str]] = MappingProxyType(
    {
        "pure": _table(),
        "brine": _table(mass_fraction="dimensionless"),
        "gas_mixture": _table(),
        "ideal_gas": _table(molar_mass="molar_mass", cp="specific_entropy"),
        "constant_liquid": _table(density="density", cp="specific_entropy"),
        "solid": _table(density="density", cp="specific_entropy"),
        "humid_air": _table(),
    }
)
"""Declared fluid kind → quantity → kind."""

PURE_MODELS = ("helmholtz", "IF97")
MIXTURE_MODELS = ("ideal_gas", "real_gas")

SITE = _table(atmospheric_pressure="pressure", ambient_temperature="temperature")

SYSTEMS = ("steady_flow", "closed", "transient")

OVER_TIME = frozenset({"rate", "mass_flow", "dry_air_flow", "molar_flow", "volume_flow", "normal_volume_flow", "law"})
"""Members that are a rate or need one: they belong to steady flow."""

IN_TOTAL = MappingProxyType({"energy": "rate", "mass": "mass_flow", "normal_volume": "normal_volume_flow"})
"""Members that are a total over a period, with what stands for them in steady flow."""
UNIT_SYSTEMS = ("metric", "SI", "US")
DETAILS = ("full", "brief")
WORK_POSITIVE = ("into_system", "out_of_system")

KIND_OF_MEMBER: Mapping[str, str] = MappingProxyType(
    {name: kind
     for table in (WALL, CONTENT, PROCESS, *FLUID.values(), *RELATION.values(), *TRANSFER.values(), HEAT_LAW, SITE,
                   STREAM_ALL, {"time": "time"})
     for name, kind in table.items()}
)  # fmt: skip
"""Member → quantity kind, for examples in hints; a name that has several kinds has the usual one."""

EXAMPLES: Mapping[str, str] = {
    "pressure": '"40 barg"',
    "pressure_difference": '"0.2 bar"',
    "temperature": '"400 degC"',
    "temperature_difference": '"5 K"',
    "mass_flow": '"12 t/h"',
    "molar_flow": '"3 kmol/h"',
    "volume_flow": '"250 m3/h"',
    "normal_volume_flow": '"1200 Nm3/h"',
    "power": '"15 kW"',
    "specific_energy": '"2800 kJ/kg"',
    "specific_entropy": '"6.5 kJ/kg/K"',
    "velocity": '"25 m/s"',
    "length": '"50 mm"',
    "area": '"20 cm2"',
    "conductance": '"12 kW/K"',
    "density": '"870 kg/m3"',
    "specific_volume": '"0.2 m3/kg"',
    "molar_mass": '"28.97 g/mol"',
    "volumetric_heating_value": '"36 MJ/Nm3"',
    "dimensionless": '0.85 or "85 %"',
    "humidity_ratio": '"8 g/kg"',
    "mass": '"250 kg"',
    "volume": '"1.2 m3"',
    "normal_volume": '"30 Nm3"',
    "energy": '"250 MJ"',
    "time": '"30 min"',
    "heat_transfer_coefficient": '"50 W/m2/K"',
}
"""One well-formed quantity of each kind, for hints."""

SYNONYMS = MappingProxyType(
    {
        "temperature": "T",
        "temp": "T",
        "t": "T",
        "pressure": "p",
        "P": "p",
        "press": "p",
        "enthalpy": "h",
        "H": "h",
        "entropy": "s",
        "S": "s",
        "internal_energy": "u",
        "U": "u",
        "density": "rho",
        "specific_volume": "v",
        "V": "v",
        "quality": "x",
        "dryness": "x",
        "vapour_fraction": "x",
        "Q": "x",
        "RH": "relative_humidity",
        "rh": "relative_humidity",
        "phi": "relative_humidity",
        "omega": "humidity_ratio",
        "twb": "wet_bulb",
        "tdp": "dew_point",
        "flow": "mass_flow",
        "massflow": "mass_flow",
        "m": "mass_flow",
        "mdot": "mass_flow",
        "diameter": "bore",
        "height": "elevation",
        "z": "elevation",
        "w": "velocity",
        "speed": "velocity",
        "source": "from",
        "target": "to",
        "inlet": "from",
        "outlet": "to",
        "name": "id",
        "type": "kind",
        "duty": "rate",
        "power": "rate",
        "heat": "rate",
        "lhv": "heating_value",
        "LHV": "heating_value",
        "HHV": "heating_value",
        "efficiency": "value",
        "eta": "value",
        "addresses": "of",
        "minimum": "min",
        "maximum": "max",
        "reason": "why",
        "options": "answer",
        "heat_transfers": "transfers",
        "equations": "relations",
        "components": "boundaries",
        "control_volumes": "boundaries",
    }
)
"""What people write for a member's name → the name, offered where it fits."""
