"""The same circuits by scipy's integrator and models written here, no line shared with ngspice.

Each model is integrated until it repeats; states are volts and amperes.
"""

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.special import lambertw

from stress.engine.case import Case, Settled

pytestmark = pytest.mark.ngspice

VT = 1.380649e-23 * 300.15 / 1.602176634e-19  # 27 degC
IS, N = 1e-9, 1.8


def diode_current(drive, ohm):
    """Current of a diode in series with a resistance, by Lambert's W (argument in its logarithm)."""
    nvt = N * VT
    exponent = (drive + IS * ohm) / nvt + np.log(IS * ohm / nvt)
    w = exponent - np.log(max(exponent, 1.0)) if exponent > 500 else None
    if w is None:
        w = float(np.real(lambertw(np.exp(exponent))))
    else:
        for _ in range(20):
            w -= (w + np.log(w) - exponent) * w / (1.0 + w)
    return nvt * w / ohm - IS


def periodic(slopes, start, *, period_s, periods, steps=2000):
    """Return (time, states) over the period that follows some settling ones."""
    settled = solve_ivp(
        slopes,
        (0.0, periods * period_s),
        start,
        method="LSODA",
        rtol=1e-8,
        atol=1e-9,
        max_step=period_s / 200,
        t_eval=[periods * period_s],
    )
    at = np.linspace(0.0, period_s, steps)
    last = solve_ivp(
        slopes,
        (0.0, period_s),
        settled.y[:, -1],
        method="LSODA",
        rtol=1e-9,
        atol=1e-10,
        max_step=period_s / 500,
        t_eval=at,
    )
    return at, last.y


def rectifier(t, y):
    drive = 100 * np.sin(2 * np.pi * 50 * t) - y[0]
    return [(diode_current(drive, 10.0) - y[0] / 1000.0) / 47e-6]


def doubler(t, y):
    source, load = 60 * np.sin(2 * np.pi * 60 * t), (y[0] + y[1]) / 4700.0
    up, down = diode_current(source - y[0], 22.0), diode_current(-source - y[1], 22.0)
    return [(up - load) / 22e-6, (down - load) / 22e-6]


def triode(t, y):
    """A resistance-coupled triode: the plate's capacitor and the bypassed cathode."""
    plate, cathode = y
    grid = 1.5 * np.sin(2 * np.pi * 100 * t)
    drive = grid - cathode + (plate - cathode) / 20.0
    current = 1e-3 * max(drive, 0.0) ** 1.5
    return [((250 - plate) / 47e3 - current) / 10e-9, (current - cathode / 1.5e3) / 25e-6]


MODELS = {
    "rectifier": (
        rectifier,
        (0.0,),
        40,
        0.02,
        "Vac a 0 SIN(0 100 50)\nRs a b 10\nD1 b c1 DM\nC1 c1 0 47u\nRl c1 0 1k\n"
        ".model DM D(IS=1n N=1.8)",
        (("c1", "0"),),
    ),
    "doubler": (
        doubler,
        (0.0, 0.0),
        40,
        1 / 60,
        "Vac a 0 SIN(0 60 60)\nR1 a b 22\nR2 a c 22\nD1 b p DM\nD2 n c DM\nC1 p 0 22u\nC2 0 n 22u\n"
        "Rl p n 4.7k\n.model DM D(IS=1n N=1.8)",
        (("p", "0"), ("0", "n")),
    ),
    "triode stage": (
        triode,
        (100.0, 2.0),
        40,
        0.01,
        "Vbb bb 0 250\nVg g 0 SIN(0 1.5 100)\nRp bb p 47k\nCp p 0 10n\nRk k 0 1.5k\nCk k 0 25u\n"
        "B1 p k I=1m*pow(max(V(g,k)+V(p,k)/20,0),1.5)",
        (("p", "0"), ("k", "0")),
    ),
}


@pytest.mark.parametrize("name", MODELS)
def test_a_second_solver_agrees(name, twin_of, pool):
    """Mean within 0.05 %, ripple within 0.5 %: the solver's own grid error is 4/3 of 0.02 %."""
    slopes, start, periods, period_s, cards, places = MODELS[name]
    (answer,) = pool.solve([Case(name=f"scipy {name}", twin=twin_of(cards, period_s=period_s))])
    assert isinstance(answer, Settled)
    at, states = periodic(slopes, start, period_s=period_s, periods=periods)

    for place, state in zip(places, states, strict=True):
        own = answer.waves.voltage(*place)
        mean = np.trapezoid(state, at) / period_s
        ripple = np.sqrt(np.trapezoid((state - mean) ** 2, at) / period_s)
        own_mean = answer.waves.mean(own)
        assert own_mean == pytest.approx(mean, rel=5e-4)
        assert answer.waves.rms(own - own_mean) == pytest.approx(ripple, rel=5e-3)
