"""Nearby spellings, for hints."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from difflib import get_close_matches

from service.wire.vocabulary import SYNONYMS

LONGEST_WORD = 64
MOST_OPTIONS = 400


def nearest(word: str, options: Iterable[str], most: int = 3) -> list[str]:
    """The options that a writer of `word` may have meant, best first; [] where none is near."""
    known = list(options)[:MOST_OPTIONS]
    word = word[:LONGEST_WORD]
    meant = SYNONYMS.get(word)
    if meant in known:
        return [meant]
    lowered: dict[str, str] = {}
    for option in known:
        lowered.setdefault(option.casefold(), option)
    folded = word.casefold()
    if folded in lowered:
        return [lowered[folded]]
    return [lowered[m] for m in get_close_matches(folded, lowered, n=most, cutoff=0.6)]


def did_you_mean(word: str, options: Iterable[str]) -> str:
    """`Did you mean "x"?`, or what is allowed where nothing is near."""
    known = list(options)
    near = nearest(word, known)
    if near:
        return f"Did you mean {listed([quoted(n) for n in near], 'or')}?"
    return f"Allowed here: {listed(known)}." if known else ""


def quoted(text: object, longest: int = 60) -> str:
    """The text in double quotes, cut, and with control characters made visible."""
    shown = str(text)
    shown = shown if len(shown) <= longest else shown[: longest - 1] + "…"
    return '"' + "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in shown) + '"'


def listed(names: Sequence[str], word: str = "and", most: int = 20) -> str:
    """`a, b and c`; of a long list the beginning."""
    shown = [str(name) for name in names[:most]]
    if len(names) > most:
        shown.append(f"{len(names) - most} more")
    if len(shown) < 2:
        return "".join(shown)
    return f"{', '.join(shown[:-1])} {word} {shown[-1]}"
