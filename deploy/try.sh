#!/bin/sh
# Sets everything up in a local virtual environment, starts the service, solves a demo case over HTTP, prints the answer,
# and goes on serving until Ctrl-C; with --once it stops after the answer. PORT chooses the port (8080, else a free one).
set -eu
cd "$(dirname "$0")/.."

once=no
for argument in "$@"; do
    case $argument in
    --once) once=yes ;;
    *) echo "usage: sh deploy/try.sh [--once]" >&2; exit 2 ;;
    esac
done

python=${PYTHON:-python3}
if ! "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' 2>/dev/null; then
    echo "deploy/try.sh: Python 3.11 or later is needed; set PYTHON to one (found: $("$python" -V 2>&1 || true))" >&2
    exit 2
fi
[ -x .venv/bin/python ] || "$python" -m venv .venv
echo "Installing into .venv ..."
.venv/bin/python -m pip install --quiet --disable-pip-version-check -e .

exec .venv/bin/python deploy/demo.py --once="$once" --port="${PORT:-8080}"
