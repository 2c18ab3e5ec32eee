#!/bin/sh
# Sets up a virtual environment with the test tools and runs linter, type checker and all tests; arguments go to pytest.
set -eu
cd "$(dirname "$0")/.."

python=${PYTHON:-python3}
if ! "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' 2>/dev/null; then
    echo "tests/run.sh: Python 3.11 or later is needed; set PYTHON to one (found: $("$python" -V 2>&1 || true))" >&2
    exit 2
fi
[ -x .venv/bin/python ] || "$python" -m venv .venv
.venv/bin/python -m pip install --quiet --disable-pip-version-check -e '.[test]'

.venv/bin/ruff check .
.venv/bin/ruff format --check .
.venv/bin/mypy
exec .venv/bin/python -m pytest -n 2 "$@"
