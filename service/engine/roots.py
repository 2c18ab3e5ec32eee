"""Zeros of functions that may refuse some arguments: one unknown by bracketing, several by damped Newton steps.

A function signals that an argument lies outside of what it covers by raising CaseError; such points are walked around.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq

from service.errors import CaseError

Vector = npt.NDArray[np.float64]
ACCEPTED = 1e-9
"""Largest residual, relative to its scale, that counts as a solution."""
SCAN_POINTS = 48
EDGE_HALVINGS = 40
"""How closely the edge of what the function covers is looked at: a solution may lie on it (saturated air)."""
TINY_STEP = 1e-3
SAMPLES = 400
"""Points tried before a set of equations counts as refused everywhere."""


@dataclass(frozen=True, slots=True)
class Nearest:
    """The best point seen where no zero was found: argument, residual, and why other points were refused."""

    argument: float
    residual: float
    refusal: CaseError | None


@dataclass(slots=True)
class _Watched:
    """Calls the function, answers NaN where it refuses, and remembers the best point."""

    function: Callable[[float], float]
    best: float = math.nan
    residual: float = math.inf
    refusal: CaseError | None = None

    def __call__(self, x: float) -> float:
        try:
            y = self.function(x)
        except CaseError as refusal:
            self.refusal = refusal
            return math.nan
        if abs(y) < self.residual:
            self.best, self.residual = x, abs(y)
        return y


def bracketed_root(
    function: Callable[[float], float],
    lower: float,
    upper: float,
    start: float | None,
    step: float,
    trivial: float = -1.0,
    distance: Callable[[float], float] | None = None,
) -> float | Nearest:
    """A zero of `function` in [lower, upper]: the one nearest to `start` in the sense of the search below.

    From the start (else from the middle) the search widens to both sides until the sign changes; if that fails, the
    whole interval is scanned, upwards. brentq then closes in to the last bits. A sign change across a jump is no
    zero and is passed over; so is a zero of size `trivial` or less, unless there is no other. The order of the search
    is fixed, so that the same case has the same answer. With a `distance`, all the zeros that the search meets are
    compared and the least distant one is taken; one at an infinite distance does not count.
    """
    watched = _Watched(function)
    fallback: float | None = None
    met: dict[float, float] = {}
    for a, b in _brackets(watched, lower, upper, start, step):
        root = a if a == b else _close_in(watched, a, b)
        if root is not None and abs(root) > trivial:
            if distance is None:
                return root
            met[root] = distance(root)
        elif fallback is None:
            fallback = root
    if met:
        nearest = min(met, key=met.__getitem__)
        return nearest if math.isfinite(met[nearest]) else Nearest(nearest, math.inf, watched.refusal)
    if fallback is not None:
        return fallback
    if watched.residual <= ACCEPTED:
        return watched.best
    return Nearest(watched.best, watched.residual, watched.refusal)


def _close_in(watched: _Watched, a: float, b: float) -> float | None:
    def strict(x: float) -> float:
        y = watched(x)
        if math.isnan(y):
            raise _Hole
        return y

    try:
        root: float = brentq(strict, a, b, xtol=1e-14 * max(abs(a), abs(b)) + 1e-300, rtol=4e-16 * 4, maxiter=200)
        settled = abs(strict(root))
    except (_Hole, RuntimeError):
        return None
    return root if settled <= ACCEPTED else (watched.best if watched.residual <= ACCEPTED else None)


class _Hole(Exception):
    """The function refused an argument inside of a bracket."""


def _brackets(
    watched: _Watched, lower: float, upper: float, start: float | None, step: float
) -> Iterator[tuple[float, float]]:
    """Candidate intervals with a sign change, the search's favourite first; (x, x) for an exact hit."""
    finite = math.isfinite(lower) and math.isfinite(upper)
    x0 = start if start is not None else (0.5 * (lower + upper) if finite else 0.0)
    x0 = min(max(x0, lower), upper)
    y0 = watched(x0)
    if y0 == 0.0:
        yield x0, x0
    edges = [(x0, y0), (x0, y0)]
    width = step
    for _ in range(60):
        open_sides = [side for side in (0, 1) if (edges[0][0] > lower, edges[1][0] < upper)[side]]
        if not open_sides:
            break
        for side in open_sides:
            x, _ = edges[side]
            new = max(x - width, lower) if side == 0 else min(x + width, upper)
            there = new, watched(new)
            yield from _between(watched, edges[side], there)
            edges[side] = there
        width *= 1.8
    for grid in _grids(lower, upper, step):
        points = [(x, watched(x)) for x in grid]
        for one, next_one in pairwise(points):
            yield from _between(watched, one, next_one)
    if math.isfinite(upper - lower) and math.isinf(watched.residual):  # nothing but refusals so far
        points = [(x, watched(x)) for x in np.linspace(lower, upper, 16 * SCAN_POINTS).tolist()]
        for one, next_one in pairwise(points):
            yield from _between(watched, one, next_one)


def _grids(lower: float, upper: float, step: float) -> Iterator[Sequence[float]]:
    """Where to look when widening found nothing: evenly, then by decades from small to large."""
    finite = math.isfinite(lower) and math.isfinite(upper)
    if finite:
        yield np.linspace(lower, upper, SCAN_POINTS).tolist()
    if finite and upper < 1e3 * max(lower, TINY_STEP * step):
        return
    decades = (step * 10.0 ** np.arange(-5.0, 5.001, 0.125)).tolist()
    both = [*(-x for x in reversed(decades)), 0.0, *decades]
    if lower > 0.0:  # by decades above the lower end
        top = upper if math.isfinite(upper) else 1e8 * lower
        yield np.geomspace(lower, top, 2 * SCAN_POINTS).tolist()
    else:
        yield [x for x in both if lower <= x <= upper]


def _between(watched: _Watched, one: tuple[float, float], other: tuple[float, float]) -> Iterator[tuple[float, float]]:
    """The interval between two points where the sign changes in it; up to the edge where one of them is refused."""
    (a, ya), (b, yb) = one, other
    if yb == 0.0:
        yield b, b
    elif ya * yb < 0.0:
        yield min(a, b), max(a, b)
    if math.isnan(ya) == math.isnan(yb):
        return
    if math.isnan(ya):
        (a, ya), b = (b, yb), a
    for _ in range(EDGE_HALVINGS):
        middle = 0.5 * (a + b)
        value = watched(middle)
        if math.isnan(value):
            b = middle
        elif ya * value <= 0.0:
            yield min(a, middle), max(a, middle)
            return
        else:
            a, ya = middle, value


def damped_newton(
    function: Callable[[Vector], Vector],
    start: Vector,
    lower: Vector,
    upper: Vector,
    scale: Vector,
    tries: Sequence[float] = (1.0, 1.15, 0.85, 1.5, 0.6),
) -> tuple[Vector, float]:
    """A zero of a vector function near `start`, and the largest residual there (relative, not yet judged).

    Newton steps with a difference Jacobian, halved until the residual falls and the function accepts the point;
    several starts, each the first one stretched, before giving up with the best point seen; where the function accepts
    none of them, the same again from points that it does accept.
    """
    best, best_residual = start, math.inf
    starts: Iterator[Vector] = iter([np.clip(start * stretch, lower, upper) for stretch in tries])
    for _ in range(2):
        for trial in starts:
            point, residual = _newton_from(function, trial, lower, upper, scale)
            if residual < best_residual:
                best, best_residual = point, residual
            if best_residual <= ACCEPTED:
                return best, best_residual
        if math.isfinite(best_residual):
            break
        starts = _accepted(function, start, lower, upper)
    return best, best_residual


def _accepted(
    function: Callable[[Vector], Vector], start: Vector, lower: Vector, upper: Vector, most: int = 4
) -> Iterator[Vector]:
    """Points that the function accepts: bounded variables anywhere in their range, others some decades smaller."""
    random = np.random.default_rng(0)  # a fixed sequence: the same case has the same answer
    bounded = np.isfinite(lower) & np.isfinite(upper)
    low, high = np.where(bounded, lower, 0.0), np.where(bounded, upper, 0.0)
    for _ in range(SAMPLES):
        share = random.random(len(start))
        point = np.where(bounded, low + share * (high - low), np.clip(start * 10.0 ** (-4.0 * share), lower, upper))
        if _attempt(function, point) is not None:
            yield point
            most -= 1
            if not most:
                return


def _norm(residual: Vector) -> float:
    return float(np.max(np.abs(residual))) if np.all(np.isfinite(residual)) else math.inf


def _attempt(function: Callable[[Vector], Vector], point: Vector) -> Vector | None:
    try:
        return function(point)
    except CaseError:
        return None


def _newton_from(
    function: Callable[[Vector], Vector], start: Vector, lower: Vector, upper: Vector, scale: Vector
) -> tuple[Vector, float]:
    point = start
    here = _attempt(function, point)
    if here is None:
        return point, math.inf
    norm = _norm(here)
    for _ in range(60):
        if norm <= 1e-14:
            break
        jacobian = _jacobian(function, point, here, scale, lower, upper)
        step = np.linalg.lstsq(jacobian * scale, -here, rcond=None)[0] * scale
        damping, improved = 1.0, False
        while damping > 1e-4:
            trial = np.clip(point + damping * step, lower, upper)
            there = _attempt(function, trial)
            if there is not None and _norm(there) < norm:
                point, here, improved = trial, there, True
                break
            damping *= 0.5
        if not improved:
            break
        norm = _norm(here)
    return point, norm


def _jacobian(
    function: Callable[[Vector], Vector], point: Vector, here: Vector, scale: Vector, lower: Vector, upper: Vector
) -> Vector:
    columns = []
    for i in range(len(point)):
        step = 1e-7 * max(abs(point[i]), scale[i])
        if point[i] + step > upper[i]:
            step = -step
        moved = point.copy()
        moved[i] += step
        there = _attempt(function, moved)
        if there is None:
            moved[i] = point[i] - step
            step = -step
            there = _attempt(function, moved)
        columns.append(np.zeros_like(here) if there is None else (there - here) / step)
    return np.column_stack(columns)
