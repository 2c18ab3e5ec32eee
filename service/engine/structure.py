"""From a model to a plan: what can be found, in which order, and what is missing.

Chaining finds whatever has one unknown at a time. Where it gets stuck, a maximum matching of the equations left and the
unknowns left (Dulmage and Mendelsohn 1958) tells the part that is determined from the part that is not; the strong
components of the determined part are the blocks that have to be solved together; each is torn: assume as few variables
as make a chain of everything else, and iterate on what must then agree.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Collection, Sequence
from dataclasses import dataclass, replace

import numpy as np
from scipy.sparse import csr_matrix
from scipy.sparse.csgraph import connected_components, maximum_bipartite_matching

from service.engine.chain import Chain, Incidence
from service.engine.model import Model
from service.engine.plan import Iterated, Lookup, Plan, Step
from service.errors import Issue, UnderSpecified

MAX_CANDIDATES = 24
"""Variables tried as the next assumed one; a block with more is torn by its best connected ones."""


@dataclass(frozen=True, slots=True)
class _Row:
    """One equation left, or one of the (members − dof) ties of a node left; columns are positions of unknowns."""

    equation: int | None
    node: int | None
    columns: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class _Parts:
    """The Dulmage–Mendelsohn parts of what chaining left."""

    unknowns: list[int]
    rows: list[_Row]
    column_of_row: list[int]
    loose_columns: set[int]
    loose_rows: set[int]
    unmatched_columns: list[int]


def compile_plan(model: Model) -> Plan:
    """The plan for a model. Raises UnderSpecified where a wanted variable cannot be found."""
    incidence = Incidence(model)
    chain = Chain(model, incidence, model.given)
    chain.start()
    parts: _Parts | None = None
    while not model.wanted <= chain.known or _anything_left(model, chain):
        parts = _decompose(model, chain)
        blocks = _blocks(parts)
        if not blocks:
            break
        for rows in blocks:
            _solve_block(model, incidence, chain, parts, rows)
    missing = model.wanted - chain.known
    if missing:
        raise _under_specified(model, parts or _decompose(model, chain), missing)
    everything = frozenset(range(len(model.variables)))
    return Plan(model, tuple(chain.steps), tuple(chain.surplus), frozenset(chain.known), everything - chain.known)


def _anything_left(model: Model, chain: Chain) -> bool:
    return len(chain.used) < len(model.equations) or len(chain.looked_up) < len(model.nodes)


def _decompose(model: Model, chain: Chain) -> _Parts:
    unknowns = [v for v in range(len(model.variables)) if v not in chain.known]
    position = {v: i for i, v in enumerate(unknowns)}
    rows: list[_Row] = []
    for number, equation in enumerate(model.equations):
        if number not in chain.used:
            rows.append(_Row(number, None, tuple(position[v] for v in equation.variables if v in position)))
    for number, node in enumerate(model.nodes):
        if number not in chain.looked_up:
            members = set(node.members.values())
            columns = tuple(sorted(position[v] for v in members if v in position))
            rows += [_Row(None, number, columns)] * (len(members) - node.dof)
    row_of_column, column_of_row = _match(rows, len(unknowns))
    unmatched = [c for c, r in enumerate(row_of_column) if r < 0]
    loose_columns, loose_rows = _reach_from_columns(rows, column_of_row, unmatched, len(unknowns))
    return _Parts(unknowns, rows, column_of_row, loose_columns, loose_rows, unmatched)


def _match(rows: Sequence[_Row], columns: int) -> tuple[list[int], list[int]]:
    """Maximum matching: (row of each column, column of each row), −1 where unmatched."""
    if not rows or not columns:
        return [-1] * columns, [-1] * len(rows)
    starts = np.cumsum([0, *(len(r.columns) for r in rows)])
    flat = np.array([c for r in rows for c in r.columns], dtype=np.int32)
    graph = csr_matrix((np.ones(len(flat), dtype=np.int8), flat, starts), shape=(len(rows), columns))
    column_of_row = maximum_bipartite_matching(graph, perm_type="column").tolist()
    row_of_column = [-1] * columns
    for row, column in enumerate(column_of_row):
        if column >= 0:
            row_of_column[column] = row
    return row_of_column, column_of_row


def _reach_from_columns(
    rows: Sequence[_Row], column_of_row: Sequence[int], start: Sequence[int], columns: int
) -> tuple[set[int], set[int]]:
    """Columns and rows on alternating paths from unmatched columns: the under-determined part."""
    touching: list[list[int]] = [[] for _ in range(columns)]
    for number, tie in enumerate(rows):
        for column in tie.columns:
            touching[column].append(number)
    seen_columns, seen_rows = set(start), set[int]()
    queue = deque(start)
    while queue:
        for row in touching[queue.popleft()]:
            if row not in seen_rows:
                seen_rows.add(row)
                partner = column_of_row[row]
                if partner >= 0 and partner not in seen_columns:
                    seen_columns.add(partner)
                    queue.append(partner)
    return seen_columns, seen_rows


def _blocks(parts: _Parts) -> list[list[int]]:
    """Strong components of the determined part, as lists of rows, in an order that respects dependence."""
    rows = [r for r, c in enumerate(parts.column_of_row) if c >= 0 and r not in parts.loose_rows]
    if not rows:
        return []
    local = {r: i for i, r in enumerate(rows)}
    owner = {parts.column_of_row[r]: local[r] for r in rows}
    edges = [(local[r], owner[c]) for r in rows for c in parts.rows[r].columns if c in owner and owner[c] != local[r]]
    size = len(rows)
    tails, heads = zip(*edges, strict=True) if edges else ((), ())
    graph = csr_matrix((np.ones(len(edges), dtype=np.int8), (tails, heads)), shape=(size, size))
    count, labels = connected_components(graph, directed=True, connection="strong")
    members: list[list[int]] = [[] for _ in range(count)]
    for i, label in enumerate(labels):
        members[label].append(rows[i])
    needs: list[set[int]] = [set() for _ in range(count)]
    feeds: list[set[int]] = [set() for _ in range(count)]
    for tail, head in edges:
        a, b = int(labels[tail]), int(labels[head])
        if a != b:
            needs[a].add(b)
            feeds[b].add(a)
    ready = deque(b for b in range(count) if not needs[b])
    ordered: list[list[int]] = []
    while ready:
        block = ready.popleft()
        ordered.append(members[block])
        for user in sorted(feeds[block]):
            needs[user].discard(block)
            if not needs[user]:
                ready.append(user)
    return ordered


def _solve_block(model: Model, incidence: Incidence, chain: Chain, parts: _Parts, rows: Sequence[int]) -> None:
    """Tear one block, append it to the chain's steps, and chain on with what it found."""
    variables = [parts.unknowns[parts.column_of_row[r]] for r in rows]
    if all(v in chain.known for v in variables):
        return  # an earlier block and the chain behind it have found everything here
    equations = {e for r in rows if (e := parts.rows[r].equation) is not None and e not in chain.used}
    nodes = {n for r in rows if (n := parts.rows[r].node) is not None and n not in chain.looked_up}
    block = set(variables) - chain.known
    assumed, trial = _tear(model, incidence, chain.known, block, equations, nodes)
    step = _iterated(assumed, trial, block)
    if len(assumed) == 1 and _blind(model, trial.steps):
        other, sighted = _tear(model, incidence, chain.known, block, equations, nodes, sighted=True)
        if len(other) == 1 and not _blind(model, sighted.steps):
            step = replace(step, instead=_iterated(other, sighted, block))
    chain.used |= trial.used
    chain.looked_up |= trial.looked_up
    chain.steps.append(step)
    chain.surplus += trial.surplus[len(assumed) :]
    chain.learn(trial.known)


def _iterated(assumed: tuple[int, ...], trial: Chain, block: set[int]) -> Iterated:
    found = (*assumed, *sorted(block - set(assumed)))
    return Iterated(assumed, tuple(trial.steps), tuple(trial.surplus[: len(assumed)]), found)


def _blind(model: Model, steps: Sequence[Step]) -> int:
    """How many look-ups start from inputs that cannot tell every state."""
    return sum(isinstance(step, Lookup) and model.nodes[step.node].is_blind(step.inputs) for step in steps)


def _tear(
    model: Model,
    incidence: Incidence,
    known: set[int],
    block: set[int],
    equations: set[int],
    nodes: set[int],
    sighted: bool = False,
) -> tuple[tuple[int, ...], Chain]:
    """The variables to assume, and the chain that follows from them; `sighted`: by look-ups that reach every state."""
    assumed: tuple[int, ...] = ()
    covered: set[int] = set()
    while True:
        best: tuple[tuple[float, ...], tuple[int, ...], Chain] | None = None
        for candidate in _candidates(model, incidence, block - covered):
            trial = Chain(model, incidence, known | {*assumed, candidate}, equations, nodes)
            trial.start()
            missing = len(block - trial.known)
            blind = _blind(model, trial.steps) if sighted else 0
            score = (missing, blind, *_cost(model, trial.steps, candidate))
            if best is None or score < best[0]:
                best = (score, (*assumed, candidate), trial)
        assert best is not None  # a block has at least one unknown, so there is a candidate
        _, assumed, trial = best
        covered = trial.known & block
        if block <= trial.known and len(trial.surplus) >= len(assumed):
            return assumed, trial


def _candidates(model: Model, incidence: Incidence, block: Collection[int]) -> list[int]:
    """Variables worth assuming: steered ones, bounded ones and well connected ones first."""

    def rank(v: int) -> tuple[bool, bool, int, str]:
        variable = model.variables[v]
        unbounded = not (np.isfinite(variable.lower) and np.isfinite(variable.upper))
        return not variable.steered, unbounded, -len(incidence.equations[v]) - len(incidence.nodes[v]), variable.name

    return sorted(block, key=rank)[:MAX_CANDIDATES]


def _cost(model: Model, steps: Sequence[Step], candidate: int) -> tuple[float, ...]:
    """Nested iterations, then what is not steered, unbounded, looked up from poor inputs, long, and not asked for."""
    nested = sum(isinstance(step, Iterated) for step in steps)
    variable = model.variables[candidate]
    unbounded = not (np.isfinite(variable.lower) and np.isfinite(variable.upper))
    steep = sum(isinstance(step, Lookup) and model.nodes[step.node].is_steep(step.inputs) for step in steps)
    return nested, not variable.steered, unbounded, steep, len(steps), candidate not in model.wanted


def _under_specified(model: Model, parts: _Parts, missing: set[int]) -> UnderSpecified:
    """Which quantities cannot be found, which equations they share, and what to add."""
    issues = []
    for variable in sorted(missing, key=lambda v: model.variables[v].name):
        columns, rows, lacking = _component(parts, parts.unknowns.index(variable))
        name = model.variables[variable].name
        if not rows:
            issues.append(
                Issue(f"{name} is asked for, but nothing in the case ties it to anything that is known.", name,
                      "Give its value, or add a relation or a property that leads to it.")
            )  # fmt: skip
            continue
        labels = list(dict.fromkeys(_label(model, parts.rows[r]) for r in sorted(rows)))
        unknowns = [model.variables[parts.unknowns[c]].name for c in columns]
        could_give = [n for c, n in zip(columns, unknowns, strict=True) if parts.unknowns[c] not in model.wanted]
        detail = (
            f"{name} cannot be found: {_listed(labels)} "
            f"{'leaves' if len(labels) == 1 else 'together leave'} {_listed(unknowns)} open."
        )
        number = "one" if lacking == 1 else str(lacking)
        hint = f"Give {number} more, for example {_listed(could_give[:5], 'or')}." if could_give else (
            f"Give {number} more of these instead of asking for all of them."
        )  # fmt: skip
        issues.append(Issue(detail, name, hint))
    first = issues[0].detail
    return UnderSpecified(
        first if len(issues) == 1 else f"{len(issues)} quantities that are asked for cannot be found.", issues
    )


def _component(parts: _Parts, column: int) -> tuple[list[int], set[int], int]:
    """The connected piece of the under-determined part around a column: columns, rows, how many values it lacks."""
    by_column: dict[int, list[int]] = {}
    for r in parts.loose_rows:
        for c in parts.rows[r].columns:
            by_column.setdefault(c, []).append(r)
    columns, rows, queue = {column}, set[int](), deque([column])
    while queue:
        for r in by_column.get(queue.popleft(), ()):
            rows.add(r)
            for c in parts.rows[r].columns:
                if c not in columns and c in parts.loose_columns:
                    columns.add(c)
                    queue.append(c)
    lacking = sum(c in columns for c in parts.unmatched_columns)
    return sorted(columns), rows, max(lacking, 1)


def _label(model: Model, row: _Row) -> str:
    if row.equation is not None:
        return f"the {model.equations[row.equation].name}"
    assert row.node is not None
    return f"the {model.nodes[row.node].name}"


def _listed(names: Sequence[str], word: str = "and") -> str:
    shown = list(names[:8]) + ([f"{len(names) - 8} others"] if len(names) > 8 else [])
    if len(shown) == 1:
        return shown[0]
    return f"{', '.join(shown[:-1])} {word} {shown[-1]}"
