"""Ideal-gas enthalpy, entropy and heat capacity of a pure fluid, in closed form.

The ideal part of a Helmholtz equation of state, alpha0(tau, delta), is a short sum of terms whose coefficients the
property library publishes with each fluid. Summed here directly it costs microseconds, runs over numpy columns, and
keeps the enthalpy zero of the pure fluid, so that a mixture, its components and the real-gas model share one zero.

    h/(R T) = 1 + tau alpha0_tau      cp/R = 1 - tau^2 alpha0_tautau      s/R = tau alpha0_tau - alpha0

Source of these relations: R. Span, Multiparameter Equations of State, Springer 2000, table 3.8 (value from memory).
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import CoolProp.CoolProp as CoolPropLibrary
import numpy as np
from numpy.typing import NDArray

from service.errors import UnknownFluid

MOLAR_GAS_CONSTANT = 8.31446261815324  # [J/(mol K)] exact in the SI of 2019; the library's mixtures use it too

HOTTEST_IDEAL_GAS = 2000.0  # [K]

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class IdealPart:
    """The ideal-gas part of one pure fluid: everything alpha0 says, sorted by the form of its terms.

    With theta = T/T_reducing, the terms become functions of T alone:
    ideal_terms `n ln(1 - exp(-v/T))` (einstein), `n tau^t` (powers), `a ln tau` (log_tau), `a1 + a2 tau` (lead).
    molar_mass [kg/mol], gas_constant [J/(mol K)], T_reducing [K], rho_reducing [mol/m3], T_triple and T_max [K] are
    those of the equation of state.
    """

    name: str
    molar_mass: float
    gas_constant: float
    T_reducing: float
    rho_reducing: float
    T_triple: float
    T_max: float
    lead: tuple[float, float]
    log_tau: float
    powers: tuple[tuple[float, float], ...]
    einstein: tuple[tuple[float, float], ...]
    generalized: tuple[tuple[float, float, float, float], ...]
    citation_key: str

    def dimensionless(self, T: float) -> tuple[float, float, float]:
        """h/(R T) [-], (s - s_density)/R [-] and cp/R [-] at T [K]; the density term -ln(delta) of s is left out."""
        tau = self.T_reducing / T
        a1, a2 = self.lead
        log_tau = math.log(tau)
        value = a1 + a2 * tau + self.log_tau * log_tau
        slope = a2 * tau + self.log_tau  # tau alpha_tau
        curve = -self.log_tau  # tau^2 alpha_tautau
        for n, t in self.powers:
            term = n * tau**t
            value += term
            slope += t * term
            curve += t * (t - 1.0) * term
        for n, v in self.einstein:
            x = v / T
            e = math.exp(-x)
            value += n * math.log1p(-e)
            ratio = e / (1.0 - e)
            slope += n * x * ratio
            curve -= n * x * x * ratio / (1.0 - e)
        for n, v, c, d in self.generalized:
            x = v / T
            e = d * math.exp(x)
            value += n * math.log(c + e)
            slope += n * x * e / (c + e)
            curve += n * x * x * c * e / (c + e) ** 2
        return 1.0 + slope, slope - value, 1.0 - curve

    def columns(self, T: Array) -> tuple[Array, Array, Array]:
        """The same three numbers as `dimensionless`, for a column of temperatures [K]."""
        tau = self.T_reducing / T
        a1, a2 = self.lead
        log_tau = np.log(tau)
        value = a1 + a2 * tau + self.log_tau * log_tau
        slope = a2 * tau + self.log_tau
        curve = np.full_like(T, -self.log_tau)
        for n, t in self.powers:
            term = n * tau**t
            value += term
            slope += t * term
            curve += t * (t - 1.0) * term
        for n, v in self.einstein:
            x = v / T
            e = np.exp(-x)
            value += n * np.log1p(-e)
            ratio = e / (1.0 - e)
            slope += n * x * ratio
            curve -= n * x * x * ratio / (1.0 - e)
        for n, v, c, d in self.generalized:
            x = v / T
            e = d * np.exp(x)
            value += n * np.log(c + e)
            slope += n * x * e / (c + e)
            curve += n * x * x * c * e / (c + e) ** 2
        return 1.0 + slope, slope - value, 1.0 - curve

    @property
    def T_max_ideal(self) -> float:
        """Up to where [K] the ideal-gas heat capacity is used: 2000 K or T_max of the equation of state.

        Sums of vibrations stay bounded far beyond the range of the equation of state (held against NASA polynomials
        in the tests, 2 % at 2000 K); polynomials in T do not. 2000 K: dissociation matters above.
        """
        tau = self.T_reducing / HOTTEST_IDEAL_GAS
        unbounded = sum(abs(n * t * (t - 1.0)) * tau**t for n, t in self.powers if t < 0.0)
        return HOTTEST_IDEAL_GAS if unbounded < 0.1 * self.dimensionless(HOTTEST_IDEAL_GAS)[2] else self.T_max


class _Terms:
    """Collects the terms of alpha0 while they are read."""

    def __init__(self, T_reducing: float) -> None:
        self.T_reducing = T_reducing
        self.a1 = self.a2 = self.log_tau = 0.0
        self.powers: list[tuple[float, float]] = []
        self.einstein: list[tuple[float, float]] = []
        self.generalized: list[tuple[float, float, float, float]] = []

    def lead(self, term: Mapping[str, Any]) -> None:
        self.a1 += term["a1"]
        self.a2 += term["a2"]

    def logarithm(self, term: Mapping[str, Any]) -> None:
        self.log_tau += term["a"]

    def power(self, term: Mapping[str, Any]) -> None:
        self.powers += zip(term["n"], term["t"], strict=True)

    def planck_einstein(self, term: Mapping[str, Any]) -> None:
        self.einstein += [(n, t * self.T_reducing) for n, t in zip(term["n"], term["t"], strict=True)]

    def planck_einstein_of_T(self, term: Mapping[str, Any]) -> None:
        # the library evaluates these with tau = T_crit/T of the term itself, so v stands in kelvin already
        self.einstein += [(n, v * self.T_reducing / term["Tcrit"]) for n, v in zip(term["n"], term["v"], strict=True)]

    def planck_einstein_generalized(self, term: Mapping[str, Any]) -> None:
        rows = zip(term["n"], term["t"], term["c"], term["d"], strict=True)
        self.generalized += [(n, t * self.T_reducing, c, d) for n, t, c, d in rows]

    def constant_cp(self, term: Mapping[str, Any]) -> None:
        # cp/R = c0 integrated twice from T0: c - c tau/tau0 + c ln(tau/tau0)
        c, tau0 = term["cp_over_R"], self.T_reducing / term["T0"]
        self.a1 += c - c * math.log(tau0)
        self.a2 -= c / tau0
        self.log_tau += c

    def polynomial_cp(self, term: Mapping[str, Any]) -> None:
        # cp/R = sum c T^t integrated twice from T0
        Tr, T0 = self.T_reducing, term["T0"]
        for c, t in zip(term["c"], term["t"], strict=True):
            if t == 0.0:
                self.constant_cp({"cp_over_R": c, "T0": T0})
                continue
            if t == -1.0:
                raise KeyError("an integral with a logarithm in T")
            # the same integral term by term: -c T^t/(t (t+1)) - c T0^(t+1)/(T (t+1)) + c T0^t/t
            self.powers.append((-c * Tr**t / (t * (t + 1.0)), -t))
            self.a2 -= c * T0 ** (t + 1.0) / (Tr * (t + 1.0))
            self.a1 += c * T0**t / t

    def aly_lee_cp(self, term: Mapping[str, Any]) -> None:
        # cp/R = c0 + c1 (x/sinh x)^2 + c3 (y/cosh y)^2 with x = c2/T, y = c4/T; as the library does it, only the
        # constant part is integrated from T0
        c0, c1, c2, c3, c4 = term["c"]
        self.constant_cp({"cp_over_R": c0, "T0": term["T0"]})
        self.einstein.append((c1, 2.0 * c2))
        if c3 != 0.0:
            self.generalized.append((-c3, -2.0 * c4, 1.0, 1.0))


_READERS: Mapping[str, Callable[[_Terms, Mapping[str, Any]], None]] = {
    "IdealGasHelmholtzLead": _Terms.lead,
    "IdealGasHelmholtzEnthalpyEntropyOffset": _Terms.lead,
    "IdealGasHelmholtzLogTau": _Terms.logarithm,
    "IdealGasHelmholtzPower": _Terms.power,
    "IdealGasHelmholtzPlanckEinstein": _Terms.planck_einstein,
    "IdealGasHelmholtzPlanckEinsteinFunctionT": _Terms.planck_einstein_of_T,
    "IdealGasHelmholtzPlanckEinsteinGeneralized": _Terms.planck_einstein_generalized,
    "IdealGasHelmholtzCP0Constant": _Terms.constant_cp,
    "IdealGasHelmholtzCP0PolyT": _Terms.polynomial_cp,
    "IdealGasHelmholtzCP0AlyLee": _Terms.aly_lee_cp,
}


@lru_cache(maxsize=256)
def ideal_part(name: str) -> IdealPart:
    """The ideal-gas part of the pure fluid `name` (a name of the property library, already checked against its list).

    Raises UnknownFluid where the library's ideal part has a form that is not summed here.
    """
    fluid = json.loads(CoolPropLibrary.get_fluid_param_string(name, "JSON"))[0]
    equation = fluid["EOS"][0]
    reducing = equation["STATES"]["reducing"]
    terms = _Terms(reducing["T"])
    for term in equation["alpha0"]:
        try:
            _READERS[term["type"]](terms, term)
        except KeyError as exc:
            raise UnknownFluid(
                f"{name} cannot be part of a gas mixture: the form of its ideal-gas heat capacity is not covered.",
                hint="Leave the component out or replace it by a similar one.",
            ) from exc
    return IdealPart(
        name=name,
        molar_mass=equation["molar_mass"],
        gas_constant=equation["gas_constant"],
        T_reducing=reducing["T"],
        rho_reducing=reducing["rhomolar"],
        T_triple=equation["Ttriple"],
        T_max=equation["T_max"],
        lead=(terms.a1, terms.a2),
        log_tau=terms.log_tau,
        powers=tuple(terms.powers),
        einstein=tuple(terms.einstein),
        generalized=tuple(terms.generalized),
        citation_key=equation["BibTeX_EOS"],
    )
