"""What a rule may look at: the solved case, with the look-ups that rules need again and again."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from service.balance.builder import BuiltCase
from service.balance.case import Relation, Stream
from service.balance.solution import Solution, StreamState
from service.engine.execute import Run
from service.fluids.protocol import Fluid


@dataclass(frozen=True, slots=True)
class Context:
    """A solved case, read-only."""

    built: BuiltCase
    done: Run
    solution: Solution

    def value(self, address: str) -> float | None:
        """The value [SI] of an address; None where it is not known."""
        number = self.built.model.index.get(address)
        if number is None or not math.isfinite(self.done.values[number]):
            return None
        return float(self.done.values[number])

    def kind(self, address: str) -> str:
        return self.built.kinds[self.built.model.index[address]]

    def states(self) -> Iterator[tuple[StreamState, Fluid]]:
        """Every state that was looked up, with its fluid."""
        for state in self.solution.states:
            fluid = self.built.fluids.get(state.stream.partition(".")[0])
            if fluid is not None and state.phase:
                yield state, fluid

    def state(self, stream: str) -> StreamState | None:
        return next((s for s in self.solution.states if s.stream == stream and s.phase), None)

    def machines(self) -> Iterator[tuple[Relation, StreamState, StreamState]]:
        """Efficiency relations with the states at both ends."""
        for relation in self.built.case.relations:
            if relation.kind in ("isentropic_efficiency", "polytropic_efficiency"):
                start, end = (self.state(relation.streams[role]) for role in ("from", "to"))
                if start is not None and end is not None:
                    yield relation, start, end

    def vents(self) -> Iterator[tuple[Relation, Stream, StreamState]]:
        """Streams through a restriction into the surroundings, with their upstream state."""
        streams = {s.id: s for s in self.built.case.streams}
        for relation in self.built.case.relations:
            if relation.kind == "restriction":
                stream = streams[relation.streams["stream"]]
                state = self.state(stream.id)
                if stream.target is None and state is not None:
                    yield relation, stream, state
