"""Who is connected to whom: which fluid runs in each stream, and which streams share a mass balance."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import NamedTuple

from service.balance.case import STATE_PROPERTIES, Case, Stream
from service.errors import Issue, SchemaViolation
from service.fluids.protocol import Fluid


@dataclass(frozen=True, slots=True)
class Circuit:
    """One mass balance: the streams of one substance on one side of a boundary.

    component: "" for the whole mass, "dry air" or "water" where humid air takes part.
    """

    boundary: str
    label: str
    component: str
    inflows: tuple[int, ...]
    outflows: tuple[int, ...]

    @property
    def name(self) -> str:
        side = f", {self.label}" if self.label else ""
        what = f"{self.component} balance" if self.component else "mass balance"
        return f"{what} of {self.boundary}{side}"


class End(NamedTuple):
    """Where a stream meets a boundary: its number, the side label there, and whether it enters."""

    number: int
    stream: Stream
    label: str | None
    enters: bool


def fluid_keys(case: Case) -> dict[str, str | None]:
    """Fluid of each stream as the case names it; where it names none, the only one that its side allows.

    Raises SchemaViolation where several fluids are possible. None is left where no stream of a network names one.
    """
    found: dict[str, str | None] = {s.id: s.fluid for s in case.streams}
    ends = ends_by_boundary(case)
    held: dict[str, set[str]] = {b.id: set() for b in case.boundaries}
    for content in case.contents:
        held[content.boundary].add(content.fluid)
    changed = True
    while changed:
        changed = False
        for stream in case.streams:
            if found[stream.id] is None:
                choices = _possible(ends, held, stream, found)
                if len(choices) == 1:
                    found[stream.id] = choices.pop()
                    changed = True
    issues = []
    for stream in case.streams:
        if found[stream.id] is None and (choices := _possible(ends, held, stream, found)):
            listed = ", ".join(sorted(choices))
            issues.append(
                Issue(f"Stream {stream.id} names no fluid, and its boundary has several: {listed}.", stream.id,
                      "Give `fluid`, or `side` where each side has one fluid.", f"{stream.pointer}")
            )  # fmt: skip
    if issues:
        raise SchemaViolation(issues[0].detail, issues)
    return found


def ends_by_boundary(case: Case) -> dict[str, list[End]]:
    """For each boundary the streams that end there, those that enter first."""
    ends: dict[str, list[End]] = {b.id: [] for b in case.boundaries}
    for number, stream in enumerate(case.streams):
        if stream.target is not None:
            ends[stream.target].append(End(number, stream, stream.side_target, True))
    for number, stream in enumerate(case.streams):
        if stream.source is not None:
            ends[stream.source].append(End(number, stream, stream.side_source, False))
    return ends


def _possible(
    ends: Mapping[str, list[End]], held: Mapping[str, set[str]], stream: Stream, found: Mapping[str, str | None]
) -> set[str]:
    """Fluids that neighbours suggest: of the same side where it has any, else of the boundary; one end may decide."""
    for same_side in (True, False):
        by_end = []
        for boundary, label in ((stream.source, stream.side_source), (stream.target, stream.side_target)):
            if boundary is None:
                continue
            choices = set() if same_side else set(held[boundary])
            for end in ends[boundary]:
                key = found[end.stream.id]
                if key is not None and (not same_side or (label is not None and label == end.label)):
                    choices.add(key)
            by_end.append(choices)
        decided = [choices for choices in by_end if len(choices) == 1]
        if decided:
            return set(decided[0])
        if any(by_end):
            return set().union(*by_end)
    return set()


def circuits(case: Case, fluids: Mapping[str, Fluid | None]) -> list[Circuit]:
    """Every mass balance of the case, boundary by boundary."""
    result = []
    for boundary, ends in ends_by_boundary(case).items():
        humid = any(_kind(fluids[end.stream.id]) == "humid_air" for end in ends)
        groups: dict[str, list[End]] = {}
        for end in ends:
            groups.setdefault(_family(fluids[end.stream.id], humid), []).append(end)
        for members in groups.values():
            for label, part in _by_side(members).items():
                result += _balances(fluids, boundary, label, part)
    return result


def _kind(fluid: Fluid | None) -> str:
    return fluid.kind if fluid is not None else ""


def _family(fluid: Fluid | None, humid: bool) -> str:
    """Streams of one family can mix: one substance, or humid air with water."""
    if fluid is None:
        return ""
    return "moist" if humid and (fluid.kind == "humid_air" or fluid.name == "water") else fluid.name


def _by_side(members: list[End]) -> dict[str, list[End]]:
    """Split by side label, unless the labels only mark where the streams belong at their other ends."""
    labels: dict[str | None, set[bool]] = {}
    for end in members:
        labels.setdefault(end.label, set()).add(end.enters)
    passing = [label for label, ways in labels.items() if len(ways) == 2]
    if len(labels) == 1 or not passing:
        name = next(iter(labels)) if len(labels) == 1 else ""
        return {name or "": members}
    split: dict[str, list[End]] = {}
    for end in members:
        split.setdefault(end.label or "", []).append(end)
    return split


def _balances(fluids: Mapping[str, Fluid | None], boundary: str, label: str, part: list[End]) -> list[Circuit]:
    def circuit(component: str, ends: list[End]) -> Circuit:
        inflows = tuple(end.number for end in ends if end.enters)
        outflows = tuple(end.number for end in ends if not end.enters)
        return Circuit(boundary, label, component, inflows, outflows)

    air = [end for end in part if _kind(fluids[end.stream.id]) == "humid_air"]
    return [circuit("dry air", air), circuit("water", part)] if air else [circuit("", part)]


def refuse_dead_ends(case: Case, found: list[Circuit]) -> None:
    """In steady flow what enters a circuit must leave it. Raises SchemaViolation where it cannot."""
    issues = []
    pointers = {b.id: b.pointer for b in case.boundaries}
    for circuit in found:
        if bool(circuit.inflows) != bool(circuit.outflows) and circuit.component != "water":
            way, other = ("enters", "leaves") if circuit.inflows else ("leaves", "enters")
            stream = case.streams[(circuit.inflows or circuit.outflows)[0]].id
            side = f" on side {circuit.label}" if circuit.label else ""
            text = f"{stream} {way} {circuit.boundary}{side}, but nothing of the same substance {other} there."
            hint = "Add the missing stream, or check fluid, side and direction (`from`, `to`)."
            issues.append(Issue(text, stream, hint))
    crossed = {c.boundary for c in found} | {b for t in case.transfers for b in (t.source, t.target)}
    for boundary in case.boundaries:
        if boundary.id not in crossed:
            text = f"Nothing crosses the boundary {boundary.id}."
            issues.append(
                Issue(text, "", "Let a stream or a transfer name it, or leave it out.", pointers[boundary.id])
            )
    if issues:
        raise SchemaViolation(issues[0].detail, issues)


def connected_groups(nodes: Iterable[int], links: Iterable[tuple[int, int]]) -> list[list[int]]:
    """Connected components of a graph, each sorted; nodes without a link stand alone."""
    parent = {n: n for n in nodes}

    def root(n: int) -> int:
        while parent[n] != n:
            parent[n] = parent[parent[n]]
            n = parent[n]
        return n

    for a, b in links:
        parent[root(a)] = root(b)
    groups: dict[int, list[int]] = {}
    for n in parent:
        groups.setdefault(root(n), []).append(n)
    return [sorted(g) for g in groups.values()]


def dependent_circuits(found: list[Circuit]) -> set[int]:
    """Mass balances that follow from the others: one of each network that nothing enters or leaves."""
    ends: dict[tuple[int, bool], list[int]] = {}
    for number, circuit in enumerate(found):
        for stream in (*circuit.inflows, *circuit.outflows):
            ends.setdefault((stream, circuit.component == "dry air"), []).append(number)
    links = [(a[0], a[1]) for a in ends.values() if len(a) == 2]
    open_circuits = {a[0] for a in ends.values() if len(a) == 1}
    groups = connected_groups(range(len(found)), links)
    return {group[-1] for group in groups if len(group) > 1 and not open_circuits & set(group)}


def says_something_of_its_state(stream: Stream) -> bool:
    return any(name in stream.quantities for name in STATE_PROPERTIES)


def mass_only(case: Case) -> set[str]:
    """Boundaries balanced for mass only: no stream tells of its state, and no heat or work crosses."""
    told = {b for s in case.streams if says_something_of_its_state(s) for b in (s.source, s.target)}
    crossed = {b for t in case.transfers for b in (t.source, t.target)}
    return {b.id for b in case.boundaries} - told - crossed
