"""Where an answer comes from: enough to reproduce it from its request."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from typing import Any

from marshmallow import Schema, fields

from service import __version__
from service.balance.case import STANDARD_ATMOSPHERE, STANDARD_GRAVITY
from service.balance.solution import FluidSource

MOLAR_GAS_CONSTANT = 8.314462618
"""[J/(mol K)], CODATA 2018."""


class FluidSourceSchema(Schema):
    fluid = fields.Raw()
    model = fields.Raw()
    citation = fields.Raw()
    reference_state = fields.Raw()


SOURCES = FluidSourceSchema(many=True)


def constants() -> dict[str, Any]:
    """The constants that every answer uses, with their sources."""
    return {
        "molar_gas_constant": {"value": MOLAR_GAS_CONSTANT, "unit": "J/mol/K", "source": "CODATA 2018"},
        "standard_gravity": {"value": STANDARD_GRAVITY, "unit": "m/s2", "source": "CGPM 1901"},
        "standard_atmosphere": {"value": STANDARD_ATMOSPHERE / 1000.0, "unit": "kPa", "source": "CGPM 1954"},
        "normal_conditions": "Nm3: 0 degC, 101.325 kPa; Sm3: 15 degC, 101.325 kPa; scf: 60 degF, 14.696 psi",
    }


def request_hash(request: object) -> str:
    """SHA-256 of the request in canonical form: members sorted, no blanks, UTF-8."""
    text = json.dumps(request, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    return hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


def provenance(sources: Sequence[FluidSource], request: object) -> dict[str, Any]:
    """Version, property models, constants, and the hash of the canonical request."""
    return {
        "version": __version__,
        "models": SOURCES.dump(sources),
        "constants": constants(),
        "request_sha256": request_hash(request),
    }
