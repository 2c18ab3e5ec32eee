"""Columns of states: rows that repeat the row before are evaluated once, a bad row costs only its own row."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np
import numpy.typing as npt

from service.errors import CaseError
from service.fluids.protocol import Column, State

Rows = npt.NDArray[np.intp]


def as_columns(values: Sequence[Column]) -> tuple[Column, ...]:
    """The inputs as contiguous columns of floats of one length."""
    arrays = np.broadcast_arrays(*(np.atleast_1d(np.asarray(column, dtype=np.float64)) for column in values))
    return tuple(np.ascontiguousarray(array) for array in arrays)


def first_of_each(columns: Sequence[Column]) -> tuple[Rows, Rows]:
    """(rows that differ from the row before, number of its first row for every row)."""
    fresh = np.ones(len(columns[0]), dtype=bool)
    fresh[1:] = False
    for column in columns:
        fresh[1:] |= column[1:] != column[:-1]
    return np.flatnonzero(fresh), np.cumsum(fresh) - 1


def by_rows(
    state: Callable[[tuple[str, ...], tuple[float, ...], tuple[str, ...]], State],
    inputs: tuple[str, ...],
    values: Sequence[Column],
    wanted: tuple[str, ...],
) -> tuple[dict[str, Column], dict[int, CaseError]]:
    """Columns by one scalar state a row, for pairs and properties that have no quicker way."""
    columns = as_columns(values)
    rows, belongs = first_of_each(columns)
    out = np.full((len(wanted), len(rows)), math.nan)
    errors: dict[int, CaseError] = {}
    for place, given in enumerate(zip(*(column[rows].tolist() for column in columns), strict=True)):
        try:
            found = state(inputs, given, wanted).values
        except CaseError as error:
            errors[place] = error
            continue
        out[:, place] = [found.get(name, math.nan) for name in wanted]
    return spread(dict(zip(wanted, out, strict=True)), errors, belongs)


def spread(
    found: dict[str, Column], errors: dict[int, CaseError], belongs: Rows
) -> tuple[dict[str, Column], dict[int, CaseError]]:
    """Results of the rows that differ, dealt out to all rows."""
    if len(belongs) and belongs[-1] + 1 == len(belongs):
        return found, errors
    full = {name: column[belongs] for name, column in found.items()}
    if not errors:
        return full, errors
    return full, {row: errors[place] for row, place in enumerate(belongs.tolist()) if place in errors}
