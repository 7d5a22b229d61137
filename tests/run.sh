#!/usr/bin/env bash
# Everything that has to pass: lint, format, types, tests with doctests and warnings as errors.
# Makes a fresh virtual environment and installs the wheel there, so that what is tested is what a
# user gets. Use: bash tests/run.sh [words for pytest]
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

python="${PYTHON:-python3}"
environment="$(mktemp -d)"
trap 'rm -rf "$environment"' EXIT

"$python" -c 'import sys; sys.exit(None if sys.version_info >= (3, 11) else "set PYTHON to a Python 3.11 or newer")'
"$python" -m venv "$environment"
"$environment/bin/pip" install --quiet --disable-pip-version-check ".[test]"

step() { printf '\n== %s\n' "$*"; "$environment/bin/$@"; }
step ruff check .
step ruff format --check .
step mypy
step pytest -n 2 "$@" ./tests --pyargs filmstack
