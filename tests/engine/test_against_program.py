"""The same circuits as long plain transients of the ngspice program, from rest."""

import os
import shutil
import subprocess

import numpy as np
import pytest

from stress.engine.case import Case, Settled

pytestmark = [pytest.mark.ngspice, pytest.mark.program]
PERIODS = {"buck": 600, "output stage": 120}  # 120 ms and 300 ms; the slowest lasts 0.3 ms, 25 ms


def transient(folder, cards, *, period_s, periods):
    """Return (time, values by vector) of the last period, as the program computes it."""
    program = shutil.which("ngspice")
    assert program, "the ngspice program is missing"
    nodes = sorted(
        {word for card in cards.splitlines() for word in card.split()[1:3] if card[0] in "CRD"}
    )
    nodes = [node for node in nodes if node != "0"]
    step = period_s / 1000
    lines = [
        "* plain transient",
        cards,
        ".control",
        "set wr_singlescale",
        f"tran {step!r} {periods * period_s!r} {(periods - 1) * period_s!r} {step!r} uic",
        "wrdata out.txt " + " ".join(f"v({node})" for node in nodes),
        "quit",
        ".endc",
        ".options method=gear reltol=1e-5",
        ".end",
    ]
    (folder / "plain.cir").write_text("\n".join(lines), encoding="ascii")
    subprocess.run(
        [program, "-b", "plain.cir"],
        cwd=folder,
        env={**os.environ, "HOME": str(folder)},
        check=False,
        capture_output=True,
        timeout=120,
    )
    table = np.loadtxt(folder / "out.txt")
    return table[:, 0], dict(zip(nodes, table[:, 1:].T, strict=True))


def mean_and_ripple(time_s, values):
    span = time_s[-1] - time_s[0]
    mean = np.trapezoid(values, time_s) / span
    return mean, np.sqrt(np.trapezoid((values - mean) ** 2, time_s) / span)


def test_voltages_equal_those_of_the_program(circuit, twin_of, pool, tmp_path):
    """Direct values within 0.1 %, ripple within 1 %, against 1 V and 10 mV where smaller."""
    name, cards, period_s = circuit
    (answer,) = pool.solve([Case(name=f"program {name}", twin=twin_of(cards, period_s=period_s))])
    assert isinstance(answer, Settled)
    time_s, plain = transient(tmp_path, cards, period_s=period_s, periods=PERIODS.get(name, 150))

    for node, values in plain.items():
        mean, ripple = mean_and_ripple(time_s, values)
        own_mean, own_ripple = mean_and_ripple(answer.waves.time_s, answer.waves.voltage(node))
        assert own_mean == pytest.approx(mean, rel=1e-3, abs=max(1e-3, 1e-3 * ripple)), node
        assert own_ripple == pytest.approx(ripple, rel=1e-2, abs=1e-4), node
