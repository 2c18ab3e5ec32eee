"""Bodies that are hostile, broken or of the wrong kind: each is refused with its reason, none is an internal error."""

from __future__ import annotations

import io
import json
from typing import Any

import pytest
from flask.testing import FlaskClient

from tests.contract.conftest import LARGEST_BODY
from tests.contract.promises import assert_problem, let_down

CALLS = ["/v1/balances", "/v1/balances/check", "/v1/balances/series", "/v1/states"]

MALFORMED = {
    "a repeated member": b'{"title": "a", "title": "b"}',
    "NaN": b'{"title": NaN}',
    "minus infinity": b'{"title": -Infinity}',
    "a number beyond every double": b'{"title": 1e999}',
    "an integer of 5000 digits": b'{"title": ' + b"9" * 5_000 + b"}",
    "brackets 100,000 deep": b"[" * 100_000,
    "objects 30,000 deep": b'{"a":' * 30_000,
    "a byte order mark": b"\xef\xbb\xbf{}",
    "half of a surrogate pair": b'{"title": "\\ud800"}',
    "half of a surrogate pair as a name": b'{"\\udfff": 1}',
    "bytes that are not UTF-8": b'{"title": "\xff"}',
    "UTF-16": '{"title": "a"}'.encode("utf-16"),
    "nothing": b"",
    "white space only": b" \n ",
    "a cut document": b'{"title": "a"',
    "two documents": b"{} {}",
    "a control character in a text": b'{"title": "a\x00"}',
    "a comment": b'{"title": "a" /* no */}',
}

NOT_A_REQUEST: list[Any] = [None, True, 0, 1.5, "text", [], [[]], {}, {"": 1}, {"streams": {}}, {"boundaries": [None]}]


@pytest.mark.parametrize("path", CALLS)
@pytest.mark.parametrize("name", MALFORMED)
def test_a_body_that_is_not_strict_json_is_refused_as_malformed(client: FlaskClient, path: str, name: str) -> None:
    reply = client.post(path, data=MALFORMED[name], content_type="application/json")
    problem = assert_problem(reply, 400, "malformed-json")
    assert problem["errors"][0]["hint"]


@pytest.mark.parametrize("path", CALLS)
@pytest.mark.parametrize("document", NOT_A_REQUEST, ids=json.dumps)
def test_json_of_another_shape_is_told_where_it_differs(client: FlaskClient, path: str, document: Any) -> None:
    reply = client.post(path, data=json.dumps(document), content_type="application/json")
    problem = assert_problem(reply, 422, "schema-violation", document)
    assert problem["errors"]


def test_a_malformed_body_is_told_with_its_line_and_column(client: FlaskClient) -> None:
    body = b'{\n  "title": "a",\n  "title": "b"\n}'
    problem = assert_problem(
        client.post("/v1/balances", data=body, content_type="application/json"), 400, "malformed-json"
    )
    assert "line 3, column 3" in problem["detail"]


@pytest.mark.parametrize("media_type", ["application/x-www-form-urlencoded", "text/plain", "", "application/jsonx"])
def test_another_media_type_is_refused_with_the_header_to_send(client: FlaskClient, media_type: str) -> None:
    reply = client.post("/v1/balances", data=json.dumps(let_down()), content_type=media_type)
    problem = assert_problem(reply, 415)
    assert "-H 'Content-Type: application/json'" in problem["detail"]
    assert reply.headers["Accept"] == "application/json"


def test_a_compressed_body_is_refused_with_the_encoding_to_send(client: FlaskClient) -> None:
    reply = client.post(
        "/v1/balances", data=b"\x1f\x8b", content_type="application/json", headers={"Content-Encoding": "gzip"}
    )
    assert_problem(reply, 415)
    assert reply.headers["Accept-Encoding"] == "identity"


def test_a_charset_beside_the_media_type_changes_nothing(client: FlaskClient) -> None:
    reply = client.post("/v1/balances", data=json.dumps(let_down()), content_type="application/json; charset=utf-8")
    assert reply.status_code == 200


def padded(size: int) -> bytes:
    """A case that white space makes `size` bytes long: cut anywhere behind its end it would still be solvable."""
    return json.dumps(let_down()).encode().ljust(size)


def chunked(client: FlaskClient, body: bytes) -> Any:
    """The body as a server hands on a chunked one: without a length, with an end."""
    environ = {"wsgi.input": io.BytesIO(body), "wsgi.input_terminated": True}
    return client.post(
        "/v1/balances", content_type="application/json", environ_overrides=environ, headers={"Content-Length": ""}
    )


def test_a_body_of_just_the_largest_size_is_read(client: FlaskClient) -> None:
    body = padded(LARGEST_BODY)
    assert client.post("/v1/balances", data=body, content_type="application/json").status_code == 200
    assert chunked(client, body).status_code == 200


def test_a_body_one_byte_too_large_is_refused(client: FlaskClient) -> None:
    reply = client.post("/v1/balances", data=padded(LARGEST_BODY + 1), content_type="application/json")
    problem = assert_problem(reply, 413, "payload-too-large")
    assert f"{LARGEST_BODY}" in problem["detail"]


def test_a_chunked_body_one_byte_too_large_is_refused_and_not_cut(client: FlaskClient) -> None:
    assert_problem(chunked(client, padded(LARGEST_BODY + 1)), 413, "payload-too-large")


class Broken(io.BytesIO):
    """A transfer that the server finds malformed half way."""

    def read(self, *_: Any) -> bytes:
        raise RuntimeError("invalid chunk size")


def test_a_body_that_breaks_off_is_the_clients_error(client: FlaskClient) -> None:
    environ = {"wsgi.input": Broken(), "wsgi.input_terminated": True}
    reply = client.post("/v1/balances", content_type="application/json", environ_overrides=environ)
    assert_problem(reply, 400)
