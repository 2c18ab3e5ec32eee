"""The steps in time.

The integrator is scipy's DOP853: explicit, of order 8 with a polynomial of order 7 over each step, so that few flashes
are needed at tight tolerances. Where its own stages tell that stability and not accuracy limits the step (Hairer's
test: h|λ| > 6.1 over fifteen steps), scipy's BDF takes over. The pair does what LSODA does, but keeps no state outside
of itself, so that threads may integrate at once, and every step passes through our hands: time budget, events, and
states that do not exist. The integration begins anew at each point of a table, where a phase appears or disappears, and
where a flow chokes: the rates jump or bend there, and no step goes over it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np
from scipy.integrate import BDF, DOP853
from scipy.optimize import brentq

from service.errors import CaseError, Issue, NotConverged, TimeBudgetExceeded
from service.solvers.rate_form.events import Watch, freezing, lacking
from service.solvers.rate_form.path import Path, Piece
from service.solvers.rate_form.plant import Moment, OutOfTime, Plant, Vector

RTOL = 1e-8
ATOL = 1e-10
"""Of the scaled quantities."""

STIFF_AT, STIFF_STEPS, CALM_STEPS = 6.1, 15, 6
MOST_STEPS = 200_000
MOST_FAILURES = 80
SMALLEST = 1e-9  # of the time reached: a step so small leads no further
MOST_NOTES, MOST_BENDS = 40, 300


@dataclass(slots=True)
class Course:
    """An integration that has come to its end. ended_by: the time, a condition, or a stop (with its text)."""

    path: Path
    t: float
    y: Vector
    ended_by: Literal["time", "condition", "stop"] = "time"
    text: str = ""
    notes: list[tuple[float, str]] = field(default_factory=list)
    steps: int = 0
    failures: int = 0
    stiff_from: float | None = None
    evaluations: int = 0


@dataclass(frozen=True, slots=True)
class Happening:
    """Something that happens at a time [s] within a step; see `Watch`."""

    t: float
    ending: Literal["", "condition", "stop"]
    what: Watch | str
    bends: bool


class Integration:
    """One integration of a plant from 0 to `end` [s], or to the first watch that ends it."""

    def __init__(
        self, plant: Plant, watched: Sequence[Watch], end: float, breaks: Sequence[float], rtol: float = RTOL
    ) -> None:
        self.plant, self.watched, self.end, self.rtol = plant, watched, end, rtol
        self.breaks = [t for t in sorted(set(breaks)) if 0.0 < t < end] + [end]
        self.course = Course(Path(), 0.0, plant.start())
        self.stiff = False
        self.signs = [0, 0]
        self.step_size: float | None = None
        self.bound: float | None = None
        self.bends = 0

    def run(self) -> Course:
        """Raises TimeBudgetExceeded, NotConverged; a state that does not exist ends it with a stop."""
        course = self.course
        try:
            begin = 0.0
            for stop in self.breaks:
                self.plant.within = 0.5 * (begin + stop)
                if self._segment(stop):
                    break
                begin = stop
        except OutOfTime:
            raise TimeBudgetExceeded(
                f"The time budget is used up: the integration had reached t = {course.t:.6g} s of {self.end:.6g} s.",
                [
                    Issue(
                        "The time budget is used up: the integration had reached {0} of {1}.",
                        "until.time", "Ask for a shorter time or a condition that is reached, or check the sizes.",
                        amounts=(("time", course.t), ("time", self.end)),
                    )
                ],
            ) from None  # fmt: skip
        course.evaluations = self.plant.evaluations
        return course

    # -- one interval between jumps --------------------------------------------------------------------------------

    def _segment(self, stop: float) -> bool:
        """Integrate to `stop`; True where something has ended the whole."""
        course, plant = self.course, self.plant
        before: list[float] | None = None
        label: list[str] = []
        solver: Any = None
        while course.t < stop:
            if course.steps >= MOST_STEPS:
                raise NotConverged(f"After {MOST_STEPS} steps the integration had reached t = {course.t:.6g} s.")
            try:
                if before is None:
                    moment = plant.moment(course.t, course.y)
                    before, label = self._gaps(moment, course.y), self._labels(moment)
                    if course.t == 0.0 and self._already(moment, before):
                        return True
                if solver is not None and solver.status == "finished":  # up to a bend: begin anew after it
                    solver = None
                if solver is None:
                    solver = self._solver(stop)
                message = solver.step()
                if solver.status == "failed":
                    raise NotConverged(f"The step size became too small: {message}.")
                moment = plant.moment(solver.t, solver.y)
                after, now = self._gaps(moment, solver.y), self._labels(moment)
                polynomial = solver.dense_output()
            except CaseError as error:
                if self._give_up(solver, stop, error):
                    return True
                solver = None
                continue
            piece = Piece(course.t, float(solver.t), polynomial, plant.within)
            happenings = self._happenings(piece, before, after, label, now)
            if (bend := self._bend(piece, happenings)) is not None:
                self.bound, self.step_size, solver = bend, bend - course.t, None
                continue
            course.steps += 1
            if self._something_ends(piece, happenings):
                return True
            course.path.add(piece)
            course.t, course.y = piece.t1, np.array(solver.y)
            before, label = after, now
            self.step_size = float(solver.h_abs)
            if not self.stiff and self._is_stiff(solver):
                self.stiff, solver = True, None
                course.stiff_from = course.t
        return False

    def _solver(self, stop: float) -> Any:
        course = self.course
        if self.bound is not None and course.t < self.bound < stop:
            stop = self.bound
        first = None if self.step_size is None else min(self.step_size, stop - course.t)
        kind = BDF if self.stiff else DOP853
        atol = np.full(self.plant.size, ATOL * self.rtol / RTOL)
        return kind(self.plant.slope, course.t, course.y, stop, rtol=self.rtol, atol=atol, first_step=first)

    def _is_stiff(self, solver: Any) -> bool:
        """Hairer's test for DOP853 on the last step, over what drives the rates."""
        core = slice(0, self.plant.core)
        h = solver.t - solver.t_old
        last = solver.y_old + h * (solver.A[11, :11] @ solver.K[:11])
        moved = float(np.linalg.norm((solver.y - last)[core]))
        bent = float(np.linalg.norm((solver.K[12] - solver.K[11])[core]))
        if moved > 0.0 and h * bent > STIFF_AT * moved:
            self.signs = [self.signs[0] + 1, 0]
        else:
            self.signs[1] += 1
            if self.signs[1] >= CALM_STEPS:
                self.signs = [0, 0]
        return self.signs[0] >= STIFF_STEPS

    def _give_up(self, solver: Any, stop: float, error: CaseError) -> bool:
        """After a state that does not exist: go on with a smaller step, or True where there is no way on."""
        course = self.course
        course.failures += 1
        tried = self.step_size if solver is None else float(solver.h_abs)
        tried = min(tried if tried is not None else 1e-3 * (stop - course.t), stop - course.t)
        self.step_size = 0.2 * tried
        lost = self.step_size < SMALLEST * max(course.t, 1e-6) or course.failures > MOST_FAILURES
        if lost:
            reason = freezing(self.plant, self.plant.moment(course.t, course.y))
            self._end("stop", course.t, course.y, reason or f"no state is found beyond it ({error.detail.rstrip('.')})")
        return lost

    # -- events ------------------------------------------------------------------------------------------------------

    def _gaps(self, moment: Moment, y: Vector) -> list[float]:
        return [watch.gap(moment, y) for watch in self.watched]

    def _labels(self, moment: Moment) -> list[str]:
        return [held.state.phase for held in moment.held]

    def _already(self, moment: Moment, gaps: Sequence[float]) -> bool:
        """Whether something ends the case before it begins."""
        if missing := lacking(self.plant, moment):
            self._end("stop", 0.0, self.course.y, missing)
            return True
        for watch, gap in zip(self.watched, gaps, strict=True):
            if watch.ending == "condition" and gap == 0.0:
                self._end("condition", 0.0, self.course.y, watch.text(moment, self.course.y))
                return True
        return False

    def _happenings(
        self, piece: Piece, before: Sequence[float], after: Sequence[float], label: list[str], now: list[str]
    ) -> list[Happening]:
        """What happens within a step, in order of time."""
        found = []
        for i, watch in enumerate(self.watched):
            t = self._crossing(piece, i, before[i], after[i])
            if t is not None:
                found.append(Happening(t, watch.ending, watch, watch.bends))
        if label != now:
            found += self._phase_changes(piece, label, now)
        return sorted(found, key=lambda happening: happening.t)

    def _bend(self, piece: Piece, happenings: Sequence[Happening]) -> float | None:
        """Where a step goes over a bend of the rates, so that it has to end there; None where it may stand."""
        margin = 1e-4 * (piece.t1 - piece.t0)
        if self.bends >= MOST_BENDS or margin < SMALLEST * piece.t1:
            return None
        for happening in happenings:
            if happening.bends and piece.t0 + margin < happening.t < piece.t1 - margin:
                self.bends += 1
                return happening.t
        return None

    def _something_ends(self, piece: Piece, happenings: Sequence[Happening]) -> bool:
        """Notes what happens within a step, and ends the integration at the first thing that ends it."""
        for happening in happenings:
            t, y = happening.t, piece.y(happening.t)
            what = happening.what
            text = what if isinstance(what, str) else what.text(self.plant.moment(t, y), y)
            if happening.ending:
                self.course.path.add(Piece(piece.t0, t, piece.y, piece.within))
                self._end(happening.ending, t, y, text)
                return True
            self._note(t, text)
        return False

    def _end(self, by: Literal["condition", "stop"], t: float, y: Vector, text: str) -> None:
        course = self.course
        course.ended_by, course.t, course.y, course.text = by, t, y, text
        self._note(t, text)

    def _note(self, t: float, text: str) -> None:
        notes = self.course.notes
        if len(notes) < MOST_NOTES:
            notes.append((t, text))
        elif len(notes) == MOST_NOTES:
            notes.append((t, "further events are not listed"))

    def _crossing(self, piece: Piece, i: int, before: float, after: float) -> float | None:
        """When the gap of a watch changes its sign within a step: also there and back, told by the middle."""
        if not (math.isfinite(before) and math.isfinite(after)) or before == 0.0:
            return None

        def gap(t: float) -> float:
            y = piece.y(t)
            return self.watched[i].gap(self.plant.moment(t, y), y)

        t1 = piece.t1
        if before * after > 0.0:
            try:
                middle = 0.5 * (piece.t0 + piece.t1)
                if not before * gap(middle) < 0.0:
                    return None
                t1 = middle
            except CaseError:
                return None
        elif after == 0.0:
            return t1
        try:
            return float(brentq(gap, piece.t0, t1, xtol=1e-13 * max(t1, 1e-3), rtol=1e-14))
        except (CaseError, ValueError):
            return t1

    def _phase_changes(self, piece: Piece, label: list[str], now: list[str]) -> list[Happening]:
        """When and into what a vessel's phase changes within a step."""
        found = []
        for n, (old, new) in enumerate(zip(label, now, strict=True)):
            if old == new:
                continue
            low, high = piece.t0, piece.t1
            while high - low > 1e-12 * max(high, 1e-3):
                middle = 0.5 * (low + high)
                if not low < middle < high:
                    break
                y = piece.y(middle)
                if self.plant.moment(middle, y).held[n].state.phase == old:
                    low = middle
                else:
                    high = middle
            missing = lacking(self.plant, self.plant.moment(high, piece.y(high)))
            words = f"{self.plant.vessels[n].id}: {old.replace('_', ' ')} → {new.replace('_', ' ')}"
            found.append(Happening(high, "stop" if missing else "", missing or words, True))
        return found
