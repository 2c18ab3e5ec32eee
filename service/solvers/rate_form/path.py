"""The solution in time as pieces, each a polynomial over one accepted step."""

from __future__ import annotations

import bisect
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TypeAlias

from service.solvers.rate_form.plant import Vector

Polynomial: TypeAlias = Callable[[float], Vector]


@dataclass(frozen=True, slots=True)
class Piece:
    """One step from t0 to t1 [s]. within: the middle of the interval between jumps of the tables that it belongs to."""

    t0: float
    t1: float
    y: Polynomial
    within: float


@dataclass(slots=True)
class Path:
    """All pieces, in order of time."""

    pieces: list[Piece] = field(default_factory=list)
    starts: list[float] = field(default_factory=list)

    def add(self, piece: Piece) -> None:
        self.pieces.append(piece)
        self.starts.append(piece.t0)

    def at(self, t: float) -> tuple[Vector, float]:
        """(y, within) at a time [s] of the path; at a joint those of the piece that begins there."""
        piece = self.pieces[max(bisect.bisect_right(self.starts, t) - 1, 0)]
        return piece.y(min(max(t, piece.t0), piece.t1)), piece.within

    @property
    def end(self) -> float:
        return self.pieces[-1].t1 if self.pieces else 0.0
