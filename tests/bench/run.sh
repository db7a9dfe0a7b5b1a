#!/bin/sh
# The engine's numbers as a table, printed and kept in RESULTS.md; --quick compares fewer cases.
# Uses the environment that tests/run.sh makes.
set -eu
cd "$(dirname -- "$0")/../.."
[ -x .venv/bin/python ] || { echo "run tests/run.sh first: it makes the environment" >&2; exit 2; }
exec .venv/bin/python tests/bench/engine.py "$@"
