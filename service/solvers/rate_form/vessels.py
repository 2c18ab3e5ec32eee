"""What a boundary holds in the rate form: its state from mass and energy, and the wall around it."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from service.balance.case import STANDARD_GRAVITY, Content
from service.fluids.protocol import Fluid, State
from service.fluids.warm_flash import DensityEnergyFlash

LEAST, FIRST = 1e-6, 1e-4
"""Shares of a vessel's mass [-]: it is empty below the one; having begun empty, it feels heat fully above the other."""


@dataclass(slots=True)
class Wall:
    """A wall of one temperature, heated by the content and by what is around it.

    mass [kg], cp [J/(kg K)], area [m2], h_inside and h_outside [W/(m2 K)], ambient and start temperature [K].
    """

    mass: float
    cp: float
    area: float
    h_inside: float
    h_outside: float
    ambient: float
    start: float

    @property
    def capacity(self) -> float:
        """[J/K]"""
        return self.mass * self.cp


@dataclass(slots=True)
class Held:
    """A vessel at a moment: mass [kg], the state of its content, and the wall's temperature [K]."""

    mass: float
    state: State
    wall: float = math.nan

    def value(self, name: str) -> float:
        return self.wall if name == "wall.T" else self.mass if name == "mass" else self.state.values.get(name, math.nan)


@dataclass(slots=True)
class Vessel:
    """One content. volume [m3] is None for an open tank, whose content stays at `pressure` [Pa].

    energy is internal energy in a rigid vessel, enthalpy in an open tank: d(U + p V)/dt has no expansion work in it.
    """

    content: Content
    fluid: Fluid
    volume: float | None
    pressure: float
    mass: float
    energy: float
    capacity: float = math.inf
    elevation: float | None = None
    wall: Wall | None = None
    mass_scale: float = 1.0
    filling_enthalpy: float = math.nan
    flash: DensityEnergyFlash = field(init=False)

    def __post_init__(self) -> None:
        self.flash = DensityEnergyFlash(self.fluid)

    @property
    def id(self) -> str:
        return self.content.id

    @property
    def boundary(self) -> str:
        return self.content.boundary

    @property
    def gz(self) -> float:
        """Potential energy of the content [J/kg]."""
        return STANDARD_GRAVITY * (self.elevation or 0.0)

    def state(self, mass: float, energy: float) -> State:
        """The state [SI] that a mass [kg] with an energy [J] is in. Raises StateOutOfRange."""
        if self.volume is None:
            return self.fluid.state(("p", "h"), (self.pressure, energy / mass))
        floor = LEAST * self.mass_scale
        if self.mass == 0.0 and mass < floor:  # just beginning to fill: all that came in has the energy it came with
            return self.flash.state(
                floor / self.volume, energy / mass if mass > 1e-3 * floor else self.filling_enthalpy
            )
        return self.flash.state(mass / self.volume, energy / mass)

    def touched(self, mass: float) -> float:
        """Share of a heat transfer that acts while a vessel that begins empty has nothing yet to be heated."""
        if self.mass > 0.0:
            return 1.0
        return min(max(mass / (FIRST * self.mass_scale), 0.0), 1.0)
