"""The shape of a row of the unit table."""

Row = tuple[str, str, tuple[str, ...]]
"""Symbol, what it is built from (in pint's language), aliases that are no regular variant of the symbol."""
