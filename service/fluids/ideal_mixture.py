"""Mixtures of ideal gases of fixed composition.

    h(T) = sum x_i h_i(T)      s(p, T) = sum x_i [s_i(T, p) - R ln x_i]      p = rho R T / M

h_i, s_i are the ideal-gas parts of the components' own equations of state, so that the mixture has the enthalpy zeros
of its components: nitrogen in a mixture and nitrogen on its own agree.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary
import numpy as np

from service.errors import CaseError, StateOutOfRange
from service.fluids.base_point import Array, BasePointFluid, Point
from service.fluids.bracketed_root import newton_in_bracket
from service.fluids.ideal_part import MOLAR_GAS_CONSTANT, ideal_part
from service.fluids.protocol import Limits, Provenance
from service.fluids.refusals import literal, refusal

PAIRS = (
    ("p", "T"), ("p", "h"), ("p", "s"), ("p", "u"), ("p", "rho"), ("p", "v"),
    ("T", "rho"), ("T", "v"), ("T", "s"), ("u", "rho"), ("u", "v"), ("h", "rho"), ("h", "v"), ("rho", "s"), ("v", "s"),
    ("h", "s"), ("u", "s"),
)  # fmt: skip
LOWEST_PRESSURE, HIGHEST_PRESSURE = 1.0, 1e8  # [Pa]
REFERENCE = (
    "h and s of each component as in its own equation of state (the zeros of the pure fluids); "
    "entropy of mixing included"
)


def name_of(fractions: Mapping[str, float], model: str) -> str:
    """A short name for messages: the three main components."""
    main = sorted(fractions, key=lambda name: -fractions[name])
    return f"gas mixture of {', '.join(main[:3])}{' ...' if len(main) > 3 else ''} ({model.replace('_', ' ')})"


class IdealGasMixture(BasePointFluid):
    """A mixture of ideal gases with temperature-dependent heat capacities; mole fractions sum to one."""

    kind = "gas_mixture"
    dof = 2
    pressure_optional = True
    base = ("p", "T")
    basic = ("p", "T", "h", "s", "u", "rho", "v", "x", "cp")
    extras = ("cv", "speed_of_sound", "kappa")
    properties = (*basic, *extras)
    pairs = PAIRS
    phase = "gas"

    def __init__(self, fractions: Mapping[str, float]) -> None:
        self.mole_fractions = dict(fractions)
        self._parts = [(x, ideal_part(name)) for name, x in fractions.items()]
        self.name = name_of(fractions, "ideal_gas")
        molar_mass = math.fsum(x * part.molar_mass for x, part in self._parts)
        self.molar_mass: float = molar_mass
        self._R = MOLAR_GAS_CONSTANT / molar_mass
        # entropy of each component at its own partial pressure: what does not depend on p and T
        self._mixing = -math.fsum(x * math.log(x / (MOLAR_GAS_CONSTANT * part.rho_reducing)) for x, part in self._parts)
        T_min = max(0.5 * part.T_triple for _, part in self._parts)
        T_max = min(part.T_max_ideal for _, part in self._parts)
        self.limits = Limits(T_min=T_min, T_max=T_max, p_min=LOWEST_PRESSURE, p_max=HIGHEST_PRESSURE)
        keys = ", ".join(dict.fromkeys(part.citation_key for _, part in self._parts))
        self.provenance = Provenance(
            model="mixture of ideal gases with cp(T)",
            citation=f"ideal-gas parts of the components' equations of state: {keys}; "
            "R = 8.314462618 J/(mol K), CODATA 2018",
            reference_state=REFERENCE,
        )

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """None: ideal gases do not condense; `dew_point` says where real ones of this composition would."""
        return None

    def dew_point(self, p: float) -> float | None:
        """T [K] at which the mixture's water would condense at p [Pa], by Raoult's law; None without water.

        For advisories: p_sat(T) = x_water p, saturation of IAPWS-95. Above the critical pressure of water, and below
        its triple point, None.
        """
        x = self.mole_fractions.get("Water", 0.0)
        handle = CoolPropLibrary.AbstractState("HEOS", "Water")
        if not handle.trivial_keyed_output(CoolPropLibrary.iP_triple) < x * p < handle.p_critical():
            return None
        handle.update(CoolProp.PQ_INPUTS, x * p, 1.0)
        return float(handle.T())

    def bounds(self, name: str) -> tuple[float, float]:
        """Search bounds [SI] for one property."""
        limits = self.limits
        if name in ("p", "T"):
            return (LOWEST_PRESSURE, HIGHEST_PRESSURE) if name == "p" else (limits.T_min, limits.T_max)
        corners = [(p, T) for p in (LOWEST_PRESSURE, HIGHEST_PRESSURE) for T in (limits.T_min, limits.T_max)]
        found = [self.evaluate(corner, (name,))[name] for corner in corners]
        return min(found), max(found)

    def thermal(self, T: float) -> tuple[float, float, float]:
        """h [J/kg], s + R ln(p/Pa) [J/(kg K)] and cp [J/(kg K)] at T [K]."""
        h = s = cp = 0.0
        for x, part in self._parts:
            h_part, s_part, cp_part = part.dimensionless(T)
            h += x * h_part
            s += x * s_part
            cp += x * cp_part
        return self._R * T * h, self._R * (s + self._mixing + math.log(T)), self._R * cp

    def point(self, inputs: Sequence[str], values: Sequence[float]) -> Point:
        """(p, T) [Pa, K] of a state; see the base class."""
        self.require_finite(inputs, values)
        given = dict(zip(inputs, values, strict=True))
        if "v" in given:
            v = given.pop("v")
            given["rho"] = 1.0 / v if v > 0.0 else math.nan
        if len(given) != 2:
            raise self.unsupported(inputs)
        if "rho" in given and not given["rho"] > 0.0:
            raise StateOutOfRange(f"{self.name}: a density must be positive.")
        T = self._temperature(given, inputs)
        p = given.get("p")
        if p is None:
            p = given["rho"] * self._R * T if "rho" in given else self._pressure_of_entropy(T, given["s"])
        self._check(p, T)
        return p, T

    def _temperature(self, given: Mapping[str, float], inputs: Sequence[str]) -> float:
        if "T" in given:
            if not given.keys() & {"p", "rho", "s"}:
                raise self.unsupported(inputs)
            return given["T"]
        if given.keys() == {"h", "u"}:
            raise self.unsupported(inputs)  # h - u = R T leaves the pressure open
        if given.keys() == {"p", "rho"}:
            return given["p"] / (given["rho"] * self._R)
        if "h" in given:
            return self.temperature_of("h", given["h"])
        if "u" in given:
            return self.temperature_of("u", given["u"])
        if "p" in given and given["p"] > 0.0:
            return self.temperature_of("s", given["s"] + self._R * math.log(given["p"]))
        if "rho" in given:
            return self.temperature_of("s_at_density", given["s"] + self._R * math.log(given["rho"] * self._R))
        raise self.unsupported(inputs) if "p" not in given else StateOutOfRange(f"{self.name}: p must be positive.")

    def temperature_of(self, name: str, value: float) -> float:
        """T [K] at which h, u [J/kg], s + R ln p, or the same at constant density [J/(kg K)] has the value."""
        low, high = self.limits.T_min, self.limits.T_max
        R = self._R

        def residual(T: float) -> tuple[float, float]:
            h, s, cp = self.thermal(T)
            if name == "h":
                return h - value, cp
            if name == "u":
                return h - R * T - value, cp - R
            if name == "s":
                return s - value, cp / T
            return s - R * math.log(T) - value, (cp - R) / T

        at_low, at_high = residual(low)[0], residual(high)[0]
        if at_low > 0.0 or at_high < 0.0:
            zero = "Is the enthalpy counted from the same zero? It is that of the pure components."
            name = name.split("_")[0]
            raise refusal(
                StateOutOfRange,
                f"{literal(self.name)}: {name} belongs to a temperature outside {{0}} to {{1}}.",
                ("T", low),
                ("T", high),
                hint=zero if name in ("h", "u") else "",
                of=name,
            )
        start = low + (high - low) * at_low / (at_low - at_high)
        return newton_in_bracket(residual, low, high, start, scale=at_high - at_low)

    def _pressure_of_entropy(self, T: float, s: float) -> float:
        self._check(LOWEST_PRESSURE, T)
        exponent = (self.thermal(T)[1] - s) / self._R
        return math.exp(min(exponent, 700.0))

    def _check(self, p: float, T: float) -> None:
        limits = self.limits
        if not limits.T_min <= T <= limits.T_max:
            raise self.outside("T", T, limits.T_min, limits.T_max)
        if not LOWEST_PRESSURE <= p <= HIGHEST_PRESSURE:
            raise self.outside("p", p, LOWEST_PRESSURE, HIGHEST_PRESSURE)

    def evaluate(self, point: Point, wanted: Collection[str]) -> dict[str, float]:
        """Properties [SI] at (p, T); kappa [-] is cp/cv."""
        p, T = point
        R = self._R
        h, s, cp = self.thermal(T)
        rho = p / (R * T)
        kappa = cp / (cp - R)
        return {
            "p": p, "T": T, "h": h, "s": s - R * math.log(p), "u": h - R * T, "rho": rho, "v": 1.0 / rho, "x": math.nan,
            "cp": cp, "cv": cp - R, "kappa": kappa, "speed_of_sound": math.sqrt(kappa * R * T),
        }  # fmt: skip

    def slopes(self, point: Point, names: Sequence[str]) -> dict[str, tuple[float, ...]]:
        """d(name)/d(p, T) [SI], exact for the state properties."""
        p, T = point
        R, cp = self._R, self.thermal(T)[2]
        rho = p / (R * T)
        exact = {
            "p": (1.0, 0.0), "T": (0.0, 1.0), "h": (0.0, cp), "u": (0.0, cp - R), "s": (-R / p, cp / T),
            "rho": (rho / p, -rho / T), "v": (-1.0 / (rho * p), 1.0 / (rho * T)),
        }  # fmt: skip
        rest = [name for name in names if name not in exact]
        return {**exact, **(super().slopes(point, rest) if rest else {})}

    def columns(
        self, inputs: Sequence[str], values: Sequence[Array], wanted: Sequence[str]
    ) -> tuple[dict[str, Array], dict[int, CaseError]]:
        """Columns in numpy where one input is p and the other T, h, u or s; else row by row. See the base class."""
        given = dict(zip(inputs, (np.asarray(v, dtype=float) for v in values), strict=True))
        other = next((name for name in inputs if name in ("T", "h", "u", "s")), None)
        if "p" not in given or other is None or len(inputs) != 2:
            return super().columns(inputs, values, wanted)
        limits = self.limits
        p = given["p"]
        with np.errstate(all="ignore"):
            T = given[other] if other == "T" else self._temperatures(other, given[other], p)
            good = (limits.T_min <= T) & (limits.T_max >= T) & (p >= LOWEST_PRESSURE) & (p <= HIGHEST_PRESSURE)
            found = self._evaluate_columns(p, np.where(good, T, np.nan))
        out = {name: np.where(good, found[name], np.nan) for name in wanted}
        errors: dict[int, CaseError] = {}
        for row in np.flatnonzero(~good).tolist():
            try:  # the scalar way words the error, or knows better at the very end of the range
                one = self.evaluate(self.point(inputs, [float(given[name][row]) for name in inputs]), wanted)
            except CaseError as error:
                errors[row] = error
            else:
                for name in wanted:
                    out[name][row] = one[name]
        return out, errors

    def _thermal_columns(self, T: Array) -> tuple[Array, Array, Array]:
        h, s, cp = np.zeros_like(T), np.zeros_like(T), np.zeros_like(T)
        for x, part in self._parts:
            h_part, s_part, cp_part = part.columns(T)
            h += x * h_part
            s += x * s_part
            cp += x * cp_part
        return self._R * T * h, self._R * (s + self._mixing + np.log(T)), self._R * cp

    def _temperatures(self, name: str, value: Array, p: Array) -> Array:
        """Newton's method on whole columns; rows that leave the range end as NaN."""
        low, high = self.limits.T_min, self.limits.T_max
        target = value + self._R * np.log(p) if name == "s" else value
        T = np.full_like(value, min(600.0, 0.5 * (low + high)))
        for _ in range(50):
            h, s, cp = self._thermal_columns(T)
            if name == "s":
                move = (target - s) * T / cp
            else:
                move = (target - h) / cp if name == "h" else (target - h + self._R * T) / (cp - self._R)
            new = np.clip(T + move, 0.999 * low, 1.001 * high)
            done = not np.any(np.abs(new - T) > 1e-13 * T)
            T = new
            if done:
                break
        return np.where(np.isfinite(target), T, np.nan)

    def _evaluate_columns(self, p: Array, T: Array) -> dict[str, Array]:
        R = self._R
        h, s, cp = self._thermal_columns(T)
        rho = p / (R * T)
        kappa = cp / (cp - R)
        return {
            "p": p, "T": T, "h": h, "s": s - R * np.log(p), "u": h - R * T, "rho": rho, "v": 1.0 / rho,
            "x": np.full_like(T, np.nan), "cp": cp, "cv": cp - R, "kappa": kappa,
            "speed_of_sound": np.sqrt(kappa * R * T),
        }  # fmt: skip
