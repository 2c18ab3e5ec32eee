"""Blocks of pure algebra whose residuals depend linearly on what is assumed: solved at once, for one row or for all.

Most coupled flows are of this kind (splits, totals, a net power). Whether a block is linear is not guessed: it is
solved as if it were, and a row counts as solved only where its equations then hold.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from service.engine.model import Column, Model, Values
from service.engine.plan import EquationCloses, Iterated, Rearranged

HOLDS = 1e-11
"""Residual relative to the largest term below which the linear answer is the answer."""


def is_algebraic(step: Iterated) -> bool:
    """Whether the block has neither look-ups nor iterations inside."""
    return all(isinstance(s, Rearranged) for s in step.inner) and all(
        isinstance(c, EquationCloses) for c in step.closings
    )


def solve_affine(model: Model, step: Iterated, values: Values, rows: int) -> Column:
    """Solve the block in place, as columns of `rows` values; returns 1.0 where a row's equations hold, 0.0 elsewhere.

    values: floats or columns; everything the block finds becomes a column.
    """
    assumed = step.assumed
    base = np.array([_guess(model, v) for v in assumed])[:, None].repeat(rows, axis=1)
    steps = np.maximum(np.abs(base), 1.0) * 0.5
    with np.errstate(all="ignore"):
        at_base, _ = _residuals(model, step, values, base, rows)
        jacobian = np.empty((rows, len(assumed), len(assumed)))
        for i in range(len(assumed)):
            moved = base.copy()
            moved[i] += steps[i]
            there, _ = _residuals(model, step, values, moved, rows)
            jacobian[:, :, i] = ((there - at_base) / steps[i]).T
        point = base + _solve(jacobian, -at_base.T, rows).T
        for _ in range(2):  # a second pass takes out the round-off of the first
            off, scale = _residuals(model, step, values, point, rows)
            point = point + _solve(jacobian, -off.T, rows).T
        off, scale = _residuals(model, step, values, point, rows)
        holds = np.all(np.abs(off) <= HOLDS * scale, axis=0) & np.all(np.isfinite(point), axis=0)
    holds &= ~_trivial(model, assumed, point)
    lower = np.array([model.variables[v].lower for v in assumed])[:, None]
    upper = np.array([model.variables[v].upper for v in assumed])[:, None]
    return np.asarray(holds & np.all((point >= lower) & (point <= upper), axis=0), dtype=float)


def _trivial(model: Model, assumed: Sequence[int], point: Column) -> npt.NDArray[np.bool_]:
    """Rows in which nothing flows: a zero that many balances have, to be looked into by a search."""
    trivial = np.zeros(point.shape[1], dtype=bool)
    for variable, column in zip(assumed, point, strict=True):
        v = model.variables[variable]
        if v.zero_is_trivial:
            trivial |= np.abs(column) <= 1e-9 * v.scale
    return trivial


def _guess(model: Model, variable: int) -> float:
    v = model.variables[variable]
    for candidate in (v.near, v.start):
        if candidate:
            return candidate
    return 0.5 * (v.lower + v.upper) if math.isfinite(v.lower) and math.isfinite(v.upper) else v.scale


def _residuals(model: Model, step: Iterated, values: Values, point: Column, rows: int) -> tuple[Column, Column]:
    for variable, column in zip(step.assumed, point, strict=True):
        values[variable] = column
    for inner in step.inner:
        assert isinstance(inner, Rearranged)
        values[inner.variable] = model.equations[inner.equation].solve(inner.variable, values)
    off, scale = [], []
    for closing in step.closings:
        assert isinstance(closing, EquationCloses)
        equation = model.equations[closing.equation]
        off.append(np.broadcast_to(equation.residual(values), (rows,)))
        scale.append(np.broadcast_to(equation.scale(values), (rows,)))
    return np.array(off, dtype=float), np.array(scale, dtype=float)


def _solve(jacobian: Column, right: Column, rows: int) -> Column:
    """Row-wise solution of the linear systems; NaN where one is singular."""
    finite = np.logical_and(np.isfinite(jacobian).all(axis=(1, 2)), np.isfinite(right).all(axis=1))
    determinant = np.zeros(rows)
    determinant[finite] = np.linalg.det(jacobian[finite])
    good = np.flatnonzero(determinant)
    out = np.full((rows, jacobian.shape[1]), math.nan)
    if len(good):
        out[good] = np.linalg.solve(jacobian[good], right[good][:, :, None])[:, :, 0]
    return out
