"""The answers of the ready cases between two states, worked out by hand: the property library called directly.

Each function repeats the numbers of its case, so that a slip in either shows. Everything is in SI units.
"""

from __future__ import annotations

import math
from collections.abc import Callable

from CoolProp.CoolProp import PropsSI
from scipy.integrate import quad
from scipy.optimize import brentq

C = 273.15
ATM = 1.002e5  # [Pa] of the works
Answers = dict[str, float]


def prop(name: str, one: str, a: float, two: str, b: float, fluid: str) -> float:
    return float(PropsSI(name, one, a, two, b, fluid))


def blocked_in_line() -> Answers:
    p1 = 6e5 + ATM
    rho = prop("D", "P", p1, "T", 18 + C, "Water")
    p2 = prop("P", "D", rho, "T", 24 + C, "Water")
    u1, u2 = prop("U", "P", p1, "T", 18 + C, "Water"), prop("U", "D", rho, "T", 24 + C, "Water")
    return {"water.final.p": p2, "rise.value": p2 - p1, "sun.energy": 0.35 * rho * (u2 - u1)}


def sealed_steam_vessel() -> Answers:
    rho = prop("D", "P", 1.013e5, "Q", 1, "Water")
    u1, u2 = prop("U", "P", 1.013e5, "Q", 1, "Water"), prop("U", "T", 30 + C, "D", rho, "Water")
    return {
        "steam.final.p": prop("P", "T", 30 + C, "Q", 0, "Water"),
        "steam.final.x": prop("Q", "T", 30 + C, "D", rho, "Water"),
        "cooling.energy": 8 * rho * (u1 - u2),
    }


def cylinder_in_the_sun() -> Answers:
    rho = prop("D", "P", 200e5, "T", 15 + C, "Nitrogen")
    u1, u2 = (prop("U", "D", rho, "T", t + C, "Nitrogen") for t in (15, 65))
    mass = 0.05 * rho
    return {
        "gas.mass": mass,
        "gas.final.p": prop("P", "D", rho, "T", 65 + C, "Nitrogen"),
        "sun.energy": mass * (u2 - u1),
    }


def batch_heat_up() -> Answers:
    rise = prop("H", "P", ATM, "T", 85 + C, "Water") - prop("H", "P", ATM, "T", 16 + C, "Water")
    return {"heating.energy": 3200 * rise + 1450 * 490 * 69 + 45e6}


def quench() -> Answers:
    mass = 2.4 * prop("D", "P", ATM, "T", 24 + C, "Water")
    h1 = prop("H", "P", ATM, "T", 24 + C, "Water")

    def off(T: float) -> float:
        return mass * (prop("H", "P", ATM, "T", T, "Water") - h1) - 180 * 540 * (620 + C - T)

    T = float(brentq(off, 24 + C, 90 + C, xtol=1e-10))
    return {"casting.final.T": T, "bath.final.T": T}


def two_tanks() -> Answers:
    at = [(9e5, 35 + C, 1.2), (2e5, 15 + C, 3.0)]
    masses = [V * prop("D", "P", p, "T", T, "Nitrogen") for p, T, V in at]
    before = sum(m * prop("U", "P", p, "T", T, "Nitrogen") for m, (p, T, _) in zip(masses, at, strict=True))
    rho, T2 = sum(masses) / 4.2, 22 + C
    after = sum(masses) * prop("U", "D", rho, "T", T2, "Nitrogen")
    return {"gas-a.final.p": prop("P", "D", rho, "T", T2, "Nitrogen"), "room.energy": before - after}


def compression_isothermal() -> Answers:
    """The work by quadrature of −p dv over the equation of state, another path than the service's closed form."""
    T = 40 + C
    v1, v2 = (1 / prop("D", "P", p, "T", T, "CO2") for p in (2e5, 30e5))
    work = -0.4 * quad(lambda v: prop("P", "D", 1 / v, "T", T, "CO2"), v1, v2, epsrel=1e-10)[0]
    u1, u2 = (prop("U", "P", p, "T", T, "CO2") for p in (2e5, 30e5))
    return {"gas.expansion_work": work, "gas.final.volume": 0.4 * v2, "cooling.energy": work - 0.4 * (u2 - u1)}


def compression_exponent() -> Answers:
    n = math.log(4.35) / math.log(3.10 / 1.04)
    work = (4.35e5 * 1.04e-3 - 1e5 * 3.10e-3) / (n - 1)
    rho1 = prop("D", "P", 1e5, "T", 32 + C, "Air")
    mass = rho1 * 3.10e-3
    T2 = prop("T", "P", 4.35e5, "D", mass / 1.04e-3, "Air")
    rise = mass * (prop("U", "P", 4.35e5, "T", T2, "Air") - prop("U", "P", 1e5, "T", 32 + C, "Air"))
    return {"air.process.n": n, "air.expansion_work": work, "air.final.T": T2, "jacket.energy": work - rise}


def gas_spring() -> Answers:
    s = prop("S", "P", 90e5, "T", 25 + C, "Nitrogen")
    u1, u2 = prop("U", "P", 90e5, "T", 25 + C, "Nitrogen"), prop("U", "P", 240e5, "S", s, "Nitrogen")
    return {
        "gas.expansion_work": 0.6 * (u2 - u1),
        "gas.final.T": prop("T", "P", 240e5, "S", s, "Nitrogen"),
        "gas.final.volume": 0.6 / prop("D", "P", 240e5, "S", s, "Nitrogen"),
    }


def piston_lifts() -> Answers:
    mass = 0.12 * prop("D", "P", 2e5, "Q", 0.45, "Water")
    work = -6e5 * (0.17 - 0.12)
    u1, u2 = prop("U", "P", 2e5, "Q", 0.45, "Water"), prop("U", "P", 6e5, "D", mass / 0.17, "Water")
    T2 = prop("T", "P", 6e5, "D", mass / 0.17, "Water")
    return {
        "steam.mass": mass,
        "steam.expansion_work": work,
        "steam.final.T": T2,
        "burner.energy": mass * (u2 - u1) - work,
    }


def ammonia_vessel_near_full() -> Answers:
    rho = 880 / 1.5
    T2 = float(brentq(lambda T: prop("D", "T", T, "Q", 0, "Ammonia") - rho, 10 + C, 80 + C, xtol=1e-10))
    u1, u2 = prop("U", "T", 10 + C, "D", rho, "Ammonia"), prop("U", "T", T2, "Q", 0, "Ammonia")
    return {
        "ammonia.initial.x": prop("Q", "T", 10 + C, "D", rho, "Ammonia"),
        "ammonia.final.T": T2,
        "ammonia.final.p": prop("P", "T", T2, "Q", 0, "Ammonia"),
        "warming.energy": 880 * (u2 - u1),
    }


def rigid_tank_to_dryness() -> Answers:
    rho = prop("D", "P", 3e5, "Q", 0.4, "Water")
    T2 = float(brentq(lambda T: prop("D", "T", T, "Q", 1, "Water") - rho, 134 + C, 300 + C, xtol=1e-10))
    u1, u2 = prop("U", "P", 3e5, "Q", 0.4, "Water"), prop("U", "T", T2, "Q", 1, "Water")
    return {
        "steam.mass": 2.5 * rho,
        "steam.final.T": T2,
        "steam.final.p": prop("P", "T", T2, "Q", 1, "Water"),
        "tracing.energy": 2.5 * rho * (u2 - u1),
    }


def receiver_charging() -> Answers:
    m1 = 2.2 * prop("D", "P", 1.2e5, "T", 18 + C, "Air")
    u1, h = prop("U", "P", 1.2e5, "T", 18 + C, "Air"), prop("H", "P", 9e5, "T", 25 + C, "Air")

    def off(T: float) -> float:
        m2 = 2.2 * prop("D", "P", 9e5, "T", T, "Air")
        return m1 * u1 + (m2 - m1) * h - m2 * prop("U", "P", 9e5, "T", T, "Air")

    T2 = float(brentq(off, 300, 500, xtol=1e-10))
    m2 = 2.2 * prop("D", "P", 9e5, "T", T2, "Air")
    return {"air.final.T": T2, "air.final.mass": m2, "header.mass": m2 - m1}


def evacuated_vessel() -> Answers:
    h = prop("H", "P", 6e5, "T", 190 + C, "Water")
    T2 = float(brentq(lambda T: prop("U", "P", 6e5, "T", T, "Water") - h, 200 + C, 500 + C, xtol=1e-10))
    mass = 1.8 * prop("D", "P", 6e5, "T", T2, "Water")
    return {"steam.final.T": T2, "steam.final.mass": mass, "main.mass": mass}


def drawing_off_vapour() -> Answers:
    h = prop("H", "P", 4e5, "Q", 1, "Propane")
    u1, u2 = (prop("U", "P", 4e5, "D", m / 3.5, "Propane") for m in (1400, 280))
    x1, x2 = (prop("Q", "P", 4e5, "D", m / 3.5, "Propane") for m in (1400, 280))
    heat = 280 * u2 - 1400 * u1 + 1120 * h
    return {"vapour.mass": 1120.0, "propane.initial.x": x1, "propane.final.x": x2, "heater.energy": heat}


BY_HAND: dict[str, Callable[[], Answers]] = {
    f.__name__.replace("_", "-"): f
    for f in (
        blocked_in_line, sealed_steam_vessel, cylinder_in_the_sun, batch_heat_up, quench, two_tanks,
        compression_isothermal, compression_exponent, gas_spring, piston_lifts, ammonia_vessel_near_full,
        rigid_tank_to_dryness, receiver_charging, evacuated_vessel, drawing_off_vapour,
    )
}  # fmt: skip
