"""The scripts in examples/ do what they say."""

import re
import subprocess
import sys
from pathlib import Path

import pytest

EXAMPLES = Path(__file__).parents[1] / "examples"


def output_of(script: str) -> str:
    done = subprocess.run(
        [sys.executable, str(EXAMPLES / script)],
        capture_output=True,
        text=True,
        encoding="utf-8",
        timeout=300,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    return done.stdout


@pytest.mark.ngspice
def test_a_review_from_python_says_what_decides():
    printed = output_of("api_review.py")

    assert "15 positions, 0 unsolved cases" in printed
    coupling = re.search(r"C6, coupling.*: replace-before-power\n(.*\n)+?.*fit (\S+) uF", printed)
    assert coupling, printed
    assert "of leakage Lop passes its limit" in printed
    assert "C7, plate bypass" in printed
    assert "C3" not in printed


@pytest.mark.ngspice
def test_a_sweep_shows_the_leak_at_the_output_tube():
    rows = re.findall(
        r"^(\S+)(?: Mohm)? +(\S+) V +(\S+) mA +(\S+) V$", output_of("api_sweep.py"), re.M
    )

    assert [row[0] for row in rows] == ["sound", "50", "20", "10", "5", "2", "1"]
    grid, cathode, supply = zip(
        *[[float(number) for number in row[1:]] for row in rows], strict=True
    )
    assert list(grid) == sorted(grid)
    assert list(cathode) == sorted(cathode)
    assert list(supply) == sorted(supply, reverse=True)
    # A leak of 5 Mohm into 470 kohm puts some tenth of the plate voltage on the grid.
    assert 5.0 < grid[4] < 12.0
