"""Real-gas mixtures of fixed composition: multi-fluid Helmholtz energy, gas phase only.

A general flash of such a mixture takes up to two seconds. Here the gas phase is imposed, *after* the dew point has been
checked (dew_curve.py says why), and every other pair of inputs is solved on (p, T) or (rho, T): about a millisecond.
"""

from __future__ import annotations

import math
import threading
from collections.abc import Callable, Collection, Mapping, Sequence
from typing import Any

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary

from service.errors import NotConverged, StateOutOfRange, UnknownFluid
from service.fluids.base_point import BasePointFluid, Point
from service.fluids.bracketed_root import newton_in_bracket, root_in_bracket
from service.fluids.dew_curve import DewCurve
from service.fluids.ideal_mixture import PAIRS, REFERENCE, IdealGasMixture, name_of
from service.fluids.protocol import Limits, Provenance
from service.fluids.refusals import literal, refusal

LOWEST_PRESSURE, HIGHEST_PRESSURE = 100.0, 3.5e7  # [Pa]; 35 MPa is the normal range of the mixture model
CITATION = (
    "O. Kunz, W. Wagner: The GERG-2008 wide-range equation of state for natural gases and other mixtures. "
    "J. Chem. Eng. Data 57 (2012) 3032-3091 (mixing rules and binary parameters as in CoolProp 8)"
)
WORST_DEW_GUESS = 1e-3  # part of T by which a bracket may start below an interpolated dew point


class RealGasMixture(BasePointFluid):
    """A mixture of real gases above its dew point; mole fractions sum to one."""

    kind = "gas_mixture"
    dof = 2
    pressure_optional = False
    base = ("p", "T")
    basic = ("p", "T", "h", "s", "u", "rho", "v", "x", "cp")
    extras = ("cv", "speed_of_sound", "kappa")
    properties = (*basic, *extras)
    pairs = (*PAIRS, ("T", "h"), ("T", "u"))
    phase = "gas"

    def __init__(self, fractions: Mapping[str, float]) -> None:
        self.mole_fractions = dict(fractions)
        self._names, self._x = tuple(fractions), list(fractions.values())
        self._threads = threading.local()
        self.name = name_of(fractions, "real_gas")
        self._ideal = IdealGasMixture(fractions)
        handle = self._handle()
        self.molar_mass: float = handle.molar_mass()
        self._R = handle.gas_constant() / self.molar_mass
        # denser than four times the mixture's reducing density no gas is described
        self._rho_max = 4.0 * handle.rhomass_reducing()
        T_max = max(min(handle.Tmax(), self._ideal.limits.T_max), 400.0)
        self._dew = DewCurve(self._flash_dew_point, self._estimate_dew_point)
        self.limits = Limits(T_min=handle.Tmin(), T_max=T_max, p_min=LOWEST_PRESSURE, p_max=HIGHEST_PRESSURE)
        self.provenance = Provenance(
            model="multi-fluid Helmholtz energy, gas phase above the dew point",
            citation=f"{CITATION}; components: {self._ideal.provenance.citation.split(': ')[1].split(';')[0]}",
            reference_state=REFERENCE,
        )

    def _handle(self) -> Any:
        """This thread's own state of the library, with the gas phase imposed."""
        handle = getattr(self._threads, "handle", None)
        if handle is None:
            handle = self._new_handle()
            handle.specify_phase(CoolProp.iphase_gas)
            self._threads.handle = handle
        return handle

    def _new_handle(self) -> Any:
        try:
            handle = CoolPropLibrary.AbstractState("HEOS", "&".join(self._names))
            handle.set_mole_fractions(self._x)
        except ValueError as exc:
            raise UnknownFluid(
                f"There is no real-gas model for a mixture of {', '.join(self._names[:8])}: "
                "parameters of a pair of components are missing.",
                hint='Take the model "ideal_gas", or leave out the component in question.',
            ) from exc
        return handle

    def _flash_dew_point(self, p: float) -> float | None:
        flasher = getattr(self._threads, "flasher", None)
        if flasher is None:
            flasher = self._threads.flasher = self._new_handle()
        try:
            flasher.update(CoolProp.PQ_INPUTS, p, 1.0)
            T = float(flasher.T())
        except ValueError:
            return None
        return T if math.isfinite(T) and T > 0.0 else None

    def _estimate_dew_point(self, p: float) -> float:
        """Raoult's law with Wilson's vapour pressures (G. Wilson 1968, value from memory): a start, 5 % good."""
        data = self._critical_data()

        def overfull(T: float) -> float:
            return math.log(sum(x * p / (pc * math.exp(5.373 * (1.0 + w) * (1.0 - Tc / T))) for x, Tc, pc, w in data))

        root = root_in_bracket(overfull, 20.0, 2000.0)
        return root if root is not None else self.limits.T_min

    def _critical_data(self) -> list[tuple[float, float, float, float]]:
        found = []
        for x, name in zip(self._x, self._names, strict=True):
            pure = CoolPropLibrary.AbstractState("HEOS", name)
            found.append((x, pure.T_critical(), pure.p_critical(), pure.acentric_factor()))
        return found

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """The dew temperature [K] at p [Pa]; None for a given T, where the dew pressure may be double-valued."""
        return self._dew.exact(p) if p is not None and LOWEST_PRESSURE <= p <= HIGHEST_PRESSURE else None

    def dew_point(self, p: float) -> float | None:
        """The dew temperature [K] at p [Pa]."""
        return self.saturation(p=p)

    def bounds(self, name: str) -> tuple[float, float]:
        """Search bounds [SI] for one property; the lower temperature bound is the dew point at the lowest pressure."""
        T_low = max(self.limits.T_min, self._dew.temperature(LOWEST_PRESSURE) * 1.01)
        if name in ("p", "T"):
            return (LOWEST_PRESSURE, HIGHEST_PRESSURE) if name == "p" else (T_low, self.limits.T_max)
        T_high = self._dew.temperature(HIGHEST_PRESSURE) * 1.05
        corners = [(LOWEST_PRESSURE, T_low), (LOWEST_PRESSURE, self.limits.T_max)]
        corners += [(HIGHEST_PRESSURE, T) for T in (T_high, self.limits.T_max) if self.limits.T_max >= T]
        found = [self.evaluate(corner, (name,))[name] for corner in corners]
        return min(found), max(found)

    # --- finding (p, T) ------------------------------------------------------------------------------------------

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
        p, T = self._find(given, inputs)
        self._check(p, T)
        return p, T

    def _find(self, given: dict[str, float], inputs: Sequence[str]) -> Point:
        if "p" in given:
            p = given["p"]
            self._check_pressure(p)
            return p, given["T"] if "T" in given else self._temperature_at(p, given)
        if "rho" in given:
            T = given["T"] if "T" in given else self._temperature_at_density(given)
            self._check_temperature(T)
            return self._pressure(given["rho"], T), T
        if "T" in given:
            self._check_temperature(given["T"])
            return self._pressure_at(given), given["T"]
        if "s" in given and given.keys() & {"h", "u"}:
            return self._both(given)
        raise self.unsupported(inputs)

    def _temperature_at(self, p: float, given: Mapping[str, float]) -> float:
        """T [K] at p [Pa] where h, s, u or rho has its value: Newton with cp from the ideal gas's answer."""
        name = next(key for key in given if key != "p")
        value = given[name]
        handle = self._handle()
        low = max(self._dew.temperature(p) * (1.0 - WORST_DEW_GUESS), self.limits.T_min)
        high = self.limits.T_max

        def residual(T: float) -> tuple[float, float]:
            self._update(handle, CoolProp.PT_INPUTS, p, T)
            cp = handle.cpmass()
            if name == "h":
                return handle.hmass() - value, cp
            if name == "s":
                return handle.smass() - value, cp / T
            if name == "u":
                slope = handle.first_partial_deriv(CoolPropLibrary.iUmass, CoolPropLibrary.iT, CoolPropLibrary.iP)
                return handle.umass() - value, slope
            slope = handle.first_partial_deriv(CoolPropLibrary.iDmass, CoolPropLibrary.iT, CoolPropLibrary.iP)
            return value - handle.rhomass(), -slope

        at_low, at_high = residual(low)[0], residual(high)[0]
        if at_low > 0.0:
            raise self._would_condense(p, None, name, value)
        if at_high < 0.0:
            raise refusal(
                StateOutOfRange,
                f"{literal(self.name)}: {name} = {{0}} belongs to a temperature above {{1}}.",
                (name, value),
                ("T", high),
                of=name,
            )
        try:
            start = self._ideal.point(tuple(given), tuple(given.values()))[1]
        except StateOutOfRange:
            start = 0.5 * (low + high)
        return newton_in_bracket(residual, low, high, start, scale=at_high - at_low)

    def _temperature_at_density(self, given: Mapping[str, float]) -> float:
        """T [K] at a density where h, s or u has its value."""
        name = next(key for key in given if key != "rho")
        handle = self._handle()

        def residual(T: float) -> float:
            self._update(handle, CoolProp.DmassT_INPUTS, given["rho"], T)
            return self._read(handle, name) - given[name]

        T = root_in_bracket(residual, max(self.limits.T_min, 50.0), self.limits.T_max)
        if T is None:
            raise refusal(
                StateOutOfRange,
                f"{literal(self.name)} has no gaseous state with rho = {{0}} and {name} = {{1}}.",
                ("rho", given["rho"]),
                (name, given[name]),
                of=name,
            )
        return T

    def _pressure_at(self, given: Mapping[str, float]) -> float:
        """p [Pa] at T where s, h or u has its value; all three fall with rising pressure."""
        T = given["T"]
        name = next(key for key in given if key != "T")
        handle = self._handle()

        def residual(log_p: float) -> float:
            self._update(handle, CoolProp.PT_INPUTS, math.exp(log_p), T)
            return self._read(handle, name) - given[name]

        highest = self._highest_pressure(T)
        found = root_in_bracket(residual, math.log(LOWEST_PRESSURE), math.log(highest))
        if found is None:
            raise refusal(
                StateOutOfRange,
                f"{literal(self.name)}: at {{0}} no pressure between {{1}} and {{2}} has {name} = {{3}}.",
                ("T", T),
                ("p", LOWEST_PRESSURE),
                ("p", highest),
                (name, given[name]),
                hint=f"{name} hardly depends on the pressure: give p instead." if name != "s" else "",
                of=name,
            )
        return math.exp(found)

    def _highest_pressure(self, T: float) -> float:
        """The largest p [Pa] at which the mixture is still a gas at T [K], from the dew curve."""
        if self._dew.temperature(HIGHEST_PRESSURE) < T:
            return HIGHEST_PRESSURE
        edge = root_in_bracket(
            lambda log_p: self._dew.temperature(math.exp(log_p)) - T,
            math.log(LOWEST_PRESSURE),
            math.log(HIGHEST_PRESSURE),
        )
        return math.exp(edge) if edge is not None else 2.0 * LOWEST_PRESSURE

    def _both(self, given: Mapping[str, float]) -> Point:
        """(p, T) where s and h (or u) have their values: T found around the pressure that gives s at each T."""
        name = "h" if "h" in given else "u"
        p, T = self._ideal.point(tuple(given), tuple(given.values()))
        handle = self._handle()
        state = CoolPropLibrary
        first = state.iHmass if name == "h" else state.iUmass
        for _ in range(40):
            self._update(handle, CoolProp.PT_INPUTS, p, T)
            e1, e2 = self._read(handle, name) - given[name], handle.smass() - given["s"]
            a = handle.first_partial_deriv(first, state.iT, state.iP)
            b = p * handle.first_partial_deriv(first, state.iP, state.iT)
            c = handle.first_partial_deriv(state.iSmass, state.iT, state.iP)
            d = p * handle.first_partial_deriv(state.iSmass, state.iP, state.iT)
            determinant = a * d - b * c
            dT, dlog = (-e1 * d + e2 * b) / determinant, (-a * e2 + c * e1) / determinant
            limit = max(1.0, abs(dT) / (0.2 * T), abs(dlog) / 1.0)
            T, p = T + dT / limit, p * math.exp(dlog / limit)
            if not (self.limits.T_min <= T <= self.limits.T_max and LOWEST_PRESSURE <= p <= HIGHEST_PRESSURE):
                raise StateOutOfRange(f"{self.name} has no gaseous state with this {name} and s.")
            if abs(dT) < 1e-11 * T and abs(dlog) < 1e-10:
                return p, T
        raise NotConverged(f"The state of {self.name} from {name} and s did not converge.")

    # --- evaluating ----------------------------------------------------------------------------------------------

    def _update(self, handle: Any, pair: int, first: float, second: float) -> None:
        try:
            handle.update(pair, first, second)
        except ValueError as exc:
            # the library's own search for the density gives up in dense gas
            if pair != CoolProp.PT_INPUTS or not self._dense_gas(handle, first, second):
                raise StateOutOfRange(f"{self.name}: its equation of state has no gaseous root there.") from exc

    def _dense_gas(self, handle: Any, p: float, T: float) -> bool:
        """Finds the density that has p [Pa] at T [K] by a bracketed root; whether there was one."""
        ideal = p / (self._R * T)

        def excess(log_rho: float) -> float:
            handle.update(CoolProp.DmassT_INPUTS, math.exp(log_rho), T)
            return math.log(handle.p() / p) if handle.p() > 0.0 else -1e3

        try:
            found = root_in_bracket(excess, math.log(0.3 * ideal), math.log(min(5.0 * ideal, self._rho_max)))
        except ValueError:
            return False
        return found is not None and abs(excess(found)) < 1e-9

    @staticmethod
    def _read(handle: Any, name: str) -> float:
        readers: dict[str, Callable[[], float]] = {"h": handle.hmass, "s": handle.smass, "u": handle.umass}
        return float(readers[name]())

    def _pressure(self, rho: float, T: float) -> float:
        handle = self._handle()
        self._update(handle, CoolProp.DmassT_INPUTS, rho, T)
        return float(handle.p())

    def _check(self, p: float, T: float) -> None:
        self._check_pressure(p)
        self._check_temperature(T)
        dew = self._dew.condenses(p, T)
        if dew is not None:
            raise self._would_condense(p, dew, "T", T)

    def _check_pressure(self, p: float) -> None:
        if not LOWEST_PRESSURE <= p <= HIGHEST_PRESSURE:
            raise self.outside("p", p, LOWEST_PRESSURE, HIGHEST_PRESSURE)

    def _check_temperature(self, T: float) -> None:
        limits = self.limits
        if not limits.T_min <= T <= limits.T_max:
            raise self.outside("T", T, limits.T_min, limits.T_max)

    def _would_condense(self, p: float, dew: float | None, name: str, value: float) -> StateOutOfRange:
        dew = self._dew.exact(p) if dew is None else dew
        return refusal(
            StateOutOfRange,
            f"{literal(self.name)} would condense: at {{0}} its dew point is {{1}}, and {name} = {{2}} lies below.",
            ("p", p),
            ("T", dew),
            (name, value),
            of=name,
            hint="The model covers the gas only: raise the temperature, lower the pressure, "
            'or take the model "ideal_gas" where no condensate is expected.',
        )

    def evaluate(self, point: Point, wanted: Collection[str]) -> dict[str, float]:
        """Properties [SI] at (p, T) above the dew point; kappa [-] is cp/cv."""
        p, T = point
        handle = self._handle()
        self._update(handle, CoolProp.PT_INPUTS, p, T)
        rho, cp = handle.rhomass(), handle.cpmass()
        found = {
            "p": p, "T": T, "h": handle.hmass(), "s": handle.smass(), "u": handle.umass(), "rho": rho, "v": 1.0 / rho,
            "cp": cp,
        }  # fmt: skip
        if not set(self.extras).isdisjoint(wanted):
            cv = handle.cvmass()
            found.update(cv=cv, kappa=cp / cv, speed_of_sound=handle.speed_sound())
        if not all(map(math.isfinite, found.values())) or rho <= 0.0:
            raise refusal(StateOutOfRange, f"{literal(self.name)} has no state at {{0}} and {{1}}.", ("p", p), ("T", T))
        found["x"] = math.nan
        return found

    def slopes(self, point: Point, names: Sequence[str]) -> dict[str, tuple[float, ...]]:
        """d(name)/d(p, T) [SI], analytic for the state properties."""
        keys = {
            "h": CoolPropLibrary.iHmass,
            "s": CoolPropLibrary.iSmass,
            "u": CoolPropLibrary.iUmass,
            "rho": CoolPropLibrary.iDmass,
        }
        handle = self._handle()
        self._update(handle, CoolProp.PT_INPUTS, *point)
        found = {"p": (1.0, 0.0), "T": (0.0, 1.0)}
        for name in {"rho" if n == "v" else n for n in names} & keys.keys():
            found[name] = (
                handle.first_partial_deriv(keys[name], CoolPropLibrary.iP, CoolPropLibrary.iT),
                handle.first_partial_deriv(keys[name], CoolPropLibrary.iT, CoolPropLibrary.iP),
            )
        if "v" in names:
            rho = handle.rhomass()
            found["v"] = (-found["rho"][0] / rho**2, -found["rho"][1] / rho**2)
        rest = [name for name in names if name not in found]
        return {**found, **(super().slopes(point, rest) if rest else {})}
