"""What every property model offers, whatever computes it: one small protocol over states in SI units."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Protocol

import numpy as np
import numpy.typing as npt

from service.errors import CaseError

Column = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class FluidSpec:
    """A fluid as a case declares it; all numbers SI. label: the name by which messages speak of it."""

    kind: str
    name: str | None = None
    model: str | None = None
    mole_fractions: Mapping[str, float] | None = None
    mass_fraction: float | None = None
    molar_mass: float | None = None
    cp: float | None = None
    density: float | None = None
    label: str = ""


@dataclass(slots=True)
class State:
    """values: property → value [SI], NaN where a property has no meaning; phase in our own words."""

    values: dict[str, float]
    phase: str


@dataclass(frozen=True, slots=True)
class Limits:
    """Range of validity [K, Pa]; triple and critical point where they exist."""

    T_min: float
    T_max: float
    p_max: float
    p_min: float = 0.0
    T_triple: float | None = None
    p_triple: float | None = None
    T_critical: float | None = None
    p_critical: float | None = None


@dataclass(frozen=True, slots=True)
class Provenance:
    """model: what computes; citation: its source; reference_state: where h and s are zero."""

    model: str
    citation: str
    reference_state: str
    notes: tuple[str, ...] = field(default_factory=tuple)


class Fluid(Protocol):
    """A property model. `inputs` and `state` speak of properties by their names: p T h s u rho v x ..."""

    @property
    def name(self) -> str:
        """What answers call it; two models of one substance have the same name."""

    @property
    def kind(self) -> str:
        """Kind of FluidSpec that it came from."""

    @property
    def molar_mass(self) -> float | None:
        """[kg/mol]"""

    @property
    def dof(self) -> int:
        """How many independent properties fix a state: 2, humid air 3."""

    @property
    def properties(self) -> tuple[str, ...]:
        """Names of the properties that its states can have."""

    @property
    def limits(self) -> Limits:
        """Range of validity."""

    @property
    def provenance(self) -> Provenance:
        """What computes, its source, and where h and s are zero."""

    @property
    def pressure_optional(self) -> bool:
        """Whether p may be taken as atmospheric where nobody mentions it."""

    def inputs(self, known: Collection[str]) -> tuple[str, ...] | None:
        """Which of the known properties to start from; None where they do not fix a state."""

    def state(self, inputs: tuple[str, ...], values: tuple[float, ...], extras: Sequence[str] = ()) -> State:
        """The whole state. Raises StateOutOfRange or StateAmbiguous."""

    def columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[dict[str, Column], dict[int, CaseError]]:
        """The wanted properties as columns (NaN in bad rows), and the reason of each bad row."""

    def partials(self, state: State, inputs: tuple[str, ...], of: tuple[str, ...]) -> dict[str, tuple[float, ...]]:
        """d(of)/d(each input), the other inputs constant."""

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """Saturation temperature at p, or pressure at T; None where not defined."""

    def bounds(self, name: str) -> tuple[float, float]:
        """Physical bounds of a property for a search."""
