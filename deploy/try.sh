#!/bin/sh
# From a fresh clone to a solved case: sets everything up in .venv, starts the service, solves a demo case over HTTP,
# prints the answer, and goes on serving until Ctrl-C; with --once it stops after the answer.
# PORT chooses the port (8080, else a free one), PYTHON the interpreter (3.11 or later).
set -eu
cd "$(dirname "$0")/.."

for argument in "$@"; do
    case $argument in
    --once) ;;
    *) echo "usage: sh deploy/try.sh [--once]" >&2; exit 2 ;;
    esac
done

sh deploy/venv.sh
exec .venv/bin/python deploy/demo.py --port "${PORT:-8080}" "$@"
