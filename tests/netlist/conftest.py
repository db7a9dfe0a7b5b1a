"""Reading short netlists, and the plain ngspice program as a second opinion."""

from __future__ import annotations

import re
import subprocess
from collections.abc import Callable
from pathlib import Path

import pytest

from stress.netlist.flat import Netlist
from stress.netlist.read import read_text
from stress.text.span import SourceErrors

CONTROL = """.control
set filetype=ascii
option reltol=1e-7 abstol=1e-14 vntol=1e-9
op
write {raw} all
quit
.endc
.end
"""


@pytest.fixture
def errors_of() -> Callable[[str], str]:
    """The printed errors of a text, whose title line is put before it."""

    def errors(body: str) -> str:
        with pytest.raises(SourceErrors) as caught:
            read_text(f"title\n{body}", path="set.cir")
        return str(caught.value)

    return errors


@pytest.fixture
def reading() -> Callable[..., Netlist]:
    """Read a text, whose title line is put before it."""

    def reading(body: str, **options: object) -> Netlist:
        return read_text(f"title\n{body}", path="set.cir", **options)  # type: ignore[arg-type]

    return reading


@pytest.fixture
def operating_point(tmp_path: Path) -> Callable[[str], dict[str, float]]:
    """Node voltages of a netlist by the plain ngspice program, in a folder of its own."""

    def solve(text: str) -> dict[str, float]:
        deck, raw = tmp_path / "deck.cir", tmp_path / "deck.raw"
        raw.unlink(missing_ok=True)
        body = re.sub(r"(?im)^\.end\s*$", "", text)
        deck.write_text(body + "\n" + CONTROL.format(raw=raw), encoding="utf-8")
        done = subprocess.run(
            ["ngspice", "-b", deck.name],
            cwd=tmp_path,
            env={"HOME": str(tmp_path), "PATH": "/usr/bin:/bin:/usr/local/bin"},
            capture_output=True,
            timeout=60,
            check=False,
        )
        assert raw.exists(), (done.stdout + done.stderr).decode("latin-1")[-800:]
        return _values(raw.read_text(encoding="latin-1"))

    return solve


def _values(raw: str) -> dict[str, float]:
    count = int(re.search(r"No\. Variables:\s*(\d+)", raw)[1])  # type: ignore[index]
    names = [line.split()[1] for line in raw.split("Variables:\n", 1)[1].split("\n")[:count]]
    told = [line for line in raw.split("Values:\n", 1)[1].split("\n") if line.strip()]
    numbers = [float(line.split()[-1]) for line in told[:count]]
    return {
        name[2:-1].lower(): number
        for name, number in zip(names, numbers, strict=True)
        if name.startswith("v(")
    }
