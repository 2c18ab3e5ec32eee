"""Cautions that go with an answer, and the rules that raise them."""

from __future__ import annotations

from service.balance.builder import BuiltCase
from service.balance.solution import Advisory, Solution
from service.engine.execute import Run


def advise(built: BuiltCase, done: Run, solution: Solution) -> list[Advisory]:
    """Every advisory that applies to a solved case."""
    return []
