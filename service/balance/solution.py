"""What a solver hands back: everything that an answer tells, still in SI and not yet worded for a reader."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Literal, TypeAlias

import numpy as np
import numpy.typing as npt

from service.balance.case import Case

Method: TypeAlias = Literal["rearranged", "property lookup", "bracketed root", "simultaneous", "time integration"]
Show: TypeAlias = Callable[[int], str]
Rendering: TypeAlias = Callable[[Show], str]
"""Writes a formula, given how to show each variable: by its address, or as a number with its unit."""


@dataclass(frozen=True, slots=True)
class Found:
    """A quantity with its value [SI]; NaN where the property has no meaning (the quality of a single phase)."""

    address: str
    kind: str
    value: float


@dataclass(frozen=True, slots=True)
class StreamState:
    """One stream as solved. properties: state property → value [SI]; flows: mass_flow, velocity ... → value [SI]."""

    stream: str
    fluid: str
    phase: str
    properties: Mapping[str, float]
    flows: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class LedgerLine:
    """One term of a balance. value counts positive into the boundary; formula is written over variable numbers."""

    term: str
    of: str
    formula: Rendering
    value: float
    is_work: bool = False


@dataclass(frozen=True, slots=True)
class LedgerAccount:
    """One balance of one boundary: mass (of a circuit, or of a component) or energy.

    kind: the quantity kind of the values ("mass_flow", "power", "specific_energy" where no flow is known);
    total is the sum of the lines; closure is |total| over the largest line.
    """

    boundary: str
    of: Literal["mass", "energy"]
    circuit: str
    kind: str
    lines: tuple[LedgerLine, ...]
    total: float
    closure: float


@dataclass(frozen=True, slots=True)
class StepRecord:
    """One step of the solution. method: given in the words of the answer; inner: the chain inside an iteration."""

    method: Method
    name: str
    solved_for: tuple[int, ...]
    formula: Rendering
    residual: float = 0.0
    inner: tuple[StepRecord, ...] = ()


@dataclass(frozen=True, slots=True)
class SurplusCheck:
    """A value that is given (or found) twice. disagreement is relative; both values are told, in SI."""

    name: str
    address: str
    held: float
    implied: float
    disagreement: float


@dataclass(frozen=True, slots=True)
class EntropyCheck:
    """Entropy generation of a boundary [W/K] (per kg/s where no flow is known), with the verdict and its reason."""

    boundary: str
    generation: float | None
    verdict: Literal["satisfied", "violated", "not_checked"]
    why: str


SignalWord: TypeAlias = Literal["NOTICE", "CAUTION", "WARNING", "DANGER"]


@dataclass(frozen=True, slots=True)
class Advisory:
    """A caution. of: the address or item it is about; amounts: (kind, value [SI]) for {0}, {1} in the message."""

    code: str
    signal_word: SignalWord
    message: str
    of: str
    basis: str
    amounts: tuple[tuple[str, float], ...] = ()

    def told(self, show: Callable[[str, float], str]) -> str:
        """The message with its amounts written by `show(kind, value)`."""
        if not self.amounts:
            return self.message
        return self.message.format(*(show(kind, value) for kind, value in self.amounts))


@dataclass(frozen=True, slots=True)
class FluidSource:
    """Where the properties of a fluid come from."""

    fluid: str
    model: str
    citation: str
    reference_state: str


@dataclass(frozen=True, slots=True)
class Uncertainty:
    """u [SI] of an answer, with each input's share: address of the input → (sensitivity [SI/SI], share of u²)."""

    u: float
    shares: Mapping[str, tuple[float, float]]


@dataclass(slots=True)
class TransientResult:
    """What a rate-form transient found over time, all in SI.

    end_reason: which time or condition ended it; stopped: "", or why it had to stop before that; columns: address →
    values at `times` [s]; extremes: address → (least, its time, largest, its time) over the whole integration;
    method: integrator, tolerances and counts.
    """

    end_reason: str
    end_time: float
    stopped: str
    times: npt.NDArray[np.float64]
    columns: dict[str, npt.NDArray[np.float64]]
    kinds: dict[str, str]
    events: list[tuple[float, str]]
    extremes: dict[str, tuple[float, float, float, float]]
    method: dict[str, float | int | str]


@dataclass(slots=True)
class Solution:
    """A solved case. names and kinds are indexed by variable number, as the renderings use them."""

    case: Case
    status: Literal["solved", "reconciled"]
    names: list[str]
    kinds: list[str]
    values: list[float]
    answers: dict[str, Found]
    states: list[StreamState]
    ledger: list[LedgerAccount]
    steps: list[StepRecord]
    surplus: list[SurplusCheck]
    entropy: list[EntropyCheck]
    assumptions: list[str]
    sources: list[FluidSource]
    advisories: list[Advisory] = field(default_factory=list)
    uncertainties: dict[str, Uncertainty] = field(default_factory=dict)
    transient: TransientResult | None = None


@dataclass(frozen=True, slots=True)
class StructureReport:
    """The structural count of a case, without its solution.

    unknowns: addresses found, in order of solution; undetermined: addresses that stay open (and are not asked);
    surplus: descriptions of what is given more than once.
    """

    equations: int
    unknowns: tuple[str, ...]
    undetermined: tuple[str, ...]
    surplus: tuple[str, ...]
    assumptions: tuple[str, ...]


@dataclass(slots=True)
class SeriesResult:
    """Columns of a series in SI: address → values; problem: row → problem type ("" where solved)."""

    rows: int
    columns: dict[str, npt.NDArray[np.float64]]
    kinds: dict[str, str]
    problems: dict[int, str]
    details: dict[int, str]
