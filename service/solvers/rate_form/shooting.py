"""An unknown constant, found so that a target is met: the whole integration is one evaluation.

The target's miss is bracketed first (within `between`, or outwards from `near` or a usual magnitude), then closed by
Brent's method. Where an integration has to stop before the target's time, its value there tells which way to go.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from itertools import pairwise

from scipy.optimize import brentq

from service.balance.case import Case, Ending, Quantity, Target
from service.balance.properties import CONTENT, RELATION, STATE, STREAM, TRANSFER, WALL
from service.errors import CaseError, Issue, NoSolution, OverSpecified, TimeBudgetExceeded, UnderSpecified
from service.fluids.protocol import Fluid
from service.solvers.rate_form.assembly import assemble
from service.solvers.rate_form.history import kind_of
from service.solvers.rate_form.integrate import RTOL
from service.solvers.rate_form.run import Done, integrate

EXPANSIONS = 14
ROOT = 1e-10
SEARCHING = 1e-5
DOUBT = 1e-3
"""Relative tolerances: of the root, and of the integrations that only look for a bracket."""

FIRST_GUESS = {"power": 1e4, "temperature": 350.0}


def solve(case: Case, fluids: Mapping[str, Fluid | None], deadline: float | None) -> Done:
    """The case integrated, with its unknown constant found where it has one."""
    case, conditions_from_targets = _targets_that_end(case)
    _, reader = assemble(case, fluids, {}, deadline)
    unknowns = list(reader.unknowns.values())
    targets = [] if conditions_from_targets else list(case.targets)
    if len(unknowns) > len(targets):
        return integrate(case, fluids, {}, deadline)  # says which one is open
    if len(targets) > len(unknowns):
        text = f"There are {len(targets)} targets, but {len(unknowns)} unknown constants to meet them with."
        raise OverSpecified(text, [Issue(text, targets[-1].of, 'Ask for a constant with "?", or drop a target.')])
    if not targets:
        return integrate(case, fluids, {}, deadline)
    if len(targets) > 1:
        text = "One unknown constant and one target can be solved for; there are more."
        raise OverSpecified(text, [Issue(text, targets[1].of, "Solve for one after the other.")])
    return _Shot(case, fluids, deadline, unknowns[0], targets[0]).solve()


def _targets_that_end(case: Case) -> tuple[Case, bool]:
    """A target at the end, where the time is what is asked for, is a condition."""
    time = case.until.time
    if time is None or not time.wanted or case.until.conditions or len(case.targets) != 1:
        return case, False
    target = case.targets[0]
    if target.at is not None:
        return case, False
    return replace(case, until=Ending(time, ((target.of, target.value),))), True


class _Shot:
    """The search for one constant."""

    def __init__(
        self,
        case: Case,
        fluids: Mapping[str, Fluid | None],
        deadline: float | None,
        unknown: Quantity,
        target: Target,
    ) -> None:
        self.case, self.fluids, self.deadline = case, fluids, deadline
        self.unknown, self.target = unknown, target
        self.trials = 0
        self.misses: dict[float, float] = {}
        self.done: dict[float, Done] = {}
        value = target.value.value
        if value is None:
            text = f"The target of {target.of} has no value."
            raise UnderSpecified(text, [Issue(text, target.of, "Give one.", target.pointer)])
        self.goal = value
        self.low, self.high = _bounds(unknown)

    def solve(self) -> Done:
        a, b = self._bracket()
        root = float(brentq(self.miss, a, b, xtol=ROOT * max(abs(a), abs(b)), rtol=ROOT))
        done = self.done.get(root) if self.target.at is None else None
        if done is None:
            done = integrate(self.case, self.fluids, {self.unknown.address: root}, self.deadline)
        done.trials = self.trials + 1
        stopped_early = done.course.ended_by == "stop" and (self.target.at is None or done.course.t < self.target.at)
        if stopped_early:
            text = f"No {self.unknown.address} meets the target: with the nearest one, {done.course.text}."
            raise NoSolution(text, [Issue(text, self.unknown.address, "Look at the target and its time.")])
        return done

    def miss(self, value: float, rtol: float = RTOL) -> float:
        """Target's quantity minus its goal [SI], with the unknown at a value [SI]."""
        if rtol == RTOL and value in self.misses:
            return self.misses[value]
        self.trials += 1
        try:
            done = integrate(self.case, self.fluids, {self.unknown.address: value}, self.deadline, self.target.at, rtol)
        except TimeBudgetExceeded as error:
            text = f"{error.detail} This was trial {self.trials} of the search for {self.unknown.address}."
            raise TimeBudgetExceeded(text, error.issues) from error
        kind_of(done.plant, self.target.of)
        moment = done.plant.moment(done.course.t, done.course.y)
        found = done.plant.value(self.target.of, moment, done.course.y)
        if not math.isfinite(found):
            text = f"{self.target.of} has no meaning where the target is set."
            raise NoSolution(text, [Issue(text, self.target.of, "Choose another quantity.", self.target.pointer)])
        if rtol == RTOL:
            self.misses[value] = found - self.goal
            self.done = {value: done}
        return found - self.goal

    def _try(self, value: float) -> float:
        """The miss, NaN where the case cannot even begin with this value."""
        try:
            return self.miss(value, SEARCHING)
        except TimeBudgetExceeded:
            raise
        except CaseError:
            return math.nan

    def _bracket(self) -> tuple[float, float]:
        """Two values with misses of opposite sign."""
        if self.unknown.between is not None:
            a, b = self.unknown.between
            fa, fb = self.miss(a), self.miss(b)
            if fa * fb > 0.0:
                self._refuse(a, b, fa, fb)
            return a, b
        x = self.unknown.near
        if x is None:
            x = min(max(FIRST_GUESS.get(self.unknown.kind, _scale(self.unknown)), self.low), self.high)
        x = x or 1.0
        signed = self.low < 0.0
        return self._outwards(x, signed)

    def _outwards(self, x: float, signed: bool) -> tuple[float, float]:
        """From x up and down in growing ratios; where both signs are possible from zero as well."""
        tried: list[tuple[float, float]] = []
        candidates = _candidates(x, signed)
        for value in candidates:
            if not self.low <= value <= self.high:
                continue
            f = self._try(value)
            if not math.isfinite(f):
                continue
            tried.append((value, f))
            tried.sort()
            for (a, fa), (b, fb) in pairwise(tried):
                if fa * fb <= 0.0:
                    return self._firm(a, fa, b, fb)
        if len(tried) < 2:
            text = f"No value of {self.unknown.address} was found with which the case can be integrated."
            raise NoSolution(text, [Issue(text, self.unknown.address, "Give `between`.")])
        self._refuse(tried[0][0], tried[-1][0], tried[0][1], tried[-1][1])
        raise AssertionError

    def _firm(self, a: float, fa: float, b: float, fb: float) -> tuple[float, float]:
        """The bracket; where a rough miss is too small to trust its sign, it is found at full accuracy."""
        doubt = DOUBT * max(abs(fa), abs(fb))
        if min(abs(fa), abs(fb)) > doubt:
            self.misses.update({a: fa, b: fb})
            return a, b
        for widen in (0.0, 1e-5, 1e-3):
            low, high = a - widen * (b - a), b + widen * (b - a)
            if self.miss(low) * self.miss(high) <= 0.0:
                return low, high
        return a, b

    def _refuse(self, a: float, b: float, fa: float, fb: float) -> None:
        kind = self.target.value.kind
        text = (
            f"No {self.unknown.address} between {{0}} and {{1}} meets the target: {self.target.of} comes out as {{2}} "
            "and {3}, wanted is {4}."
        )
        amounts = ((self.unknown.kind, a), (self.unknown.kind, b), (kind, self.goal + fa), (kind, self.goal + fb),
                   (kind, self.goal))  # fmt: skip
        plain = text.format(*(f"{value:.6g}" for _, value in amounts))
        hint = "Give `between` with bounds on both sides of the value sought, or another target."
        raise NoSolution(plain, [Issue(text, self.unknown.address, hint, amounts=amounts)])


def _candidates(x: float, signed: bool) -> list[float]:
    """Values to try: x, then outwards from it."""
    out = [x]
    if signed:
        out.append(0.0)
    ratio = 3.0
    for k in range(1, EXPANSIONS):
        out += [x * ratio**k, x / ratio**k]
        if signed:
            out.append(-x * ratio ** (k - 1))
    return out


def _traits(unknown: Quantity) -> tuple[float, float, float]:
    name = unknown.address.rpartition(".")[2]
    of_wall = ".wall." in unknown.address
    for table in (WALL,) if of_wall else (RELATION, TRANSFER, STATE, STREAM, CONTENT):
        if name in table and table[name].kind == unknown.kind:
            trait = table[name]
            return trait.scale, trait.lower, trait.upper
    return 1.0, -math.inf, math.inf


def _bounds(unknown: Quantity) -> tuple[float, float]:
    _, low, high = _traits(unknown)
    if unknown.kind == "mass_flow":
        low = max(low, 0.0)
    return low, high


def _scale(unknown: Quantity) -> float:
    return _traits(unknown)[0]
