"""Who is connected to whom: which fluid runs in each stream, and which streams share a mass balance."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from service.balance.case import STATE_PROPERTIES, Case, Stream
from service.errors import Issue, SchemaViolation
from service.fluids.protocol import Fluid

SURROUNDINGS = None


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


def fluid_keys(case: Case) -> dict[str, str | None]:
    """Fluid of each stream as the case names it; where it names none, the only one that its side allows.

    Raises SchemaViolation where several fluids are possible. None is left where no stream of a network names one.
    """
    found: dict[str, str | None] = {s.id: s.fluid for s in case.streams}
    changed = True
    while changed:
        changed = False
        for stream in case.streams:
            if found[stream.id] is None:
                choices = _possible(case, stream, found)
                if len(choices) == 1:
                    found[stream.id] = choices.pop()
                    changed = True
    issues = []
    for stream in case.streams:
        if found[stream.id] is None and (choices := _possible(case, stream, found)):
            listed = ", ".join(sorted(choices))
            issues.append(
                Issue(f"Stream {stream.id} names no fluid, and its boundary has several: {listed}.", stream.id,
                      "Give `fluid`, or `side` where each side has one fluid.", f"{stream.pointer}")
            )  # fmt: skip
    if issues:
        raise SchemaViolation(issues[0].detail, issues)
    return found


def _possible(case: Case, stream: Stream, found: Mapping[str, str | None]) -> set[str]:
    """Fluids that neighbours suggest, the most specific hint first: same side, opposite direction, then any."""
    for same_side in (True, False):
        choices: set[str] = set()
        for other in case.streams:
            key = found[other.id]
            if other is stream or key is None:
                continue
            for end, label in ((stream.source, stream.side_source), (stream.target, stream.side_target)):
                if end is None:
                    continue
                for other_end, other_label in (
                    (other.source, other.side_source),
                    (other.target, other.side_target),
                ):
                    if other_end == end and (not same_side or (label is not None and label == other_label)):
                        choices.add(key)
        if choices:
            return choices
    return set()


def circuits(case: Case, fluids: Mapping[str, Fluid | None]) -> list[Circuit]:
    """Every mass balance of the case, boundary by boundary."""
    result = []
    for boundary in case.boundaries:
        ends = [(i, s, s.side_target, "in") for i, s in enumerate(case.streams) if s.target == boundary.id]
        ends += [(i, s, s.side_source, "out") for i, s in enumerate(case.streams) if s.source == boundary.id]
        humid = any(_kind(fluids[s.id]) == "humid_air" for _, s, _, _ in ends)
        groups: dict[str, list[tuple[int, str | None, str]]] = {}
        for i, stream, label, way in ends:
            groups.setdefault(_family(fluids[stream.id], humid), []).append((i, label, way))
        for members in groups.values():
            for label, part in _by_side(members).items():
                result += _balances(case, fluids, boundary.id, label, part)
    return result


def _kind(fluid: Fluid | None) -> str:
    return fluid.kind if fluid is not None else ""


def _family(fluid: Fluid | None, humid: bool) -> str:
    """Streams of one family can mix: one substance, or humid air with water."""
    if fluid is None:
        return ""
    return "moist" if humid and (fluid.kind == "humid_air" or fluid.name == "water") else fluid.name


def _by_side(members: list[tuple[int, str | None, str]]) -> dict[str, list[tuple[int, str]]]:
    """Split by side label, unless the labels only mark where the streams belong at their other ends."""
    labels: dict[str | None, set[str]] = {}
    for _, label, way in members:
        labels.setdefault(label, set()).add(way)
    passing = [label for label, ways in labels.items() if len(ways) == 2]
    if len(labels) == 1 or not passing:
        name = next(iter(labels)) if len(labels) == 1 else ""
        return {name or "": [(i, way) for i, _, way in members]}
    split: dict[str, list[tuple[int, str]]] = {}
    for i, label, way in members:
        split.setdefault(label or "", []).append((i, way))
    return split


def _balances(
    case: Case, fluids: Mapping[str, Fluid | None], boundary: str, label: str, part: list[tuple[int, str]]
) -> list[Circuit]:
    inflows = tuple(i for i, way in part if way == "in")
    outflows = tuple(i for i, way in part if way == "out")
    air = {i for i, _ in part if _kind(fluids[case.streams[i].id]) == "humid_air"}
    if not air:
        return [Circuit(boundary, label, "", inflows, outflows)]
    dry = Circuit(
        boundary, label, "dry air", tuple(i for i in inflows if i in air), tuple(i for i in outflows if i in air)
    )
    return [dry, Circuit(boundary, label, "water", inflows, outflows)]


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
