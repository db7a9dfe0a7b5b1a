#!/bin/sh
# Every check: format, lint, types, tests. Sets itself up; can be run twice.
set -eu
. "$(dirname -- "$0")/../.ci/set_up.sh"
need_python
need_library
need_program ngspice ngspice
need_program chromium chromium
need_environment "[test]"
cd "$top"
"$venv/bin/ruff" format --check stress tests examples
"$venv/bin/ruff" check stress tests examples
"$venv/bin/mypy"
exec "$venv/bin/pytest" "$@"
