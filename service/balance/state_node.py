"""A state of a fluid as a node of the engine: two independent properties (three for humid air) fix the rest."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field

from service.engine.model import Column, Show
from service.errors import CaseError, Issue
from service.fluids.protocol import Fluid


class FoundState(dict[str, float]):
    """All properties of a looked-up state, with its phase."""

    phase: str = ""


@dataclass(slots=True)
class StateNode:
    """owner: the item that errors speak of; members: property → variable, shared where two states meet."""

    name: str
    owner: str
    fluid: Fluid
    members: dict[str, int] = field(default_factory=dict)

    @property
    def dof(self) -> int:
        return self.fluid.dof

    def choose(self, known: Collection[str]) -> tuple[str, ...] | None:
        return self.fluid.inputs(known)

    def is_steep(self, inputs: tuple[str, ...]) -> bool:
        """Without p or x: T with h or u hardly tells the pressure of a liquid or of a thin gas."""
        return not {"p", "x"} & set(inputs)

    def is_blind(self, inputs: tuple[str, ...]) -> bool:
        """p with T, which are the same in all wet states, and x, which says nothing of a single phase."""
        return (set(inputs) == {"p", "T"} or "x" in inputs) and self.fluid.kind == "pure"

    def evaluate(self, inputs: tuple[str, ...], values: tuple[float, ...]) -> Mapping[str, float]:
        try:
            state = self.fluid.state(inputs, values, self._extras())
        except CaseError as error:
            raise self._of_owner(error, inputs) from error
        found = FoundState(state.values)
        found.phase = state.phase
        return found

    def _extras(self) -> tuple[str, ...]:
        return tuple(n for n in ("superheat", "subcooling") if n in self.members)

    def _of_owner(self, error: CaseError, inputs: tuple[str, ...]) -> CaseError:
        """The same error, saying whose state it is."""
        about = f"The {self.name}: "
        issues = [
            Issue(f"{about}{i.detail}", f"{self.owner}.{i.address or inputs[0]}", i.hint, amounts=i.amounts)
            for i in error.issues or (Issue(error.detail),)
        ]
        return type(error)(f"{about}{error.detail}", issues)

    def evaluate_columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[Mapping[str, Column], Mapping[int, CaseError]]:
        return self.fluid.columns(inputs, values, wanted)

    def partials(
        self, inputs: tuple[str, ...], values: tuple[float, ...], of: tuple[str, ...]
    ) -> Mapping[str, tuple[float, ...]]:
        return self.fluid.partials(self.fluid.state(inputs, values), inputs, of)

    def text(self, member: str, inputs: tuple[str, ...], show: Show) -> str:
        arguments = ", ".join(f"{name} = {show(self.members[name])}" for name in inputs)
        return f"{member}({arguments}; {self.fluid.name})"
