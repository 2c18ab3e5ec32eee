"""Flow through an orifice, a valve seat or a leak, from the stagnation state upstream to a pressure downstream.

    liquid      G = √(2 ρ1 (p1 − p2))                                        incompressible (Bernoulli)
    ideal gas   G = p1 √(2 k/((k−1) R T1) (r^(2/k) − r^((k+1)/k))),  r = max(p2/p1, (2/(k+1))^(k/(k−1)))
    otherwise   G = max over p in [p2, p1] of ρ(p, s1) √(2 (h1 − h(p, s1)))    isentropic, homogeneous equilibrium

ṁ = Cd A G, with the ideal mass flux G. Its maximum over the throat pressure is the choked flux where it lies above p2.
Sources: the ideal-gas form as in ISO 9300:2005 and any text on gas dynamics (value from memory); the isentropic search
as in API Standard 520 part I, annex B (value from memory). The velocity of approach is neglected.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from scipy.optimize import minimize_scalar

from service.balance.case import Relation
from service.balance.properties import RELATION
from service.engine.model import Function, Term, Value, Values
from service.errors import CaseError, NoSolution
from service.fluids.protocol import Fluid

if TYPE_CHECKING:
    from service.balance.builder import Builder

GAS_CONSTANT = 8.314462618  # [J/(mol K)] CODATA 2018
LIQUID = ("liquid", "supercritical_liquid", "solid")


class MassFlux(NamedTuple):
    """G [kg/(m2 s)], the throat pressure [Pa], and whether the flow is choked there."""

    value: float
    throat_pressure: float
    choked: bool


def mass_flux(fluid: Fluid, p1: float, T1: float, h1: float, s1: float, rho1: float, p2: float) -> MassFlux:
    """Ideal mass flux of a restriction; p [Pa], T [K], h [J/kg], s [J/(kg K)], rho [kg/m3].

    Raises NoSolution where the pressure does not fall towards the downstream side.
    """
    if p2 >= p1:
        raise NoSolution(
            f"Nothing flows through the restriction: the downstream pressure ({p2:.6g} Pa) is not below the upstream "
            f"pressure ({p1:.6g} Pa).",
            hint="Check the two pressures, or turn the stream round.",
        )
    if fluid.kind == "ideal_gas":
        return _ideal_gas_flux(fluid, p1, T1, p2)
    if fluid.kind in ("constant_liquid", "brine") or _is_liquid(fluid, p1, rho1, h1):
        return MassFlux(math.sqrt(2 * rho1 * (p1 - p2)), p2, False)
    return _isentropic_flux(fluid, p1, h1, s1, p2)


def _is_liquid(fluid: Fluid, p1: float, rho1: float, h1: float) -> bool:
    return str(fluid.state(("p", "h"), (p1, h1)).phase) == "liquid"


def _ideal_gas_flux(fluid: Fluid, p1: float, T1: float, p2: float) -> MassFlux:
    assert fluid.molar_mass is not None
    R = GAS_CONSTANT / fluid.molar_mass
    cp = fluid.state(("p", "T"), (p1, T1), ("cp",)).values["cp"]
    k = cp / (cp - R)
    critical = (2 / (k + 1)) ** (k / (k - 1))
    r = max(p2 / p1, critical)
    flux = p1 * math.sqrt(2 * k / ((k - 1) * R * T1) * (r ** (2 / k) - r ** ((k + 1) / k)))
    return MassFlux(flux, r * p1, p2 / p1 <= critical)


def _isentropic_flux(fluid: Fluid, p1: float, h1: float, s1: float, p2: float) -> MassFlux:
    def flux(p: float) -> float:
        try:
            state = fluid.state(("p", "s"), (p, s1)).values
        except CaseError:  # below the triple point the model ends; a throat there is not looked for
            return 0.0
        return float(state["rho"] * math.sqrt(max(2 * (h1 - state["h"]), 0.0)))

    best = minimize_scalar(lambda p: -flux(p), bounds=(p2, p1), method="bounded", options={"xatol": 1e-7 * p1})
    throat = float(best.x)
    at_outlet = flux(p2)
    if at_outlet >= -best.fun:
        return MassFlux(at_outlet, p2, False)
    return MassFlux(float(-best.fun), throat, throat > p2 * (1 + 1e-4))


def _per_row(function: Callable[..., float], *arguments: Value) -> Value:
    """The function over columns where any argument is one; NaN where it refuses a row."""
    if not any(isinstance(a, np.ndarray) for a in arguments):
        return function(*arguments) if all(math.isfinite(a) for a in arguments) else math.nan
    rows: list[float] = []
    for row in np.broadcast(*arguments):
        numbers = [float(a) for a in row]
        try:
            rows.append(function(*numbers) if all(math.isfinite(a) for a in numbers) else math.nan)
        except CaseError:
            rows.append(math.nan)
    return np.array(rows)


def add_restriction(builder: Builder, relation: Relation) -> None:
    """Append the equations ṁ = Cd A G and G = G(upstream state, p2) of a restriction to the builder's model."""
    stream = builder.streams[relation.streams["stream"]]
    m = builder.flow(stream, "mass_flow")
    p, T, h, s, rho = (builder.state(stream, name) for name in ("p", "T", "h", "s", "rho"))
    size = "area" if "area" in relation.quantities else "bore"
    opening, cd, p2, flux = (
        builder.variable(relation.id, name, RELATION[name])
        for name in (size, "discharge_coefficient", "downstream_pressure", "mass_flux")
    )
    fluid = builder.fluid(stream)
    area = Term(-1.0, ((cd, 1), (opening, 1), (flux, 1)))
    if size == "bore":
        area = Term(-math.pi / 4, ((cd, 1), (opening, 2), (flux, 1)), "π/4")
    builder.equation(f"flow through {relation.id}", Term(1.0, ((m, 1),)), area)

    def ideal_flux(v: Values) -> Value:
        return _per_row(lambda *a: mass_flux(fluid, *a).value, v[p], v[T], v[h], v[s], v[rho], v[p2])

    builder.model.equations.append(
        Function(
            f"mass flux of {relation.id}", (flux, p, T, h, s, rho, p2),
            lambda v: v[flux] - ideal_flux(v), lambda v: v[flux],
            "{0} = G(p1 = {1}, h1 = {3}, s1 = {4}, p2 = {6})",
            {flux: (ideal_flux, "G(p1 = {1}, h1 = {3}, s1 = {4}, p2 = {6})")},
        )
    )  # fmt: skip
