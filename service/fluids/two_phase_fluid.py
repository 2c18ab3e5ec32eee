"""What the models of fluids that evaporate have in common: choice of inputs, superheat, and slopes.

A subclass gives `state` for the pairs that its library flashes, `saturated`, and its slopes at a base point; whatever
pair is left is solved here by a bracketed root (see `roots`).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Mapping, Sequence
from typing import ClassVar

from service.errors import CaseError, StateAmbiguous, StateOutOfRange
from service.fluids import roots
from service.fluids.columns import by_rows
from service.fluids.pairs import PREFERENCE, Pair, choose
from service.fluids.protocol import Column, Limits, Provenance, State
from service.fluids.refusals import literal, refusal
from service.fluids.slopes import Slope, combine

BASIC = ("p", "T", "h", "s", "u", "rho", "v", "x")


class TwoPhaseFluid:
    """A pure or pseudo-pure fluid; see the module's text."""

    name: str
    kind = "pure"
    dof = 2
    pressure_optional = False
    molar_mass: float | None
    properties: tuple[str, ...]
    limits: Limits
    provenance: Provenance
    pairs: ClassVar[tuple[Pair, ...]] = PREFERENCE

    spans: Mapping[str, tuple[float, float]]
    """Property → the lowest and highest value [SI] that any state within the limits has, with a little to spare."""

    # -- to be given by a subclass -----------------------------------------------------------------------------------

    def state(self, inputs: Sequence[str], values: Sequence[float], extras: Sequence[str] = ()) -> State:
        """The whole state [SI]. Raises StateOutOfRange, StateAmbiguous."""
        raise NotImplementedError

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """Saturation temperature [K] at p [Pa] or pressure at T; None where not defined."""
        raise NotImplementedError

    def boiling(self, p: float, x: float) -> float | None:
        """Temperature [K] of the saturated liquid (x = 0) or vapour (x = 1) at p [Pa]; None where not defined."""
        raise NotImplementedError

    def boiling_pressure(self, T: float, x: float) -> float | None:
        """Pressure [Pa] of the saturated liquid (x = 0) or vapour (x = 1) at T [K]; None where not defined."""
        raise NotImplementedError

    def coldest(self, p: float) -> float:
        """Lowest temperature [K] at which the fluid is not solid at p [Pa], or that the model covers."""
        return self.limits.T_min

    def hottest(self, p: float) -> float:
        """Highest temperature [K] that the model covers at p [Pa]."""
        return self.limits.T_max

    def highest_pressure(self, T: float) -> float:
        """Highest pressure [Pa] that the model covers at T [K]."""
        return self.limits.p_max

    def base_slopes(self, state: State, names: Collection[str]) -> Mapping[str, Slope]:
        """d(name)/d(base coordinates) of each name, the same two coordinates for all."""
        raise NotImplementedError

    # -- common ------------------------------------------------------------------------------------------------------

    def inputs(self, known: Collection[str]) -> tuple[str, ...] | None:
        """Which two of the known properties to start from; None where they do not fix a state."""
        return choose(known, self.pairs)

    def bounds(self, name: str) -> tuple[float, float]:
        """Bounds [SI] of a property for a search."""
        if name == "x":
            return 0.0, 1.0
        if name in ("superheat", "subcooling"):
            return 0.0, self.limits.T_max - self.limits.T_min
        if name not in self.spans:
            raise StateAmbiguous(f"No bounds are known for {name} of {self.name}.")
        return self.spans[name]

    def columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[dict[str, Column], dict[int, CaseError]]:
        """The wanted properties as columns [SI], NaN in bad rows, and the reason of each bad row."""
        return by_rows(self.state, inputs, values, wanted)

    def partials(self, state: State, inputs: tuple[str, ...], of: tuple[str, ...]) -> dict[str, tuple[float, ...]]:
        """d(of)/d(each input), the other constant [SI]. Raises StateAmbiguous where the inputs are not independent."""
        slopes = self.base_slopes(state, {*inputs, *of})
        return combine(slopes, inputs, of, self.name)

    def indirect_state(self, inputs: Sequence[str], values: Sequence[float], extras: Sequence[str]) -> State:
        """A state from a pair that the library does not flash, by a route that it does."""
        if len(inputs) != 2 or len(values) != 2:
            raise StateAmbiguous(f"A state of {self.name} is fixed by two properties; {len(inputs)} given.")
        given = dict(zip(inputs, values, strict=True))
        for name, value in given.items():
            self._require(name, value)
        pair = choose(given, self.pairs)
        if pair is None:
            raise StateAmbiguous(
                f"{inputs[0]} and {inputs[1]} do not fix a state of {self.name}.",
                hint="Give two independent properties of p, T, h, s, u, rho, v, x, superheat, subcooling.",
            )
        first, second = pair
        a, b = given[first], given[second]
        if second in ("superheat", "subcooling"):
            found = self._degrees_from_saturation(first, a, second, b, extras)
        elif "v" in pair:
            found = self._by_volume(pair, a, b, extras)
        else:
            found = self._by_root(pair, a, b, extras)
        found.values.update(given)
        return found

    def _by_volume(self, pair: Pair, a: float, b: float, extras: Sequence[str]) -> State:
        names = tuple("rho" if name == "v" else name for name in pair)
        values = tuple(1.0 / value if name == "v" else value for name, value in zip(pair, (a, b), strict=True))
        return self.state(names, values, extras)

    def _by_root(self, pair: Pair, a: float, b: float, extras: Sequence[str]) -> State:
        first, second = pair
        solve: Callable[[TwoPhaseFluid, str, float, float], tuple[Pair, tuple[float, float]]]
        if first == "p":
            solve = roots.at_pressure
        elif first == "T":
            solve = roots.at_temperature
        elif first == "rho":
            solve = roots.at_density
        elif first == "x":
            solve = roots.at_quality
        elif pair == ("h", "u"):
            inputs, values = roots.from_h_u(self, a, b)
            return self.state(inputs, values, extras)
        else:  # (h, s) and (s, u), both through (p, s)
            s, other, y = (b, "h", a) if pair == ("h", "s") else (a, "u", b)
            inputs, values = roots.at_entropy(self, other, s, y)
            return self.state(inputs, values, extras)
        inputs, values = solve(self, second, a, b)
        return self.state(inputs, values, extras)

    def _require(self, name: str, value: float) -> None:
        """Refuse a value [SI] that no state has."""
        name_of = literal(self.name)
        if not math.isfinite(value):
            raise refusal(StateOutOfRange, f"{name} of {name_of} is not a finite number.", of=name)
        if name in ("superheat", "subcooling"):
            if value < 0.0:
                other = "subcooling" if name == "superheat" else "superheat"
                raise refusal(
                    StateOutOfRange, f"{name} = {{0}} is negative.", (name, value),
                    hint=f"Give a {other} instead.", of=name,
                )  # fmt: skip
            return
        if name == "x":
            if not 0.0 <= value <= 1.0:
                raise refusal(
                    StateOutOfRange, "x = {0} is not between 0 (saturated liquid) and 1 (saturated vapour).",
                    ("x", value), hint="For superheated vapour or subcooled liquid give T, superheat or subcooling.",
                    of="x",
                )  # fmt: skip
            return
        low, high = self.spans.get(name, (-math.inf, math.inf))
        if not low <= value <= high:
            raise self.outside(name, value, low, high)

    def outside(self, name: str, value: float, low: float, high: float) -> StateOutOfRange:
        """The error for a property [SI] outside of the fluid's range."""
        limits, own = self.limits, literal(self.name)
        if name == "T" and value > high:
            text = f"{{0}} is above the range of {own}, {{1}} to {{2}} (its equation of state ends there)."
            hint = f"Choose a temperature within the range of {self.name}, or an ideal gas for a hot gas."
            return refusal(StateOutOfRange, text, ("T", value), ("T", low), ("T", high), hint=hint, of=name)
        if name == "T":
            text = f"{{0}} is below the range of {own}, {{1}} to {{2}}: it is solid there, or not covered."
            hint = f"The model of {self.name} covers liquid and vapour; check the temperature and its unit."
            return refusal(StateOutOfRange, text, ("T", value), ("T", low), ("T", high), hint=hint, of=name)
        if name == "p":
            lowest = "{2}" if limits.p_min > 0.0 else "above zero"
            text = f"A pressure of {{0}} is outside of the range of {own}, {lowest} to {{1}}."
            hint = "Check the pressure, its unit, and whether it is gauge or absolute."
            return refusal(StateOutOfRange, text, ("p", value), ("p", limits.p_max), ("p", low), hint=hint, of=name)
        text = (
            f"{name} = {{0}} is outside of what {own} has between {{1}} and {{2}} up to {{3}}: "
            f"{name} from {{4}} to {{5}}."
        )
        hint = f"Check {name} and its unit"
        if name in ("h", "s", "u"):
            hint += f"; its zero is: {self.provenance.reference_state}"
        return refusal(
            StateOutOfRange, text, (name, value), ("T", limits.T_min), ("T", limits.T_max), ("p", limits.p_max),
            (name, low), (name, high), hint=f"{hint}.", of=name,
        )  # fmt: skip

    def _degrees_from_saturation(
        self, first: str, a: float, second: str, degrees: float, extras: Sequence[str]
    ) -> State:
        """A superheated or subcooled state: degrees [K] away from the boiling (or dew) temperature."""
        x = 1.0 if second == "superheat" else 0.0
        sign = 1.0 if second == "superheat" else -1.0
        if first == "p":
            T_boiling = self.boiling(a, x)
            if T_boiling is None:
                raise self.no_saturation("p", a, second)
            p, T = a, T_boiling + sign * degrees
        else:
            boiling = self.boiling_pressure(a - sign * degrees, x)
            if boiling is None:
                raise self.no_saturation("T", a - sign * degrees, second)
            p, T = boiling, a
        if degrees < 1e-6:  # nearer to the line than a flash can tell
            return self.state(("p", "x"), (p, x), extras)
        return self.state(("p", "T"), (p, T), extras)

    def no_saturation(self, name: str, value: float, asked: str) -> StateOutOfRange:
        """The error for a quality, superheat or subcooling where there is no saturation line."""
        limits = self.limits
        lowest, critical = (limits.p_triple, limits.p_critical) if name == "p" else (limits.T_triple, limits.T_critical)
        text = (
            f"{{0}} is outside of the saturation line of {literal(self.name)}, {{1}} (triple point) to {{2}} "
            f"(critical point): {asked} has no meaning there."
        )
        return refusal(
            StateOutOfRange, text, (name, value), (name, lowest or 0.0), (name, critical or math.inf),
            hint=f"Give another property in place of {asked}, or stay within the saturation line.", of=name,
        )  # fmt: skip

    def distance_from_boiling(self, name: str, p: float, T: float) -> float:
        """Superheat T - T_dew(p) or subcooling T_bubble(p) - T [K], negative on the other side, NaN without a line."""
        T_boiling = self.boiling(p, 1.0 if name == "superheat" else 0.0)
        if T_boiling is None:
            return math.nan
        return T - T_boiling if name == "superheat" else T_boiling - T
