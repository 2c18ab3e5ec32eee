"""The property models that every test of this suite runs through, and states of them to start from."""

from __future__ import annotations

from functools import cache

from service.fluids.catalogue import FluidCatalogue
from service.fluids.protocol import Fluid, FluidSpec

SPECS: dict[str, FluidSpec] = {
    "water": FluidSpec("pure", name="water"),
    "IF97": FluidSpec("pure", name="water", model="IF97"),
    "nitrogen": FluidSpec("pure", name="nitrogen"),
    "R134a": FluidSpec("pure", name="R134a"),
    "ammonia": FluidSpec("pure", name="ammonia"),
    "carbon dioxide": FluidSpec("pure", name="CO2"),
    "propane": FluidSpec("pure", name="propane"),
    "R410A": FluidSpec("pure", name="R410A"),
    "ideal gas": FluidSpec("ideal_gas", molar_mass=0.02896, cp=1005.0, label="test gas"),
    "constant liquid": FluidSpec("constant_liquid", density=870.0, cp=2100.0, label="hot oil"),
    "solid": FluidSpec("solid", density=7850.0, cp=490.0, label="steel"),
}
EVAPORATING = ("water", "IF97", "nitrogen", "R134a", "ammonia", "carbon dioxide", "propane", "R410A")
SIMPLE = ("ideal gas", "constant liquid", "solid")

# (p [Pa], T [K]) of one state in each phase; these fix where the round trips start, no number is expected of them
SINGLE_PHASE: dict[str, tuple[tuple[float, float], ...]] = {
    "water": ((1e5, 300.0), (41e5, 673.15), (100.0, 350.0), (3e7, 700.0), (5e7, 500.0)),
    "IF97": ((1e5, 300.0), (41e5, 673.15), (1e3, 350.0), (3e7, 700.0), (5e7, 500.0), (1e6, 1500.0)),
    "nitrogen": ((1e5, 300.0), (2e7, 250.0), (1e6, 90.0), (1e4, 100.0)),
    "R134a": ((1e6, 290.0), (2e5, 290.0), (5e6, 400.0)),
    "ammonia": ((1e6, 260.0), (2e5, 300.0), (2e7, 450.0)),
    "carbon dioxide": ((1e5, 300.0), (6e6, 280.0), (1.2e7, 330.0)),
    "propane": ((1e6, 280.0), (2e5, 300.0), (6e6, 420.0)),
    "R410A": ((2e6, 280.0), (5e5, 290.0)),
    "ideal gas": ((1e5, 300.0), (3e6, 900.0)),
    "constant liquid": ((1e5, 300.0), (3e6, 500.0)),
    "solid": ((1e5, 300.0), (3e6, 500.0)),
}
WET: dict[str, tuple[tuple[float, float], ...]] = {  # (p [Pa], x)
    "water": ((1e5, 0.3), (2e6, 0.95), (1e7, 0.0), (5e3, 1.0)),
    "IF97": ((1e5, 0.3), (2e6, 0.95), (1e7, 0.0), (5e3, 1.0)),
    "nitrogen": ((1e6, 0.5),),
    "R134a": ((3e5, 0.2), (1e6, 1.0)),
    "ammonia": ((3e5, 0.7), (1e6, 0.0)),
    "carbon dioxide": ((2e6, 0.4),),
    "propane": ((5e5, 0.6),),
    "R410A": ((8e5, 0.4), (1e6, 1.0)),
}


@cache
def model(name: str) -> Fluid:
    """A model by its name in this suite."""
    return CATALOGUE.resolve(SPECS[name])


CATALOGUE = FluidCatalogue()
