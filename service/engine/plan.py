"""A plan: the steps, in order, that take what is given to what is asked.

Rearranged     one equation solved for one variable
Lookup         a node evaluated from enough of its members
Iterated       one or more assumed variables, a chain of inner steps, and as many closings to be made zero
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TypeAlias

from service.engine.model import Model


@dataclass(frozen=True, slots=True)
class Rearranged:
    equation: int
    variable: int


@dataclass(frozen=True, slots=True)
class Lookup:
    """inputs: member names; found: (member, variable) pairs that become known by it."""

    node: int
    inputs: tuple[str, ...]
    found: tuple[tuple[str, int], ...]


@dataclass(frozen=True, slots=True)
class EquationCloses:
    """The equation is satisfied."""

    equation: int


@dataclass(frozen=True, slots=True)
class MemberCloses:
    """A node's member, looked up from the inputs, equals the value that it has already."""

    node: int
    inputs: tuple[str, ...]
    member: str
    variable: int


Closing: TypeAlias = EquationCloses | MemberCloses


@dataclass(frozen=True, slots=True)
class Iterated:
    assumed: tuple[int, ...]
    inner: tuple[Step, ...]
    closings: tuple[Closing, ...]
    variables: tuple[int, ...]
    """Everything the block finds, the assumed variables first."""
    instead: Iterated | None = None
    """The same block torn otherwise, for solutions that the first way cannot reach (wet vapour has one T at one p)."""


Step: TypeAlias = Rearranged | Lookup | Iterated


@dataclass(frozen=True, slots=True)
class Plan:
    """steps in order; surplus: what is given more than once and has to agree; found: every variable with a value."""

    model: Model
    steps: tuple[Step, ...]
    surplus: tuple[Closing, ...]
    found: frozenset[int]
    undetermined: frozenset[int] = field(default_factory=frozenset)
