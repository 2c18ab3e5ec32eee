"""The throat followed from call to call gives what the search from scratch gives."""

from __future__ import annotations

import math

import pytest

from service.balance.case import Fluid
from service.balance.restriction import mass_flux
from service.fluids.catalogue import FluidCatalogue
from service.fluids.protocol import FluidSpec
from service.fluids.warm_flash import DensityEnergyFlash
from service.solvers.rate_form.throat import REST, Throat
from tests.unit.transient_cases import R_MOLAR

CATALOGUE = FluidCatalogue()
SEARCH = 2e-7
"""Relative: the search leaves 1e-7 of p1 in the throat pressure, which at a kink is as much in the flux."""

PATHS = {
    "steam": ("water", [(p, 600.0) for p in (30e5, 29e5, 20e5, 8e5, 3e5)]),
    "nitrogen, from supercritical": ("nitrogen", [(p, T) for p, T in ((200e5, 300.0), (80e5, 220.0), (30e5, 160.0))]),
    "air": ("air", [(p, 300.0) for p in (10e5, 5e5, 2e5, 1.2e5)]),
    "subcooled propane": ("propane", [(p, 290.0) for p in (20e5, 15e5, 12e5)]),
}


@pytest.mark.parametrize("name", PATHS)
def test_the_followed_throat_agrees_with_the_search(name):
    fluid_name, path = PATHS[name]
    fluid = CATALOGUE.resolve(fluid_name)
    throat = Throat(fluid)
    for p, T in path:
        state = fluid.state(("p", "T"), (p, T))
        v = state.values
        expected = mass_flux(fluid, p, T, v["h"], v["s"], v["rho"], 1e5)
        assert throat.flux(state, 1e5) == pytest.approx(expected.value, rel=SEARCH)
        assert throat.choked == expected.choked


@pytest.mark.parametrize("x", [0.05, 0.5, 1.0])
def test_wet_states_agree_with_the_search(x):
    fluid = CATALOGUE.resolve("water")
    throat = Throat(fluid)
    for p in (20e5, 15e5, 10e5):
        state = fluid.state(("p", "x"), (p, x))
        v = state.values
        expected = mass_flux(fluid, p, v["T"], v["h"], v["s"], v["rho"], 1e5)
        assert throat.flux(state, 1e5) == pytest.approx(expected.value, rel=SEARCH)


def test_an_ideal_gas_has_its_closed_form():
    fluid = CATALOGUE.resolve(FluidSpec("ideal_gas", molar_mass=R_MOLAR / 287.0, cp=1004.5))
    state = fluid.state(("p", "T"), (5e5, 350.0))
    v = state.values
    for p2 in (1e5, 4e5):
        expected = mass_flux(fluid, 5e5, 350.0, v["h"], v["s"], v["rho"], p2)
        assert Throat(fluid).flux(state, p2) == pytest.approx(expected.value, rel=1e-12)


@pytest.mark.parametrize("name", ["water", "nitrogen", "propane"])
def test_the_flux_falls_smoothly_to_nothing_at_level_pressures(name):
    fluid = CATALOGUE.resolve(name)
    state = fluid.state(("p", "T"), (5e5, 500.0))
    throat = Throat(fluid)
    assert throat.flux(state, 5e5) == 0.0
    assert throat.flux(state, 6e5) == 0.0
    just_above, just_below = (throat.flux(state, 5e5 * (1.0 - REST * f)) for f in (1.0 + 1e-6, 1.0 - 1e-6))
    assert just_above == pytest.approx(just_below, rel=1e-5)
    # above it is the incompressible flux, √(2 ρ Δp), but for the density
    assert just_above == pytest.approx(math.sqrt(2.0 * state.values["rho"] * 5e5 * REST), rel=1e-3)


@pytest.mark.parametrize("spec", [Fluid("air", "pure", "air"), Fluid("water", "pure", "water", "IF97")])
def test_a_flash_followed_from_the_last_pressure_finds_the_state(spec):
    fluid = CATALOGUE.resolve(FluidSpec("pure", spec.name, spec.model))
    flash = DensityEnergyFlash(fluid)
    flash.start(10e5)
    for p, T in ((9.5e5, 500.0), (9e5, 490.0), (7e5, 480.0), (2e5, 450.0)):
        v = fluid.state(("p", "T"), (p, T)).values
        found = flash.state(v["rho"], v["u"]).values
        assert found["p"] == pytest.approx(p, rel=1e-7)  # IF97's backward equations agree with its forward ones so far
        assert found["T"] == pytest.approx(T, rel=1e-7)
