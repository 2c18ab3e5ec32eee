#!/bin/sh
# Makes .venv ready in the project's directory, once for each state of pyproject.toml:  sh deploy/venv.sh [EXTRA]
# A .venv that is there is used as it is; PYTHON chooses the interpreter for a new one.
set -eu
cd "$(dirname "$0")/.."
extra=${1:-}

recent() { "$1" -c 'import sys; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1; }

if ! { [ -x .venv/bin/python ] && recent .venv/bin/python; }; then
    python=
    for candidate in ${PYTHON:-python3 python3.11 python3.12 python3.13 python3.14}; do
        if recent "$candidate"; then python=$candidate; break; fi
    done
    if [ -z "$python" ]; then
        echo "Python 3.11 or later is needed, with its venv module; set PYTHON to one (looked at: ${PYTHON:-python3})." >&2
        exit 2
    fi
    echo "Making .venv with $("$python" -V) ..." >&2
    rm -rf .venv
    if ! "$python" -m venv .venv; then
        rm -rf .venv
        echo "The venv module does not work; on Debian: apt-get install python3-venv" >&2
        exit 2
    fi
fi

# The mark names what was installed; it is written last, so that a broken installation is repeated.
mark=".venv/installed${extra:+-$extra}"
wanted=$(cksum <pyproject.toml)
if [ "$(cat "$mark" 2>/dev/null || true)" != "$wanted" ]; then
    echo "Installing into .venv; the first time this takes a minute or two ..." >&2
    .venv/bin/python -m pip install -qq --disable-pip-version-check -e ".${extra:+[$extra]}" >&2
    printf '%s\n' "$wanted" >"$mark"
fi
