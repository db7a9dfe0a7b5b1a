# Set-up shared by examples/quickstart.sh and tests/run.sh; sourced, not run. POSIX sh.
# Makes .venv in the top folder of the checkout and brings libngspice where it is missing.
# Can be run again at any time: what is there already is left alone.

top=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd)
venv="$top/.venv"
: "${PYTHON:=python3}"

say() { printf '%s\n' "$*" >&2; }

as_root() {
    if [ "$(id -u)" -eq 0 ]; then "$@"; else sudo "$@"; fi
}

# install PACKAGE...: Debian packages by the system's package manager.
install() {
    if ! command -v apt-get >/dev/null 2>&1; then return 1; fi
    if [ "$(id -u)" -ne 0 ] && ! command -v sudo >/dev/null 2>&1; then return 1; fi
    say "installing: $*"
    as_root env DEBIAN_FRONTEND=noninteractive apt-get update -qq >/dev/null &&
        as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "$@" >/dev/null
}

have_library() {
    [ -n "${NGSPICE_LIBRARY_PATH:-}" ] && return 0
    "$PYTHON" - <<'PYTHON'
import ctypes
import ctypes.util
import sys

names = [ctypes.util.find_library("ngspice"), "libngspice.so.0", "libngspice.so", "libngspice.dylib"]
for name in filter(None, names):
    try:
        ctypes.CDLL(name)
    except OSError:
        continue
    sys.exit(0)
sys.exit(1)
PYTHON
}

how_to_get_ngspice() {
    say "The ngspice library (libngspice) is missing and could not be installed from here."
    say "  Debian, Ubuntu:  sudo apt-get install libngspice0"
    say "  Fedora:          sudo dnf install libngspice"
    say "  macOS:           brew install libngspice"
    say "  Windows:         unpack the 64-bit shared-library archive of ngspice and set"
    say "                   NGSPICE_LIBRARY_PATH to the full path of its ngspice.dll"
    say "Then run this command again. A library kept elsewhere is named by NGSPICE_LIBRARY_PATH."
}

need_python() {
    if ! "$PYTHON" -c 'import sys; sys.exit(not (3, 11) <= sys.version_info < (3, 14))' 2>/dev/null; then
        say "Python 3.11, 3.12 or 3.13 is needed; set PYTHON to the one to use."
        exit 1
    fi
}

need_library() {
    if have_library; then return 0; fi
    install libngspice0 || true
    have_library || { how_to_get_ngspice; exit 1; }
}

# need_program PROGRAM PACKAGE: for the tests only.
need_program() {
    if command -v "$1" >/dev/null 2>&1; then return 0; fi
    install "$2" || true
    command -v "$1" >/dev/null 2>&1 || { say "$1 is missing: install the package $2"; exit 1; }
}

# need_environment EXTRAS: the virtual environment with this checkout in it; EXTRAS is "" or "[test]".
need_environment() {
    if [ ! -x "$venv/bin/python" ]; then
        if ! "$PYTHON" -m venv "$venv" >/dev/null 2>&1; then
            rm -rf "$venv"
            install python3-venv || true
            "$PYTHON" -m venv "$venv" || { say "install python3-venv and run this again"; exit 1; }
        fi
    fi
    stamp="$venv/.installed$1"
    if [ ! -e "$stamp" ] || [ "$top/pyproject.toml" -nt "$stamp" ]; then
        say "installing capstress$1 into .venv"
        "$venv/bin/python" -m pip install --quiet --disable-pip-version-check --editable "$top$1"
        : >"$stamp"
    fi
}
