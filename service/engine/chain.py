"""Forward chaining: whatever can be found from what is known, one unknown at a time."""

from __future__ import annotations

from collections import deque
from collections.abc import Collection, Iterable

from service.engine.model import Model
from service.engine.plan import Closing, EquationCloses, Iterated, Lookup, MemberCloses, Rearranged, Step


class Incidence:
    """Which equations and nodes touch each variable; built once per model."""

    def __init__(self, model: Model) -> None:
        count = len(model.variables)
        self.equations: list[list[int]] = [[] for _ in range(count)]
        self.nodes: list[list[int]] = [[] for _ in range(count)]
        for number, equation in enumerate(model.equations):
            for variable in equation.variables:
                self.equations[variable].append(number)
        for number, node in enumerate(model.nodes):
            for variable in set(node.members.values()):
                self.nodes[variable].append(number)


class Chain:
    """The state of a chaining run: what is known, what is used up, and the steps so far.

    `equations` and `nodes` restrict the run to a block; None means the whole model.
    """

    def __init__(
        self,
        model: Model,
        incidence: Incidence,
        known: Iterable[int],
        equations: Collection[int] | None = None,
        nodes: Collection[int] | None = None,
        used: Collection[int] = (),
        looked_up: Collection[int] = (),
    ) -> None:
        self.model = model
        self.incidence = incidence
        self.known = set(known)
        self.allowed_equations = equations
        self.allowed_nodes = nodes
        self.used = set(used)
        self.looked_up = set(looked_up)
        self.steps: list[Step] = []
        self.surplus: list[Closing] = []
        self._unknowns: dict[int, int] = {}
        self._later: deque[int] = deque()
        """Equations with one unknown that would take a root or a search: tried when nothing direct is left."""

    def start(self) -> None:
        """Count unknowns everywhere once, and chain."""
        model = self.model
        equations = range(len(model.equations)) if self.allowed_equations is None else self.allowed_equations
        nodes = range(len(model.nodes)) if self.allowed_nodes is None else self.allowed_nodes
        ready: deque[tuple[str, int]] = deque()
        for number in nodes:
            if number not in self.looked_up:
                ready.append(("node", number))
        for number in equations:
            if number in self.used:
                continue
            unknowns = sum(v not in self.known for v in model.equations[number].variables)
            self._unknowns[number] = unknowns
            if unknowns <= 1:
                ready.append(("equation", number))
        self._run(ready)

    def learn(self, variables: Iterable[int]) -> None:
        """Take variables as known from elsewhere, and chain on."""
        ready: deque[tuple[str, int]] = deque()
        self._mark(variables, ready)
        self._run(ready)

    def _mark(self, variables: Iterable[int], ready: deque[tuple[str, int]]) -> None:
        for variable in variables:
            if variable in self.known:
                continue
            self.known.add(variable)
            for node in self.incidence.nodes[variable]:
                if node not in self.looked_up and (self.allowed_nodes is None or node in self.allowed_nodes):
                    ready.append(("node", node))
            for equation in self.incidence.equations[variable]:
                if equation in self._unknowns:
                    self._unknowns[equation] -= 1
                    if self._unknowns[equation] <= 1:
                        ready.append(("equation", equation))

    def _run(self, ready: deque[tuple[str, int]]) -> None:
        while ready or self._later:
            if not ready:
                self._try_equation(self._later.popleft(), ready, patient=False)
                continue
            what, number = ready.popleft()
            if what == "node":
                self._try_node(number, ready)
            else:
                self._try_equation(number, ready)

    def _try_node(self, number: int, ready: deque[tuple[str, int]]) -> None:
        if number in self.looked_up:
            return
        node = self.model.nodes[number]
        members = node.members
        known = [name for name, variable in members.items() if variable in self.known]
        if len(known) < node.dof:
            return
        inputs = node.choose(known)
        if inputs is None:
            return
        self.looked_up.add(number)
        found = tuple((n, v) for n, v in members.items() if v not in self.known)
        self.steps.append(Lookup(number, inputs, found))
        for name in known:
            if name not in inputs:
                self.surplus.append(MemberCloses(number, inputs, name, members[name]))
        self._mark([v for _, v in found], ready)

    def _try_equation(self, number: int, ready: deque[tuple[str, int]], patient: bool = True) -> None:
        if number in self.used:
            return
        equation = self.model.equations[number]
        unknown = [v for v in equation.variables if v not in self.known]
        if not unknown:
            self.used.add(number)
            self.surplus.append(EquationCloses(number))
        elif len(unknown) == 1:
            variable = unknown[0]
            if patient and not equation.is_direct(variable):
                self._later.append(number)
                return
            self.used.add(number)
            if equation.can_solve(variable):
                self.steps.append(Rearranged(number, variable))
            else:
                self.steps.append(Iterated((variable,), (), (EquationCloses(number),), (variable,)))
            self._mark(unknown, ready)
