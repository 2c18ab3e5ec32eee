#!/bin/sh
# Sets up .venv with the test tools and runs linter, type checker and all tests; arguments go to pytest.
set -eu
cd "$(dirname "$0")/.."

sh deploy/venv.sh test
.venv/bin/ruff check .
.venv/bin/ruff format --check .
.venv/bin/mypy
exec .venv/bin/python -m pytest -n 2 "$@"
