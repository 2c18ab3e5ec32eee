"""Cautions that go with an answer, and the rules that raise them. Signal words as in ANSI Z535.6."""

from __future__ import annotations

from service.advisories.context import Context
from service.advisories.registry import RULES
from service.balance.builder import BuiltCase
from service.balance.solution import Advisory, SignalWord, Solution
from service.engine.execute import Run

SEVERITY: tuple[SignalWord, ...] = ("DANGER", "WARNING", "CAUTION", "NOTICE")


def advise(built: BuiltCase, done: Run, solution: Solution) -> list[Advisory]:
    """Every advisory that applies to a solved case, the gravest first, each once."""
    context = Context(built, done, solution)
    found = dict.fromkeys(advisory for rule in RULES for advisory in rule.look(context))
    return sorted(found, key=lambda advisory: SEVERITY.index(advisory.signal_word))
