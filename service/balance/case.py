"""What a case says, as plain objects in SI units.

    Case
    ├── Site                       what surrounds the plant
    ├── boundaries                 what is not listed does not cross
    │   └── Content                what a boundary holds (closed and transient systems)
    ├── Stream      ──┐
    ├── Transfer    ──┼── each holds its Quantities by property name
    ├── Relation    ──┘
    ├── Limit                      a bound on a quantity, with its reason
    └── AnswerOptions              how the answer is to be told

One quantity has one address, `item.property`. Direction is said by `source` and `target` (the request's `from` and
`to`); None stands for the surroundings.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Literal

STATE_PROPERTIES = (
    "p", "T", "h", "s", "u", "rho", "v", "x", "superheat", "subcooling",
    "relative_humidity", "humidity_ratio", "wet_bulb", "dew_point",
)  # fmt: skip
"""Properties that belong to a stream's state; every other property of a stream belongs to the stream itself."""

STANDARD_ATMOSPHERE = 101_325.0  # [Pa] ISO 2533:1975
STANDARD_GRAVITY = 9.80665  # [m/s2] CGPM 1901, Resolution 2


@dataclass(frozen=True, slots=True)
class Quantity:
    """One quantity of a case: given, asked for, or both bounded and asked for.

    value [SI] is None unless given; `wanted` marks a "?"; u [SI] is the standard uncertainty of a given value;
    between [SI] bounds and near [SI] steers the search for an unknown; unit is the unit for the answer
    (a symbol of the unit table, None: the presentation's own).
    """

    address: str
    kind: str
    value: float | None = None
    wanted: bool = False
    unit: str | None = None
    u: float | None = None
    between: tuple[float, float] | None = None
    near: float | None = None
    pointer: str = ""


Quantities = Mapping[str, Quantity]


@dataclass(frozen=True, slots=True)
class Fluid:
    """A fluid as named by a case: what the catalogue needs to build its property model (all numbers SI)."""

    key: str
    kind: str
    name: str | None = None
    model: str | None = None
    mole_fractions: Mapping[str, float] | None = None
    mass_fraction: float | None = None
    molar_mass: float | None = None
    cp: float | None = None
    density: float | None = None


@dataclass(frozen=True, slots=True)
class Boundary:
    id: str
    pointer: str = ""


@dataclass(frozen=True, slots=True)
class Stream:
    """A flow of matter from one boundary to another; side labels tell circuits of one fluid apart."""

    id: str
    source: str | None
    target: str | None
    fluid: str | None
    quantities: Quantities
    side_source: str | None = None
    side_target: str | None = None
    pointer: str = ""
    draws: Literal["mixed", "liquid", "vapour"] = "mixed"
    table: Mapping[str, Table] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Table:
    """A quantity over time: times [s] ascending, values [SI]; linear between the points or held as steps."""

    times: tuple[float, ...]
    values: tuple[float, ...]
    between: Literal["linear", "steps"] = "linear"


@dataclass(frozen=True, slots=True)
class Stage:
    """One piece of a process. quantities: what it fixes (`n`, `external_pressure`), and where it ends (`p`, `volume`).

    In a process of one piece the quantities have the addresses `gas.process.n`; with several `gas.stage-1.p`.
    """

    kind: str
    quantities: Quantities = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Content:
    """What a boundary holds of one fluid or solid.

    quantities by name: mass, volume, initial.p, initial.T, initial.volume, initial.mass, initial.velocity,
    initial.elevation, final.p ..., wall.mass, wall.cp, wall.area, wall.h_inside, wall.h_outside,
    wall.ambient_temperature, wall.temperature (initial), wall.minimum_temperature (design).
    """

    id: str
    boundary: str
    fluid: str
    quantities: Quantities
    process: tuple[Stage, ...] = ()
    pointer: str = ""


@dataclass(frozen=True, slots=True)
class Ending:
    """When a rate-form transient ends: at a time [s], or when a quantity reaches a value [SI], whichever is first."""

    time: Quantity | None = None
    conditions: tuple[tuple[str, Quantity], ...] = ()


@dataclass(frozen=True, slots=True)
class Target:
    """A value [SI] that a quantity shall have at the end, or at a time [s]; closes one unknown constant."""

    of: str
    value: Quantity
    at: float | None = None
    pointer: str = ""


@dataclass(frozen=True, slots=True)
class History:
    """The columns to report over time, and at how many points."""

    columns: tuple[str, ...] = ()
    points: int = 101


@dataclass(frozen=True, slots=True)
class Transfer:
    """Heat, work or fuel across a boundary, counted positive from `source` to `target`."""

    id: str
    kind: Literal["heat", "shaft_work", "electrical_work", "expansion_work", "fuel"]
    source: str | None
    target: str | None
    quantities: Quantities
    has_law: bool = False
    law_stream: str | None = None
    basis: Literal["net", "gross"] | None = None
    pointer: str = ""
    table: Mapping[str, Table] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Relation:
    """One extra equation. `addresses` are quantities it ties; `streams` are the streams it speaks of, by role."""

    id: str
    kind: str
    quantities: Quantities
    addresses: tuple[str, ...] = ()
    streams: Mapping[str, str] = field(default_factory=dict)
    arrangement: str | None = None
    pointer: str = ""


@dataclass(frozen=True, slots=True)
class Limit:
    of: str
    minimum: Quantity | None
    maximum: Quantity | None
    why: str = ""
    pointer: str = ""


@dataclass(frozen=True, slots=True)
class Site:
    """Surroundings; *_given tells whether the case said it (otherwise it becomes an assumption)."""

    atmospheric_pressure: float = STANDARD_ATMOSPHERE
    ambient_temperature: float | None = None
    pressure_given: bool = False


@dataclass(frozen=True, slots=True)
class AnswerOptions:
    units: Literal["metric", "SI", "US"] = "metric"
    detail: Literal["full", "brief"] = "full"
    work_positive: Literal["into_system", "out_of_system"] = "into_system"
    agreement: float = 1e-6
    coverage: float = 0.95


@dataclass(frozen=True, slots=True)
class Case:
    title: str
    system: Literal["steady_flow", "closed", "transient"]
    site: Site
    fluids: Mapping[str, Fluid]
    boundaries: tuple[Boundary, ...]
    streams: tuple[Stream, ...]
    transfers: tuple[Transfer, ...]
    relations: tuple[Relation, ...]
    limits: tuple[Limit, ...]
    answer: AnswerOptions
    contents: tuple[Content, ...] = ()
    form: Literal["rate", "integrated"] = "rate"
    until: Ending = field(default_factory=Ending)
    targets: tuple[Target, ...] = ()
    history: History = field(default_factory=History)

    def quantities(self) -> Iterator[Quantity]:
        """Every quantity that the case mentions, in the order of the request."""
        for quantities in self._holders():
            yield from quantities.values()

    def _holders(self) -> Iterator[Quantities]:
        yield from (stream.quantities for stream in self.streams)
        yield from (transfer.quantities for transfer in self.transfers)
        yield from (relation.quantities for relation in self.relations)
        for content in self.contents:
            yield content.quantities
            yield from (stage.quantities for stage in content.process)
