#!/bin/sh
# Set everything up and review a reference equipment. Can be run twice.
set -eu
. "$(dirname -- "$0")/../.ci/set_up.sh"
need_python
need_library
need_environment ""
cd "$top"
exec "$venv/bin/capstress" review "${1:-netlists/shore_receiver.cir}"
