"""The application under test, built once: it only reads."""

from __future__ import annotations

import pytest
from flask import Flask
from flask.testing import FlaskClient

from service.app import create_app
from service.settings import Settings

LARGEST_BODY = 200_000


@pytest.fixture(scope="session")
def app() -> Flask:
    return create_app(Settings(max_body_bytes=LARGEST_BODY))


@pytest.fixture
def client(app: Flask) -> FlaskClient:
    return app.test_client()
