"""What a rule may look at: the solved case, with the look-ups that rules need again and again; and what it finds."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import TypeVar

from service.balance.builder import BuiltCase
from service.balance.case import Relation, Stream, Transfer
from service.balance.solution import SignalWord, Solution, StreamState
from service.engine.execute import Run
from service.fluids.protocol import Fluid

Amounts = tuple[tuple[str, float], ...]
Item = TypeVar("Item")


@dataclass(frozen=True, slots=True)
class Finding:
    """What a rule found. of: address or item; amounts: (kind, value [SI]) for {0}, {1} in the message.

    word: the signal word, where the rule has several; None: its first.
    """

    message: str
    of: str
    amounts: Amounts = ()
    word: SignalWord | None = None


@dataclass(frozen=True, slots=True)
class Machine:
    """A change of pressure that shaft or efficiency belongs to: `name` is the relation, or else the boundary."""

    name: str
    start: StreamState
    end: StreamState

    @property
    def compresses(self) -> bool:
        return self.end.properties["p"] > self.start.properties["p"]


@dataclass(frozen=True, slots=True)
class Opening:
    """A stream through a restriction. p2: the pressure behind it [Pa], None where it is not known."""

    relation: Relation
    stream: Stream
    state: StreamState
    fluid: Fluid
    p2: float | None


def known(state: StreamState, name: str) -> float | None:
    """A property of a state [SI]; None where it is not known or has no meaning."""
    value = state.properties.get(name, math.nan)
    return value if math.isfinite(value) else None


def told_once(items: Iterable[Item], key: Callable[[Item], object]) -> Iterator[tuple[Item, list[Item]]]:
    """The first item of each key with the others that share it: what runs through several streams is told once."""
    groups: dict[object, list[Item]] = {}
    for item in items:
        groups.setdefault(key(item), []).append(item)
    for first, *others in groups.values():
        yield first, others


def also(others: Iterable[StreamState]) -> str:
    """` (so are b, c and 3 more)`: the other states that a message holds for."""
    names = [state.stream for state in others]
    if not names:
        return ""
    more = f" and {len(names) - 2} more" if len(names) > 3 else ""
    return f" (so {'are' if len(names) > 1 else 'is'} {', '.join(names[: 2 if more else 3])}{more})"


@dataclass(frozen=True)
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

    @cached_property
    def streams(self) -> dict[str, Stream]:
        return {stream.id: stream for stream in self.built.case.streams}

    @cached_property
    def _states(self) -> dict[str, StreamState]:
        return {state.stream: state for state in self.solution.states if state.phase}

    def state(self, stream: str) -> StreamState | None:
        """The state of a stream, or of a content at an end (`gas.final`), where it was looked up."""
        return self._states.get(stream)

    def fluid(self, item: str) -> Fluid | None:
        """The property model of a stream, of a content, or of one of its states."""
        return self.built.fluids.get(item.partition(".")[0])

    @cached_property
    def states(self) -> list[tuple[StreamState, Fluid]]:
        """Every state that was looked up, with its fluid."""
        pairs = ((state, self.fluid(name)) for name, state in self._states.items())
        return [(state, fluid) for state, fluid in pairs if fluid is not None]

    @cached_property
    def inflows(self) -> dict[str, list[StreamState]]:
        """Boundary → the states that enter it."""
        return self._gathered(lambda stream: stream.target)

    @cached_property
    def outflows(self) -> dict[str, list[StreamState]]:
        """Boundary → the states that leave it."""
        return self._gathered(lambda stream: stream.source)

    def _gathered(self, end: Callable[[Stream], str | None]) -> dict[str, list[StreamState]]:
        found: dict[str, list[StreamState]] = {boundary.id: [] for boundary in self.built.case.boundaries}
        for stream in self.built.case.streams:
            boundary, state = end(stream), self.state(stream.id)
            if boundary is not None and state is not None:
                found[boundary].append(state)
        return found

    @cached_property
    def fed(self) -> list[tuple[StreamState, list[StreamState]]]:
        """Every outflow of a boundary with the inflows of the same fluid there."""
        return [
            (state, [s for s in self.inflows[boundary] if s.fluid == state.fluid])
            for boundary, leaving in self.outflows.items()
            for state in leaving
        ]

    @cached_property
    def _transfers(self) -> dict[str | None, list[Transfer]]:
        found: dict[str | None, list[Transfer]] = {}
        for transfer in self.built.case.transfers:
            for boundary in {transfer.source, transfer.target}:
                found.setdefault(boundary, []).append(transfer)
        return found

    def transfers_at(self, boundary: str, *kinds: str) -> list[Transfer]:
        """The transfers of these kinds that cross a boundary."""
        return [t for t in self._transfers.get(boundary, ()) if t.kind in kinds]

    @cached_property
    def machines(self) -> list[Machine]:
        """Efficiency relations, and boundaries that work crosses, with the states at both ends."""
        found: dict[tuple[str, str], Machine] = {}
        for relation in self.built.case.relations:
            if relation.kind in ("isentropic_efficiency", "polytropic_efficiency"):
                self._add_machine(found, relation.id, *(self.state(relation.streams[r]) for r in ("from", "to")))
        work = [t for t in self.built.case.transfers if t.kind in ("shaft_work", "electrical_work")]
        for boundary in {b: None for t in work for b in (t.source, t.target) if b is not None}:
            for end in self.outflows[boundary]:
                starts = [s for s in self.inflows[boundary] if s.fluid == end.fluid]
                if len(starts) == 1:
                    self._add_machine(found, boundary, starts[0], end)
        return list(found.values())

    @staticmethod
    def _add_machine(
        found: dict[tuple[str, str], Machine], name: str, start: StreamState | None, end: StreamState | None
    ) -> None:
        if start is not None and end is not None and {"p", "T"} <= start.properties.keys() & end.properties.keys():
            found.setdefault((start.stream, end.stream), Machine(name, start, end))

    @cached_property
    def openings(self) -> list[Opening]:
        """Streams through a restriction, with the state before it."""
        found = []
        for relation in self.built.case.relations:
            if relation.kind == "restriction":
                stream = self.streams[relation.streams["stream"]]
                state, fluid = self.state(stream.id), self.fluid(stream.id)
                if state is not None and fluid is not None:
                    p2 = self.value(f"{relation.id}.downstream_pressure")
                    found.append(Opening(relation, stream, state, fluid, p2))
        return found

    @property
    def vents(self) -> list[Opening]:
        """The openings that lead to the surroundings."""
        return [opening for opening in self.openings if opening.stream.target is None]
