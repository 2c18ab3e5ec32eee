"""Spellings near a text that was not understood; the cost is bounded whatever the text."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from difflib import SequenceMatcher

_CUTOFF = 0.6
_MOST = 3


def nearby(text: str, symbols: Sequence[str], same_but_for_case: Sequence[str], accepted: Collection[str]) -> list[str]:
    """Up to three spellings of the kind that look like the text: first those that differ in case only.

    symbols: what may be suggested (some dozens); same_but_for_case: spellings of any kind; accepted: those of the kind.
    """
    found = [spelling for spelling in same_but_for_case if spelling in accepted]
    matcher: SequenceMatcher[str] = SequenceMatcher(autojunk=False)
    matcher.set_seq2(text)
    scored: list[tuple[float, str]] = []
    for symbol in symbols if len(text) > 1 else ():  # one letter is near to everything
        matcher.set_seq1(symbol)
        if matcher.real_quick_ratio() >= _CUTOFF and matcher.quick_ratio() >= _CUTOFF:
            ratio = matcher.ratio()
            if ratio >= _CUTOFF:
                scored.append((-ratio, symbol))
    found += [symbol for _, symbol in sorted(scored) if symbol not in found]
    return found[:_MOST]


def shown(text: str) -> str:
    """A client's short text, quoted so that nothing invisible gets into a message."""
    return f"'{text}'" if text.isprintable() else ascii(text)
