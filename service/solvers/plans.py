"""Plans kept by structure: the same case with other readings is solved by the plan that it had before.

A plan is kept only where nothing in it depends on a number: it iterates on nothing (a search starts from what is
given), bounds nothing, and has no contents. A kept plan therefore gives the very bytes that a new one would give.
"""

from __future__ import annotations

import threading
from collections import OrderedDict
from collections.abc import Hashable, Mapping
from dataclasses import replace

from service.balance.builder import BuiltCase
from service.balance.case import Case, Quantities
from service.engine.plan import Iterated, Plan
from service.fluids.protocol import Fluid

MOST = 256
"""Plans kept; the one unused for longest goes first."""

Key = tuple[Hashable, ...]


class KeptPlans:
    """A bounded store of compiled cases, safe for several threads; what it hands out shares the compiled parts."""

    def __init__(self) -> None:
        self._kept: OrderedDict[Key, tuple[BuiltCase, Plan]] = OrderedDict()
        self._lock = threading.Lock()

    def find(self, key: Key | None, case: Case) -> tuple[BuiltCase, Plan] | None:
        """The compiled case of that structure with this case's numbers in it; None where there is none."""
        if key is None:
            return None
        with self._lock:
            found = self._kept.get(key)
            if found is None:
                return None
            self._kept.move_to_end(key)
        built, plan = found
        index, given = built.model.index, dict(built.model.given)
        for quantity in case.quantities():
            if quantity.value is not None:
                given[index[quantity.address]] = quantity.value
        model = replace(built.model, given=given)
        return replace(built, case=case, model=model), replace(plan, model=model)

    def keep(self, key: Key | None, built: BuiltCase, plan: Plan) -> None:
        """Keep a compiled case, where its plan does not depend on numbers."""
        if key is None or any(isinstance(step, Iterated) for step in plan.steps):
            return
        with self._lock:
            self._kept[key] = built, plan
            if len(self._kept) > MOST:
                self._kept.popitem(last=False)


def structure_of(case: Case, fluids: Mapping[str, Fluid | None]) -> Key | None:
    """Everything of a case but its numbers; None where numbers shape its equations or its search.

    fluids count by identity: the compiled case holds them, so that an identity is not used again.
    """
    if case.contents:
        return None
    parts: list[Hashable] = [case.system, case.site.atmospheric_pressure, tuple(b.id for b in case.boundaries)]
    for stream in case.streams:
        told = _told(stream.quantities)
        if told is None:
            return None
        sides = stream.side_source, stream.side_target
        parts.append((stream.id, stream.source, stream.target, sides, id(fluids[stream.id]), told))
    for transfer in case.transfers:
        told = _told(transfer.quantities)
        if told is None:
            return None
        ends = transfer.source, transfer.target
        parts.append((transfer.id, transfer.kind, ends, transfer.has_law, transfer.law_stream, told))
    for relation in case.relations:
        told = _told(relation.quantities)
        if told is None:
            return None
        roles = tuple(relation.streams.items())
        parts.append((relation.id, relation.kind, relation.addresses, roles, relation.arrangement, told))
    parts.append(tuple(limit.of for limit in case.limits))
    return tuple(parts)


def _told(quantities: Quantities) -> Key | None:
    """Names, kinds and standing of quantities; None where one is bounded or steered."""
    out: list[Hashable] = []
    for name, quantity in quantities.items():
        if quantity.between is not None or quantity.near is not None:
            return None
        out.append((name, quantity.kind, quantity.value is None, quantity.wanted))
    return tuple(out)
