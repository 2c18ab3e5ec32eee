"""The advisories as documentation lists them."""

from __future__ import annotations

from dataclasses import dataclass

from service.advisories.registry import RULES


@dataclass(frozen=True, slots=True)
class Entry:
    """One code: what raises it, the signal words that it may carry, and on what it rests."""

    code: str
    signal_words: tuple[str, ...]
    when: str
    basis: str


def catalogue() -> tuple[Entry, ...]:
    """Every advisory that an answer may carry, in the order of the registry."""
    return tuple(Entry(rule.code, rule.words, rule.when, rule.basis) for rule in RULES)
