"""Kinds of quantity and their units: a closed table, conversion to and from SI, and numbers with units as text."""

from .kinds import KINDS, SYSTEMS, System
from .number import split_quantity
from .spelling import MAX_LENGTH, SPELLING_RULES
from .table import Kind, Unit, UnitTable

__all__ = ["KINDS", "MAX_LENGTH", "SPELLING_RULES", "SYSTEMS", "Kind", "System", "Unit", "UnitTable", "split_quantity"]
