"""The composition root of the web application."""

from __future__ import annotations

from pathlib import Path

from flask import Flask

from service.logs import number_requests
from service.settings import Settings
from service.web import docs, failures, health, resources
from service.wire.library import schema_directory
from service.wire.operations import Operations


def create_app(settings: Settings) -> Flask:
    """The WSGI application for the settings. Builds every table; reads the files of the project once."""
    operations = Operations.build(settings)
    app = Flask("service.web", static_folder=None)
    app.url_map.strict_slashes = False
    number_requests(app)
    failures.install(app)
    app.register_blueprint(resources.balances(operations, settings.max_body_bytes))
    app.register_blueprint(resources.references(operations))
    app.register_blueprint(health.health(operations))
    app.register_blueprint(docs.docs(contract_file().read_bytes()))
    return app


def contract_file() -> Path:
    """openapi.yaml, which lies beside the directory of the schemas."""
    return schema_directory().parent / "openapi.yaml"
