"""Cautions that go with an answer, and the rules that raise them. Signal words as in ANSI Z535.6.

DANGER will, WARNING could kill or injure seriously; CAUTION could injure slightly; NOTICE is not about injury.
"""

from __future__ import annotations

from collections.abc import Iterator

from service.advisories.context import Context
from service.advisories.registry import RULES, Rule
from service.balance.builder import BuiltCase
from service.balance.solution import Advisory, SignalWord, Solution
from service.engine.execute import Run
from service.errors import CaseError

SEVERITY: tuple[SignalWord, ...] = ("DANGER", "WARNING", "CAUTION", "NOTICE")

DEFERENCE = (
    "This is a screening calculation on the numbers given. It does not replace local codes, the maker's instructions "
    "or the judgement of a licensed professional."
)
"""Standing words of every answer."""


def advise(built: BuiltCase, done: Run, solution: Solution) -> list[Advisory]:
    """Every advisory that applies to a solved case, the gravest first, each once."""
    context = Context(built, done, solution)
    found = dict.fromkeys(advisory for rule in RULES for advisory in _raised(rule, context))
    return sorted(found, key=lambda advisory: SEVERITY.index(advisory.signal_word))


def _raised(rule: Rule, context: Context) -> Iterator[Advisory]:
    """What a rule finds, as advisories; a property that it cannot look up ends its search, never the answer."""
    try:
        for finding in rule.look(context):
            word = finding.word or rule.words[0]
            yield Advisory(rule.code, word, finding.message, finding.of, rule.basis, finding.amounts)
    except CaseError:
        return
