"""Every call of the contract answers as the contract says, and every failure in the one shape."""

from __future__ import annotations

import json
import logging
import re
from typing import Any

import pytest
from flask import Flask
from flask.testing import FlaskClient
from openapi_spec_validator import OpenAPIV31SpecValidator

from service.errors import CaseError
from service.web.docs import problem_types
from service.wire.operations import Operations
from tests.contract.promises import assert_problem, assert_promised, bundled, contract, let_down

PATHS: dict[str, Any] = contract()["paths"]
METHODS = {"get", "post", "put", "patch", "delete", "head", "options"}
READ = sorted(path for path, item in PATHS.items() if "get" in item)
COMPUTED = sorted(path for path, item in PATHS.items() if "post" in item)
NAMED = sorted(path for path in READ if "{name}" in path)
PROBES = ["/livez", "/readyz"]


def filled(path: str) -> str:
    """The path with its parameter's example."""
    stated = PATHS[path]["get"].get("parameters", [])
    return path.replace("{name}", next((str(p["example"]) for p in stated if p["in"] == "path"), ""))


def test_the_paths_of_the_contract_are_the_routes_of_the_code(app: Flask) -> None:
    routes = {
        (re.sub(r"<(?:\w+:)?(\w+)>", r"{\1}", rule.rule), method.lower())
        for rule in app.url_map.iter_rules()
        for method in (rule.methods or set()) - {"HEAD", "OPTIONS"}
    }
    stated = {(path, method) for path, item in PATHS.items() for method in item if method in METHODS}
    assert stated == routes


@pytest.mark.parametrize("path", READ)
def test_a_page_is_as_the_contract_says(client: FlaskClient, path: str) -> None:
    reply = client.get(filled(path))
    assert reply.status_code == 200
    assert assert_promised(reply, path, "get")


@pytest.mark.parametrize("path", COMPUTED)
def test_the_example_of_a_call_is_answered_as_the_contract_says(client: FlaskClient, path: str) -> None:
    example = PATHS[path]["post"]["requestBody"]["content"]["application/json"]["example"]
    reply = client.post(path, json=example)
    assert reply.status_code == 200, reply.data[:500]
    assert assert_promised(reply, path, "post")


@pytest.mark.parametrize("path", COMPUTED)
def test_a_computed_answer_says_where_its_time_went(client: FlaskClient, path: str) -> None:
    example = PATHS[path]["post"]["requestBody"]["content"]["application/json"]["example"]
    spans = client.post(path, json=example).headers["Server-Timing"]
    assert re.fullmatch(r"parse;dur=\d+\.\d\d, solve;dur=\d+\.\d\d, dump;dur=\d+\.\d\d", spans)


def test_the_same_request_gets_the_same_bytes(client: FlaskClient) -> None:
    first, second = (client.post("/v1/balances", json=let_down()).data for _ in range(2))
    assert first == second


def test_every_example_that_is_listed_can_be_got_and_is_solved(client: FlaskClient) -> None:
    listed = client.get("/v1/examples").get_json()["examples"]
    assert listed
    for entry in listed:
        case = client.get(f"/v1/examples/{entry['name']}").data
        reply = client.post("/v1/balances", data=case, content_type="application/json")
        assert reply.status_code == 200, (entry["name"], reply.data[:500])
        assert_promised(reply, "/v1/balances", "post")


@pytest.mark.parametrize("path", [path for path in READ if path not in PROBES])
def test_a_page_that_the_client_has_is_not_sent_again(client: FlaskClient, path: str) -> None:
    first = client.get(filled(path))
    tag = first.headers["ETag"]
    again = client.get(filled(path), headers={"If-None-Match": tag})
    assert (again.status_code, again.data) == (304, b"")
    assert again.headers["ETag"] == tag
    other = client.get(filled(path), headers={"If-None-Match": '"another"'})
    assert (other.status_code, other.data) == (200, first.data)


@pytest.mark.parametrize("path", PROBES)
def test_a_probe_is_never_stored(client: FlaskClient, path: str) -> None:
    assert client.get(path).headers["Cache-Control"] == "no-store"


def test_a_verbose_readiness_lists_its_checks(client: FlaskClient) -> None:
    document = assert_promised(client.get("/readyz?verbose"), "/readyz", "get")
    assert [check["name"] for check in document["checks"]] == ["state of water", "schemas", "examples"]


# -- failures ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", ["/", "/v1", "/v1/balance", "/v1/balances/", "/nothing/" + "x" * 3_000, "/v1/units/a"])
def test_a_path_that_is_not_served_is_not_found(client: FlaskClient, path: str) -> None:
    if path == "/v1/balances/":  # a trailing slash names the same resource
        assert_problem(client.get(path), 405)
    else:
        assert_problem(client.get(path), 404, "not-found")


@pytest.mark.parametrize("path", NAMED)
@pytest.mark.parametrize("name", ["nothing", "..%2f..%2fetc%2fpasswd", "%00", "x" * 2_000, "REFPROP::water", "{}"])
def test_a_name_that_stands_for_nothing_is_not_found(client: FlaskClient, path: str, name: str) -> None:
    assert_problem(client.get(path.replace("{name}", name)), 404, "not-found")


@pytest.mark.parametrize("path", sorted(PATHS))
def test_a_method_that_is_not_served_is_told_with_those_that_are(client: FlaskClient, path: str) -> None:
    reply = client.delete(path.replace("{name}", "water"))
    assert_problem(reply, 405)
    served = {method.upper() for method in PATHS[path] if method in METHODS}
    assert served <= set(reply.headers["Allow"].split(", "))


def test_an_unforeseen_failure_tells_nothing_of_the_inside_and_is_logged_with_its_number(
    app: Flask, client: FlaskClient, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    def broken() -> None:
        raise RuntimeError("the secret inside")

    monkeypatch.setitem(app.view_functions, "health.live", broken)
    with caplog.at_level(logging.ERROR, logger="service.web"):
        problem = assert_problem(client.get("/livez"), 500)
    assert "secret" not in json.dumps(problem)
    assert "RuntimeError" not in json.dumps(problem)
    (record,) = caplog.records
    assert record.__dict__["told"]["instance"] == problem["instance"]
    assert "the secret inside" in caplog.text


def test_a_service_that_cannot_find_states_is_not_ready(
    app: Flask, client: FlaskClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: Any) -> None:
        raise CaseError("no property model")

    monkeypatch.setattr(Operations, "states", broken)
    assert "no property model" in assert_problem(client.get("/readyz"), 503)["detail"]


def test_everything_wrong_is_told_at_once_and_at_its_place(client: FlaskClient) -> None:
    case = let_down()
    case["streams"][0]["state"] = {"p": "40 kg/s", "T": "400 degX"}
    case["streams"][1]["from"] = "valves"
    case["transfers"][0]["rate"] = 15
    problem = assert_problem(client.post("/v1/balances", json=case), 422, json_type(client, case), case)
    told = {entry["pointer"] for entry in problem["errors"]}
    assert told == {"#/streams/0/state/p", "#/streams/0/state/T", "#/streams/1/from", "#/transfers/0/rate"}


def json_type(client: FlaskClient, case: Any) -> str:
    """The problem type of a refusal; which of several comes first is not promised."""
    return str(client.post("/v1/balances", json=case).get_json()["type"]).rpartition("/")[2]


def test_a_case_with_hundreds_of_faults_gets_a_short_answer(client: FlaskClient) -> None:
    case = let_down()
    case["streams"] = [{"id": f"s{n}", "to": "nowhere" * 4, "state": {"p": "€" * 30}} for n in range(500)]
    reply = client.post("/v1/balances", json=case)
    problem = assert_problem(reply, 422, json_type(client, case), case)
    assert len(problem["errors"]) <= 20


# -- documentation -------------------------------------------------------------------------------------------------


def test_every_problem_type_of_the_code_has_a_page_with_its_meaning(client: FlaskClient) -> None:
    for kind in problem_types():
        page = assert_promised(client.get(f"/problems/{kind['type']}"), "/problems/{name}", "get")
        assert page["status"] == kind["status"]
        assert len(page["meaning"]) > 20


def test_the_reference_page_shows_every_call_and_every_problem_type(client: FlaskClient) -> None:
    page = client.get("/docs").get_data(as_text=True)
    for path in PATHS:
        assert f">{path}<" in page
    for kind in problem_types():
        assert kind["type"] in page
        assert kind["title"] in page


def test_the_reference_page_loads_nothing_from_anywhere(client: FlaskClient) -> None:
    reply = client.get("/docs")
    page = reply.get_data(as_text=True)
    assert "default-src 'none'" in reply.headers["Content-Security-Policy"]
    assert not re.search(r'<(script|img|link|iframe)\b|(src|href)="(https?:)?//|@import|url\(', page)


def test_every_link_of_the_reference_page_leads_somewhere(client: FlaskClient) -> None:
    page = client.get("/docs").get_data(as_text=True)
    targets = set(re.findall(r'href="([^"]+)"', page))
    anchors = set(re.findall(r'id="([^"]+)"', page))
    assert targets
    for target in targets:
        if target.startswith("#"):
            assert target[1:] in anchors
        else:
            assert client.get(target).status_code == 200, target


def test_the_contract_is_valid_openapi() -> None:
    OpenAPIV31SpecValidator(bundled()).validate()
