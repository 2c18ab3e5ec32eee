"""Bracketed roots of functions that exist on parts of an interval only, as properties of state do."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Iterator
from itertools import pairwise

from scipy.optimize import brentq

from service.errors import CaseError, NotConverged

Function = Callable[[float], float]
Point = tuple[float, float]
"""(x, value of the function there)"""

SETTLED = 1e-6  # a residual of this part of the function's scale is zero


def root(
    function: Function, low: float, at_low: float, high: float, at_high: float, scale: float = math.inf
) -> float | None:
    """x in [low, high] where the function is zero, None where it has one sign at both ends (whose values are given).

    scale: size of the function; a jump over zero that leaves more than a millionth of it is no root.
    R. P. Brent's method, as scipy has it.
    """
    if at_low == 0.0:
        return low
    if at_high == 0.0:
        return high
    if not (math.isfinite(at_low) and math.isfinite(at_high)) or (at_low > 0.0) == (at_high > 0.0):
        return None
    known = {low: at_low, high: at_high}
    try:
        x = float(brentq(lambda x: known[x] if x in known else function(x), low, high, xtol=1e-300, rtol=1e-14))
    except CaseError:  # the function has a gap in between
        return None
    except (RuntimeError, ValueError) as exc:
        raise NotConverged("A property of state did not converge.") from exc
    return x if scale == math.inf or abs(function(x)) <= SETTLED * scale else None


def segments(function: Function, grid: Iterable[float]) -> Iterator[tuple[Point, Point]]:
    """Neighbouring points of a grid between which the function exists; where it ends, the end is sought and used."""
    before: Point | None = None
    failed: float | None = None
    for x in grid:
        try:
            here = (x, function(x))
        except CaseError:
            if before is not None and (edge := _edge(function, before[0], x)) is not None:
                yield before, edge
            before, failed = None, x
            continue
        if before is None and failed is not None:
            before = _edge(function, x, failed)
        if before is not None:
            yield before, here
        before = here


def _edge(function: Function, exists: float, fails: float) -> Point | None:
    """The last point on the way from where the function exists to where it does not; None right at the start."""
    last = None
    for _ in range(30):
        middle = 0.5 * (exists + fails)
        try:
            last = (middle, function(middle))
        except CaseError:
            fails = middle
        else:
            exists = middle
    return last


def first_root(function: Function, grid: Iterable[float], scale: float, reach: list[float]) -> float | None:
    """The lowest root on a grid, also one between a turning point and its neighbours; reach: the values seen."""
    points: list[Point] = []
    for before, here in segments(function, grid):
        if not points or points[-1] != before:
            points.append(before)
        points.append(here)
        if (found := root(function, *before, *here, scale)) is not None:
            return found
    reach += [value for _, value in points]
    finer = with_turning_points(function, points)
    if len(finer) == len(points):
        return None
    for before, here in pairwise(finer):
        if (found := root(function, *before, *here, scale)) is not None:
            return found
    return None


def with_turning_points(function: Function, points: list[Point]) -> list[Point]:
    """The points, and more of them where the function turns just before it would reach zero."""
    more = set(points)
    for left, middle, right in zip(points, points[1:], points[2:], strict=False):
        same_side = (left[1] > 0.0) == (middle[1] > 0.0) == (right[1] > 0.0)
        if same_side and abs(middle[1]) <= min(abs(left[1]), abs(right[1])):
            for part in range(1, 32):
                log_p = left[0] + (right[0] - left[0]) * part / 32.0
                try:
                    more.add((log_p, function(log_p)))
                except CaseError:
                    continue
    return sorted(more)
