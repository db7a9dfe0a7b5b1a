"""Messages seen from ngspice 39, and how much each matters."""

import pytest

from stress.engine.message import Weight, failures, reason, weigh

SEEN = [
    ("doAnalyses: TRAN:  Timestep too small; time = 1e-15, timestep = 1e-16", Weight.FAILURE),
    ("tran simulation(s) aborted", Weight.FAILURE),
    ("Error: circuit not parsed.", Weight.FAILURE),
    ("No. of Data Rows : 0", Weight.FAILURE),
    ("No. of Data Rows : 251", Weight.NOTE),
    ("Error on line 3 : r1 a", Weight.FAILURE),
    ("Error: 4.79955e+252, 2 out of range for ^", Weight.WARNING),
    ("Note: Starting dynamic gmin stepping", Weight.NOTE),
    ("Note: can't find init file.", Weight.NOTE),
    ("Using SPARSE 1.3 as Direct Linear Solver", Weight.NOTE),
    ("Doing analysis at TEMP = 27.000000 and TNOM = 27.000000", Weight.NOTE),
    ("Warning: v1: no DC value, transient time 0 value used", Weight.WARNING),
    ("Warning: singular matrix:  check node n3", Weight.WARNING),
    ("something that no version is known to print", Weight.WARNING),
    ("", Weight.NOTE),
]


@pytest.mark.parametrize(("line", "weight"), SEEN, ids=lambda part: str(part)[:24])
def test_every_line_is_sorted(line, weight):
    assert weigh(line) is weight


def test_failures_are_told_once_and_first():
    printed = ["Warning: odd", "tran simulation(s) aborted", "tran simulation(s) aborted"]

    assert failures(printed) == ("tran simulation(s) aborted",)
    assert reason(printed) == "tran simulation(s) aborted; Warning: odd"
