"""The answer document of a solved case.

marshmallow dumps the plain records (advisories, sources); ledger and steps are written by functions, since
most of their members are renderings and conversions that need the presenter.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import replace
from statistics import NormalDist
from typing import Any

from marshmallow import Schema, fields

from service.advisories import DEFERENCE
from service.balance.solution import EntropyCheck, LedgerAccount, LedgerLine, Solution, StepRecord, StreamState
from service.wire.presenting import NO_MEANING, SINGLE_PHASE, Presenter, Shown, rounded
from service.wire.provenance import provenance
from service.wire.transient_part import TransientPart, asked_units
from service.wire.vocabulary import DERIVED_STATE, SIZE, STATE, STREAM

_DOUBLED = re.compile(r"\(\(([^()]*)\)\)")

OUT_OF_SYSTEM_NOTE = (
    "Work is listed positive out of the system; the sum counts it into the system, that is with the opposite sign."
)


class AdvisorySchema(Schema):
    code = fields.Raw()
    signal_word = fields.Raw()
    message = fields.Raw()
    of = fields.Raw()
    basis = fields.Raw()


ADVISORIES = AdvisorySchema(many=True)


class Answer:
    """Writes one solution."""

    def __init__(self, solution: Solution, presenter: Presenter) -> None:
        self.solution = solution
        self.presenter = presenter
        self.options = solution.case.answer
        self.full = self.options.detail == "full"
        self.symbols = solution.names.__getitem__
        self.numbers = presenter.numbers(solution.values, solution.kinds)
        self.asked = asked_units(solution.case)

    def document(self, request: object) -> dict[str, Any]:
        """The whole answer. `request` is what it answers, for the hash."""
        solution = self.solution
        answer: dict[str, Any] = {"status": solution.status}
        if solution.case.title:
            answer["title"] = solution.case.title
        answer["answers"] = self._answers()
        answer["assumptions"] = list(solution.assumptions)
        answer["states"] = {state.stream: self.state(state) for state in solution.states}
        if solution.transient is not None:
            answer["transient"] = TransientPart(solution.case, solution.transient, self.presenter).document()
        answer["ledger"] = self._ledger()
        if self.full:
            answer["steps"] = [self._step(step, str(number)) for number, step in enumerate(solution.steps, 1)]
        answer["checks"] = self._checks()
        answer["advisories"] = {
            "items": ADVISORIES.dump([replace(a, message=a.told(self._roughly)) for a in solution.advisories]),
            "deference": DEFERENCE,
        }
        answer["provenance"] = provenance(solution.sources, request)
        return answer

    def _roughly(self, kind: str, value: float) -> str:
        return self.presenter.text(kind, value, digits=5)

    # -- answers and states ------------------------------------------------------------------------------------

    def _answers(self) -> dict[str, Shown]:
        out = {}
        for address, found in self.solution.answers.items():
            symbol = self.asked.get(address)
            reason = SINGLE_PHASE if address.endswith(".x") else "the case leaves it without a value"
            shown = self.presenter.quantity(found.value, found.kind, symbol, reason)
            known = self.solution.uncertainties.get(address)
            if known is not None and math.isfinite(known.u) and math.isfinite(found.value):
                self._add_uncertainty(shown, found.value, known.u, found.kind, symbol)
                if self.full:
                    shown["shares"] = {of: rounded(share, 3) for of, (_, share) in known.shares.items()}
            out[address] = shown
        return out

    def _add_uncertainty(self, shown: Shown, value: float, u: float, kind: str, symbol: str | None) -> None:
        coverage = self.options.coverage
        k = NormalDist().inv_cdf(0.5 * (1.0 + coverage))
        ends = [self.presenter.quantity(value + side * k * u, kind, symbol)["value"] for side in (-1.0, 1.0)]
        shown["u"] = rounded(self.presenter.difference(u, kind, symbol), 3)
        shown["interval"] = {"low": ends[0], "high": ends[1], "coverage": coverage}

    def state(self, state: StreamState) -> dict[str, Any]:
        """The whole state of a stream or a content, and its flows or its size."""
        out: dict[str, Any] = {}
        if state.fluid:
            out["fluid"] = state.fluid
        if state.phase:
            out["phase"] = state.phase
        quantity = self.presenter.quantity
        for name, value in state.properties.items():
            kind = STATE.get(name) or DERIVED_STATE.get(name)
            if kind is not None:
                reason = SINGLE_PHASE if name == "x" else NO_MEANING
                out[name] = quantity(value, kind, self.asked.get(f"{state.stream}.{name}"), reason)
        for name, value in state.flows.items():
            kind = STREAM.get(name) or SIZE[name]
            out[name] = quantity(value, kind, self.asked.get(f"{state.stream}.{name}"))
        return out

    # -- ledger ------------------------------------------------------------------------------------------------

    def _ledger(self) -> list[dict[str, Any]]:
        boundaries: dict[str, dict[str, Any]] = {}
        for account in self.solution.ledger:
            entry = boundaries.setdefault(account.boundary, {"boundary": account.boundary, "mass": []})
            if account.of == "mass":
                entry["mass"].append(self._account(account))
            else:
                entry["energy"] = self._account(account)
        return list(boundaries.values())

    def _account(self, account: LedgerAccount) -> dict[str, Any]:
        flips = self.options.work_positive == "out_of_system" and any(line.is_work for line in account.lines)
        out: dict[str, Any] = {}
        if account.circuit:
            out["circuit"] = account.circuit
        out["lines"] = [self._line(line, account.kind, flips and line.is_work) for line in account.lines]
        out["sum"] = self.presenter.quantity(account.total, account.kind)
        out["closure"] = rounded(account.closure, 3)
        if flips:
            out["note"] = OUT_OF_SYSTEM_NOTE
        return out

    def _line(self, line: LedgerLine, kind: str, flipped: bool) -> dict[str, Any]:
        out: dict[str, Any] = {"term": line.term, "of": line.of}
        if self.full:
            formula, numbers = line.formula(self.symbols), plain(line.formula(self.numbers))
            out["formula"] = _opposite(formula) if flipped else formula
            out["numbers"] = _opposite(numbers) if flipped else numbers
        out |= self.presenter.quantity(-line.value if flipped else line.value, kind)
        if flipped:
            out["listed"] = "out_of_system"
        return out

    # -- steps -------------------------------------------------------------------------------------------------

    def _step(self, step: StepRecord, number: str) -> dict[str, Any]:
        solution, quantity = self.solution, self.presenter.quantity
        values = {}
        for variable in step.solved_for:
            address = solution.names[variable]
            reason = SINGLE_PHASE if address.endswith(".x") else "it has no value"
            values[address] = quantity(
                solution.values[variable], solution.kinds[variable], self.asked.get(address), reason
            )
        equation, numbers = step.formula(self.symbols), plain(step.formula(self.numbers))
        if step.method == "rearranged":
            (variable,) = step.solved_for
            equation = f"{self.symbols(variable)} = {equation}"
            numbers = f"{numbers} = {self.numbers(variable)}"
        out: dict[str, Any] = {
            "number": number,
            "name": step.name,
            "method": step.method,
            "equation": equation,
            "numbers": numbers,
            "solved_for": list(values),
            "values": values,
            "residual": rounded(step.residual, 3),
        }
        if step.inner:
            out["inner"] = [self._step(inner, f"{number}.{i}") for i, inner in enumerate(step.inner, 1)]
        return out

    # -- checks ------------------------------------------------------------------------------------------------

    def _checks(self) -> dict[str, Any]:
        solution = self.solution
        closure: dict[str, dict[str, Any]] = {}
        for account in solution.ledger:
            entry = closure.setdefault(account.boundary, {"boundary": account.boundary})
            entry[account.of] = max(entry.get(account.of, 0.0), rounded(account.closure, 3))
        out: dict[str, Any] = {
            "closure": list(closure.values()),
            "entropy": [self._entropy(check) for check in solution.entropy],
            "second_law": _second_law(solution.entropy),
        }
        out["surplus"] = [
            {
                "name": check.name,
                "address": check.address,
                "held": self.presenter.quantity(check.held, self._kind(check.address), self.asked.get(check.address)),
                "implied": self.presenter.quantity(
                    check.implied, self._kind(check.address), self.asked.get(check.address)
                ),
                "disagreement": rounded(check.disagreement, 3),
                "verdict": f"agrees within {max(check.disagreement, 1e-15):.1e} (relative)",
            }
            for check in solution.surplus
        ]
        return out

    def _kind(self, address: str) -> str:
        return self.solution.kinds[self.solution.names.index(address)]

    def _entropy(self, check: EntropyCheck) -> dict[str, Any]:
        out: dict[str, Any] = {"boundary": check.boundary, "verdict": check.verdict, "why": check.why}
        if check.generation is not None:
            per_mass = any(a.boundary == check.boundary and a.kind == "specific_energy" for a in self.solution.ledger)
            kind = "specific_entropy" if per_mass else "conductance"
            out["generation"] = self.presenter.quantity(check.generation, kind)
        return out


def _second_law(checks: Sequence[EntropyCheck]) -> str:
    verdicts = {check.verdict for check in checks}
    if "violated" in verdicts:
        return "violated"
    return "satisfied" if verdicts == {"satisfied"} else "not_checked"


def plain(formula: str) -> str:
    """The formula without doubled brackets around a single number: ((3 m/s))² is (3 m/s)²."""
    return _DOUBLED.sub(r"(\1)", formula) if "((" in formula else formula


def _opposite(formula: str) -> str:
    """The formula with its sign changed."""
    if formula.startswith("−") and " + " not in formula and " − " not in formula:
        return formula[1:]
    return f"−({formula})" if " + " in formula or " − " in formula else f"−{formula}"
