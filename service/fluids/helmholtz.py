"""Pure and pseudo-pure fluids by their Helmholtz equations of state.

Everything that is known to go wrong in the property library is met here: it is given values only that lie within the
limits, one state object a thread (a shared one returns wrong numbers), its results are held against what was put in,
and its errors become ours.
"""

from __future__ import annotations

import math
import threading
from collections.abc import Collection, Mapping, Sequence
from typing import Any

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary
import numpy as np

from service.errors import CaseError, NotConverged, StateAmbiguous, StateOutOfRange
from service.fluids.citations import citation
from service.fluids.columns import as_columns, by_rows, first_of_each, spread
from service.fluids.handles import Handle
from service.fluids.helmholtz_columns import Flags, run
from service.fluids.helmholtz_limits import Range, measure
from service.fluids.helmholtz_slopes import boiling_slope, single_phase_slopes, two_phase_slopes
from service.fluids.names import own_name
from service.fluids.pairs import phase_of
from service.fluids.protocol import Column, Provenance, State
from service.fluids.reference_states import reference_state
from service.fluids.refusals import literal, refusal
from service.fluids.roots import at_density, at_pressure, at_temperature
from service.fluids.slopes import Slope
from service.fluids.two_phase_fluid import BASIC, TwoPhaseFluid

SETTLED = 1e-6  # a flash has to meet its inputs to this part of the fluid's span of the property
ON_THE_LINE = "is within 1e-4 %"  # what the library says of a (p, T) on the saturation line

NATIVE: Mapping[tuple[str, str], tuple[Any, bool]] = {
    ("p", "T"): (CoolProp.PT_INPUTS, False),
    ("p", "h"): (CoolProp.HmassP_INPUTS, True),
    ("p", "s"): (CoolProp.PSmass_INPUTS, False),
    ("p", "u"): (CoolProp.PUmass_INPUTS, False),
    ("p", "x"): (CoolProp.PQ_INPUTS, False),
    ("T", "x"): (CoolProp.QT_INPUTS, True),
    ("p", "rho"): (CoolProp.DmassP_INPUTS, True),
    ("T", "rho"): (CoolProp.DmassT_INPUTS, True),
    ("rho", "u"): (CoolProp.DmassUmass_INPUTS, False),
    ("rho", "h"): (CoolProp.DmassHmass_INPUTS, False),
    ("rho", "s"): (CoolProp.DmassSmass_INPUTS, False),
}
"""Pair → (input pair of the library, whether it wants the second first)."""

BLENDS_LACK = (("T", "x"), ("T", "rho"), ("rho", "u"), ("rho", "h"), ("rho", "s"))
"""Pairs whose wet states the library refuses, or gets wrong, for a pseudo-pure fluid."""

EXTRAS = ("cp", "cv", "speed_of_sound", "viscosity", "conductivity")
METHODS = {
    "p": "p", "T": "T", "h": "hmass", "s": "smass", "u": "umass", "rho": "rhomass", "x": "Q",
    "cp": "cpmass", "cv": "cvmass", "speed_of_sound": "speed_sound", "viscosity": "viscosity",
    "conductivity": "conductivity",
}  # fmt: skip
IN_COLUMNS = frozenset((*BASIC, "cp", "cv", "speed_of_sound"))


class Route:
    """How one pair of inputs is flashed, and the values [SI] within which it may be."""

    __slots__ = ("first", "high_1", "high_2", "low_1", "low_2", "pair", "second", "swapped")

    def __init__(self, first: str, second: str, pair: Any, swapped: bool, spans: Mapping[str, Range]) -> None:
        self.first, self.second, self.pair, self.swapped = first, second, pair, swapped
        (self.low_1, self.high_1), (self.low_2, self.high_2) = spans[first], spans[second]


class HelmholtzFluid(TwoPhaseFluid):
    """A pure or pseudo-pure fluid; library_name is one of the property library's own names, never a client's text."""

    def __init__(self, library_name: str) -> None:
        self.name = own_name(library_name)
        self._library_name = library_name
        self._threads = threading.local()
        handle = self._handle()
        backend = handle.backend
        self.molar_mass = float(backend.molar_mass())
        self._blend = CoolPropLibrary.get_fluid_param_string(library_name, "pure") == "false"
        measured = measure(backend)
        self.limits, self.spans = measured.limits, measured.spans
        self._melting, self._cold = measured.melting, measured.melting.cold
        self._p_critical, self._T_critical = measured.p_critical, measured.T_critical
        self._rho_critical = measured.rho_critical
        self._T_ceiling, self._p_ceiling = self.limits.T_max * (1 + 1e-9), self.limits.p_max * (1 + 1e-9)
        self.properties = (*BASIC, "superheat", "subcooling", *(n for n in EXTRAS if n in measured.extras))
        self.provenance = Provenance(
            model="Helmholtz equation of state" + (" (pseudo-pure blend)" if self._blend else ""),
            citation=citation(CoolPropLibrary.get_BibTeXKey(library_name, "EOS")),
            reference_state=reference_state(backend),
        )
        self._settled = dict.fromkeys(BASIC, 0.0) | {"x": SETTLED}
        for name in ("h", "s", "u"):  # these may be zero
            low, high = self.spans[name]
            self._settled[name] = SETTLED * (high - low)
        self._routes = self._all_routes(measured.line)
        self._line_T = measured.line["T"]

    def _all_routes(self, line: Mapping[str, Range]) -> dict[tuple[str, ...], Route]:
        routes: dict[tuple[str, ...], Route] = {}
        for (first, second), (pair, swapped) in NATIVE.items():
            if self._blend and (first, second) in BLENDS_LACK:
                continue
            spans = {**self.spans, "x": (0.0, 1.0), **(line if second == "x" else {})}
            routes[first, second] = Route(first, second, pair, swapped, spans)
            routes[second, first] = Route(second, first, pair, not swapped, spans)
        return routes

    def _handle(self) -> Handle:
        try:
            return self._threads.handle  # type: ignore[no-any-return]
        except AttributeError:
            handle = Handle(CoolPropLibrary.AbstractState("HEOS", self._library_name))
            self._threads.handle = handle
            return handle

    # -- states ------------------------------------------------------------------------------------------------------

    def state(self, inputs: Sequence[str], values: Sequence[float], extras: Sequence[str] = ()) -> State:
        """The whole state [SI] from two properties, with the asked extras.

        Raises StateOutOfRange outside of the fluid's range, StateAmbiguous for (p, T) on the saturation line.
        """
        route = self._routes.get(inputs if type(inputs) is tuple else tuple(inputs))
        if route is None:
            return self.indirect_state(inputs, values, extras)
        a, b = values
        if not (route.low_1 <= a <= route.high_1 and route.low_2 <= b <= route.high_2):
            raise self._refused(route, a, b)
        handle = self._handle()
        if route.pair is CoolProp.PT_INPUTS:
            p, T = (b, a) if route.swapped else (a, b)
            if self._cold > T:
                self._require_fluid(handle, p, T)
        try:
            if route.swapped:
                handle.update(route.pair, b, a)
            else:
                handle.update(route.pair, a, b)
            found = self._read(handle, route.first, a, route.second, b)
        except (ValueError, IndexError) as exc:
            found = self._second_try(route, a, b, exc)
        if extras:
            self._add(handle, found.values, extras)
        return found

    def _read(self, handle: Handle, first: str, a: float, second: str, b: float) -> State:
        """The state that the library holds. Raises ValueError where it cannot be right."""
        p, T, h, s, u, rho, x = handle.p(), handle.T(), handle.h(), handle.s(), handle.u(), handle.rho(), handle.Q()
        total = p + T + h + s + u + rho
        if total - total != 0.0 or rho <= 0.0 or self._T_ceiling < T or not 0.0 < p <= self._p_ceiling:
            raise ValueError("not a state within the limits")
        if self._cold > T and not 0.0 <= x <= 1.0:
            self._require_fluid(handle, p, T)
        if not 0.0 <= x <= 1.0:
            x = math.nan
        values = {"p": p, "T": T, "h": h, "s": s, "u": u, "rho": rho, "v": 1.0 / rho, "x": x}
        settled = self._settled
        if not (
            abs(values[first] - a) <= settled[first] + SETTLED * abs(a)
            and abs(values[second] - b) <= settled[second] + SETTLED * abs(b)
        ):
            raise ValueError("the flash ended elsewhere")
        # what was given is what the state says, to the last bit
        values[first], values[second] = a, b
        return State(values, phase_of(p, T, rho, x, self._p_critical, self._T_critical, self._rho_critical))

    def _add(self, handle: Handle, values: dict[str, float], extras: Sequence[str]) -> None:
        for name in extras:
            if name in values:
                continue
            if name in ("superheat", "subcooling"):
                values[name] = math.nan
            elif name in self.properties:
                values[name] = self._extra(handle, name, values)
            else:
                values[name] = math.nan
        # these move the library's state, so they come last
        for name in extras:
            if name in ("superheat", "subcooling"):
                values[name] = self.distance_from_boiling(name, values["p"], values["T"])

    def _extra(self, handle: Handle, name: str, values: Mapping[str, float]) -> float:
        if 0.0 < values["x"] < 1.0:  # the library returns numbers there, which mean nothing
            return math.nan
        try:
            value = float(getattr(handle.backend, METHODS[name])())
        except ValueError:
            return math.nan
        return value if math.isfinite(value) else math.nan

    # -- when a flash says no ----------------------------------------------------------------------------------------

    def _refused(self, route: Route, a: float, b: float) -> CaseError:
        """Why a pair is not even tried."""
        given = {route.first: a, route.second: b}
        try:
            if (
                given.keys() == {"p", "T"}
                and 0.0 < given["T"] < self.spans["T"][0]
                and 0.0 < given["p"] < self.limits.p_max
            ):
                self._require_fluid(self._handle(), given["p"], given["T"])
            for name, value in given.items():
                self._require(name, value)
        except CaseError as error:
            return error
        name = "p" if "p" in given else "T"
        return self.no_saturation(name, given[name], "x")

    def _second_try(self, route: Route, a: float, b: float, failure: Exception) -> State:
        """After the library failed: the reason, or the same state by a root over another pair."""
        given = {route.first: a, route.second: b}
        pair = frozenset(given)
        if pair == {"p", "T"}:
            raise self._no_point(given["p"], given["T"], failure) from failure
        if "x" in pair:
            name = "p" if "p" in pair else "T"
            raise self.no_saturation(name, given[name], "x") from failure
        try:
            if "p" in pair:
                (other,) = pair - {"p"}
                inputs, values = at_pressure(self, other, given["p"], given[other])
            elif "T" in pair:
                inputs, values = at_temperature(self, "rho", given["T"], given["rho"])
            else:
                (other,) = pair - {"rho"}
                inputs, values = at_density(self, other, given["rho"], given[other])
        except NotConverged as error:
            raise self._not_found(given) from error
        found = self.state(inputs, values)
        found.values.update(given)
        return found

    def _not_found(self, given: Mapping[str, float]) -> StateOutOfRange:
        (first, a), (second, b) = given.items()
        return refusal(
            StateOutOfRange, f"No state of {literal(self.name)} was found with {first} = {{0}} and {second} = {{1}}.",
            (first, a), (second, b), hint="Check both values, or give another pair of properties.", of=first,
        )  # fmt: skip

    def _no_point(self, p: float, T: float, failure: Exception) -> CaseError:
        """The error of a (p, T) that the library refuses."""
        bubble, dew = self.boiling(p, 0.0), self.boiling(p, 1.0)
        on_line = ON_THE_LINE in str(failure)
        if bubble is not None and dew is not None and (on_line or bubble * (1 - 1e-6) <= T <= dew * (1 + 1e-6)):
            where = "on the saturation line" if dew - bubble < 1e-6 * T else "between boiling and dew point"
            return refusal(
                StateAmbiguous, f"{literal(self.name)} at {{0}} and {{1}} is {where}: p and T do not fix its state.",
                ("p", p), ("T", T), hint="Give x (the vapour fraction) or h in place of one of them.", of="T",
            )  # fmt: skip
        return self._not_found({"p": p, "T": T})

    def _require_fluid(self, handle: Handle, p: float, T: float) -> None:
        """Refuse what is frozen, or colder than the equation of state covers."""
        lowest = self._melting.temperature(handle.backend, p)
        if lowest * (1 - 1e-9) <= T:
            return
        own = literal(self.name)
        if lowest == self.limits.T_min:
            raise self.outside("T", T, lowest, self.limits.T_max)
        raise refusal(
            StateOutOfRange, f"{own} at {{0}} freezes at {{2}}: at {{1}} it is solid, which the model does not cover.",
            ("p", p), ("T", T), ("T", lowest), hint=f"Choose a temperature above the melting line of {self.name}.",
            of="T",
        )  # fmt: skip

    # -- limits ------------------------------------------------------------------------------------------------------

    def coldest(self, p: float) -> float:
        """Lowest temperature [K] of the liquid at p [Pa]: on the melting line where it is known."""
        return self._melting.temperature(self._handle().backend, p) * (1 + 1e-9)

    def highest_pressure(self, T: float) -> float:
        """Highest pressure [Pa] of the fluid at T [K]: on the melting line where it is known."""
        return self._melting.pressure(self._handle().backend, T)

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """Temperature [K] at which vapour at p [Pa] condenses, or pressure at T; None where not defined."""
        if p is not None:
            return self.boiling(p, 1.0)
        return None if T is None else self.boiling_pressure(T, 1.0)

    def boiling(self, p: float, x: float) -> float | None:
        """Boiling (x = 0) or dew (x = 1) temperature [K] at p [Pa]; None outside of the saturation line."""
        route = self._routes["p", "x"]
        if not route.low_1 <= p <= route.high_1:
            return None
        handle = self._handle()
        try:
            handle.update(CoolProp.PQ_INPUTS, p, x)
        except ValueError:
            return None
        T = float(handle.T())
        return T if math.isfinite(T) else None

    def boiling_pressure(self, T: float, x: float) -> float | None:
        """Boiling (x = 0) or dew (x = 1) pressure [Pa] at T [K]; None outside of the saturation line."""
        low, high = self._line_T
        if not low <= T <= high:
            return None
        handle = self._handle()
        try:
            handle.update(CoolProp.QT_INPUTS, x, T)
        except ValueError:
            return None
        p = float(handle.p())
        return p if math.isfinite(p) else None

    # -- slopes ------------------------------------------------------------------------------------------------------

    def base_slopes(self, state: State, names: Collection[str]) -> Mapping[str, Slope]:
        """Slopes over (T, rho) of a single phase, over (p, x) of a wet state; see `helmholtz_slopes`."""
        backend, at = self._handle().backend, state.values
        wet = at["x"] == at["x"]
        degrees = [name for name in names if name in ("superheat", "subcooling")]
        plain = {name for name in names if name in BASIC} | ({"T", "p"} if degrees else set())
        if wet:
            slopes = two_phase_slopes(backend, at["p"], at["x"], plain, self._blend)
        else:
            slopes = single_phase_slopes(backend, at["T"], at["rho"], plain - {"x"})
            slopes["x"] = (math.nan, math.nan)
        for name in degrees:
            slopes[name] = self._slope_of_degrees(backend, name, at["p"], slopes)
        for name in names:
            if name not in slopes:
                slopes[name] = (math.nan, math.nan) if wet else self._slope_by_differences(name, at)
        return slopes

    def _slope_of_degrees(self, backend: Any, name: str, p: float, slopes: Mapping[str, Slope]) -> Slope:
        x, sign = (1.0, 1.0) if name == "superheat" else (0.0, -1.0)
        try:
            along = boiling_slope(backend, p, x, self._blend)
        except ValueError:
            return math.nan, math.nan
        (T1, T2), (p1, p2) = slopes["T"], slopes["p"]
        return sign * (T1 - along * p1), sign * (T2 - along * p2)

    def _slope_by_differences(self, name: str, at: Mapping[str, float]) -> Slope:
        T, rho = at["T"], at["rho"]
        step, width_T, width_rho = 1e-4, 2e-4 * T, 2e-4 * rho
        sides = [
            ((T - step * T, rho), (T + step * T, rho), width_T),
            ((T, rho - step * rho), (T, rho + step * rho), width_rho),
        ]
        slopes = []
        for low, high, width in sides:
            below, above = (self.state(("T", "rho"), place, (name,)).values[name] for place in (low, high))
            slopes.append((above - below) / width)
        return slopes[0], slopes[1]

    # -- columns -----------------------------------------------------------------------------------------------------

    def columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[dict[str, Column], dict[int, CaseError]]:
        """The wanted properties as columns [SI]: a tight loop over one state object; see the protocol."""
        route = self._routes.get(tuple(inputs))
        if route is None or not IN_COLUMNS.issuperset(wanted):
            return by_rows(self.state, inputs, values, wanted)
        first, second = as_columns(values)
        rows, belongs = first_of_each((first, second))
        first, second = first[rows], second[rows]
        found, doubtful = run(self._handle().backend, route, first, second, wanted, self._doubt)
        errors: dict[int, CaseError] = {}
        for place in doubtful:  # the scalar way knows what to do, or what to say
            try:
                state = self.state((route.first, route.second), (float(first[place]), float(second[place])), wanted)
            except CaseError as error:
                errors[place] = error
                for name in wanted:
                    found[name][place] = math.nan
            else:
                for name in wanted:
                    found[name][place] = state.values[name]
        return spread(found, errors, belongs)

    def _doubt(self, route: Route, a: Column, b: Column, T: Column, p: Column, back: Sequence[Column]) -> Flags:
        """Rows whose results have to be looked at one by one: not finite, cold, beyond the limits, or not settled."""
        with np.errstate(invalid="ignore"):
            good: Flags = (self._T_ceiling >= T) & (p > 0.0) & (p <= self._p_ceiling)
            good &= (self._cold <= T) | (self._melting.surely_fluid_above(p) <= T)
            for name, given, got in zip((route.first, route.second), (a, b), back, strict=True):
                good &= np.abs(got - given) <= self._settled[name] + SETTLED * np.abs(given)
        return ~good
