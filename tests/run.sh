#!/bin/sh
# Every check of the project: style, types, tests, timings. Makes a virtual environment in .venv the first time.
# Needs Debian's python3 (3.11 or later) and LibreOffice. As root, what is missing is installed with apt-get;
# otherwise this stops with the command to type.
set -eu
cd "$(dirname "$0")/.."

packages="ca-certificates python3 python3-venv"
python=${PYTHON:-python3}

ready() {
    "$python" -c 'import sys, venv, ensurepip; sys.exit(sys.version_info < (3, 11))' 2>/dev/null
}

if ! ready && [ "$(id -u)" -eq 0 ] && command -v apt-get >/dev/null; then
    apt-get update
    # shellcheck disable=SC2086
    DEBIAN_FRONTEND=noninteractive apt-get install --yes --no-install-recommends $packages
fi
if ! ready; then
    echo "The tests need Python 3.11 or later with its venv module. Type:" >&2
    echo "sudo apt-get update && sudo apt-get install --yes --no-install-recommends $packages" >&2
    echo "or name another Python: PYTHON=python3.12 sh tests/run.sh" >&2
    exit 1
fi

[ -x .venv/bin/python ] || "$python" -m venv .venv
.venv/bin/python -m pip install -qq --disable-pip-version-check --editable '.[test]'
.venv/bin/python tests/office.py

.venv/bin/ruff check .
.venv/bin/mypy
.venv/bin/pytest -q -n 2 --ignore=tests/bench "$@"
# Timings mean something only one at a time.
.venv/bin/pytest -q tests/bench
