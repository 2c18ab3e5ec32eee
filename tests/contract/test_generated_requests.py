"""Requests made up from the contract, right and wrong ones: every reply is one that the contract has, none is a 500.

Few and always the same, so that the suite stays quick and a failure can be repeated.
"""

from __future__ import annotations

from typing import Any

import schemathesis
from flask import Flask
from hypothesis import HealthCheck, Phase, settings
from schemathesis import Case
from schemathesis.checks import not_a_server_error
from schemathesis.specs.openapi.checks import (
    content_type_conformance,
    response_schema_conformance,
    status_code_conformance,
)

from tests.contract.promises import bundled

CHECKS = [not_a_server_error, status_code_conformance, content_type_conformance, response_schema_conformance]

contract = schemathesis.openapi.from_dict(bundled())


@contract.parametrize()
@settings(
    max_examples=4,
    derandomize=True,
    database=None,
    deadline=None,
    phases=[Phase.explicit, Phase.generate],
    suppress_health_check=list(HealthCheck),
)
def test_every_reply_to_a_generated_request_is_one_of_the_contract(case: Case[Any], app: Flask) -> None:
    case.call_and_validate(app=app, checks=CHECKS)
