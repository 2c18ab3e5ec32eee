"""Plant energy balances as a service: a case in, unknowns, ledger, steps and cautions out."""

__version__ = "0.1.0"
