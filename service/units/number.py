"""A quantity as text ("40 barg", "? degC") taken apart into number and unit, strictly and in one pass.

Accepted: an optional sign, ASCII digits with an optional decimal point and exponent, or "?"; then blanks, which may be
left out ("40barg") or be no-break blanks; then the unit, which is not looked at here. Nothing is guessed: a decimal
comma, digit groups, NaN and infinities are refused.
"""

from __future__ import annotations

import math
import re

from service.errors import SchemaViolation

from .suggest import shown

MAX_TEXT = 72
"""Longest quantity text: a number of 40 characters and a unit of 32."""

_BLANKS = " \u00a0\u202f"
# Possessive throughout: what has been read as part of the number is never given back to the unit ("1e5.5"). The unit
# begins with nothing that could still be meant as part of the number, except that "-" alone means "no unit".
_QUANTITY = re.compile(
    rf"[{_BLANKS}]*+(?:(\?)|([+-]?+(?:[0-9]++(?:\.[0-9]*+)?+|\.[0-9]++)(?:[eE][+-]?+[0-9]++)?+))"
    rf"[{_BLANKS}]*+(-|[^\d\s.,_+\-?'/][^\n]*+)?+[{_BLANKS}]*+\Z"
)
_SIGNIFICANT = re.compile(r"[1-9]")


def split_quantity(text: str, address: str = "") -> tuple[float | None, str, bool]:
    """(number, unit text, unknown) of a quantity written as text; number is None where it is unknown ("?").

    The unit text is "" where none is given. Raises SchemaViolation for anything that is no number with a unit.
    """
    if not isinstance(text, str) or len(text) > MAX_TEXT:
        raise SchemaViolation(f"A quantity is a text of at most {MAX_TEXT} characters.", address=address, hint=_EXAMPLE)
    match = _QUANTITY.match(text)
    if match is None:
        raise SchemaViolation(f"{shown(text)} is not a number with a unit.", address=address, hint=_hint(text))
    unknown, digits, unit = match.groups(default="")
    unit = unit.rstrip(_BLANKS)
    if unknown:
        return None, unit, True
    value = float(digits)
    if math.isinf(value) or (value == 0.0 and _SIGNIFICANT.search(re.split("[eE]", digits)[0])):
        raise SchemaViolation(f"The number in {shown(text)} cannot be represented.", address=address, hint=_EXAMPLE)
    return value, unit, False


_EXAMPLE = 'Write for example "40 barg", "-3.2e-4 m", or "? degC" for an unknown.'


def _hint(text: str) -> str:
    """Why a text is no quantity, in the order of what people write."""
    stripped = text.strip()
    if not stripped:
        return _EXAMPLE
    if re.match(r"[+-]?[0-9]+,[0-9]", stripped):
        return "Write a decimal point, and no signs between groups of digits: 12.5, not 12,5; 12500, not 12,500."
    if re.match(r"[+-]?[0-9]+[ _'\u00a0\u202f][0-9]", stripped):
        return "Write a number without signs or blanks between groups of digits: 12500, not 12 500."
    if stripped[0] in "−–":
        return "Write a minus sign as the plain hyphen: -5."
    if re.match(r"[+-]?(nan|inf)", stripped, re.IGNORECASE):
        return 'Every number must be finite; for an unknown write "?".'
    if not stripped.isascii() and any(character.isdigit() and character not in "0123456789" for character in stripped):
        return "Write digits as 0 to 9. " + _EXAMPLE
    return _EXAMPLE
