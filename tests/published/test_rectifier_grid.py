"""Capacitor-input rectifiers over the grid of wCR and Rs/R, against tabulated values.

Parameters as in O. H. Schade, Proc. IRE 31, July 1943, pp. 341-361 [memory, high]; the values
are [computed], by an integration of the ideal circuit that ngspice agreed with to three
figures, printed to the digits below. Read-offs recalled from the printed charts agree within
reading error [memory, medium]. Here the peak is 10 kV, so that the drop of a real diode law
does not count. Tolerance: half the last printed digit, and the grid's own share (0.03 % of
direct values, 0.7 % of ripple, 1.5 % of peaks, where pulses are narrow).
"""

import math
from dataclasses import dataclass

import pytest
from scipy.optimize import brentq

from stress.engine.case import Case, Settled, Twin
from stress.engine.pool import Pool
from stress.netlist.read import read

pytestmark = pytest.mark.ngspice
PEAK_V, LOAD_OHM, LINE_HZ = 1e4, 1e4, 50.0
DIODE = ".model DM D(IS=1n N=1)"


@dataclass(frozen=True)
class Row:
    """Vdc/Vm in %, rms ripple in % of Vdc, peak over mean current of a diode."""

    circuit: str
    wcr: float
    share: float  # Rs/R
    direct: float
    ripple: float
    peak: float


TABLE = [
    Row("half", 10, 0.02, 76.35, 15.32, 7.93),
    Row("half", 10, 0.05, 70.56, 14.77, 6.42),
    Row("half", 10, 0.10, 62.16, 14.18, 5.43),
    Row("half", 20, 0.02, 82.40, 7.80, 8.42),
    Row("half", 20, 0.05, 73.88, 7.45, 6.56),
    Row("half", 20, 0.10, 63.91, 7.14, 5.48),
    Row("half", 100, 0.02, 85.16, 1.57, 8.61),
    Row("half", 100, 0.05, 75.12, 1.50, 6.60),
    Row("half", 100, 0.10, 64.52, 1.43, 5.49),
    Row("full", 10, 0.02, 86.94, 6.91, 10.05),
    Row("full", 10, 0.05, 81.66, 6.38, 7.90),
    Row("full", 10, 0.10, 74.45, 5.84, 6.54),
    Row("full", 50, 0.02, 90.18, 1.42, 10.65),
    Row("full", 50, 0.05, 83.15, 1.29, 8.06),
    Row("full", 100, 0.02, 90.31, 0.71, 10.67),
    Row("full", 100, 0.05, 83.20, 0.65, 8.06),
    Row("full", 100, 0.10, 75.17, 0.59, 6.60),
    Row("doubler", 10, 0.02, 130.7, 11.09, 6.25),
    Row("doubler", 10, 0.05, 117.7, 10.04, 5.28),
    Row("doubler", 10, 0.10, 98.8, 8.91, 4.59),
    Row("doubler", 50, 0.02, 154.4, 2.42, 6.99),
    Row("doubler", 50, 0.05, 128.5, 2.09, 5.48),
    Row("doubler", 100, 0.02, 155.7, 1.22, 7.02),
    Row("doubler", 100, 0.05, 128.9, 1.05, 5.49),
    Row("doubler", 100, 0.10, 103.3, 0.91, 4.67),
]


def cards(circuit, wcr, share):
    farad = wcr / (2 * math.pi * LINE_HZ * LOAD_OHM)
    ohm = share * LOAD_OHM
    source = f"SIN(0 {PEAK_V!r} {LINE_HZ!r})"
    if circuit == "half":
        return f"V1 a 0 {source}\nRs a b {ohm!r}\nD1 b p DM\nC1 p 0 {farad!r}\nRl p 0 {LOAD_OHM!r}"
    if circuit == "full":
        return (
            f"V1 a 0 {source}\nV2 0 c {source}\nRs a b {ohm!r}\nRt c d {ohm!r}\n"
            f"D1 b p DM\nD2 d p DM\nC1 p 0 {farad!r}\nRl p 0 {LOAD_OHM!r}"
        )
    return (
        f"V1 a 0 {source}\nRs a b {ohm!r}\nD1 b p DM\nD2 n b DM\n"
        f"C1 p 0 {farad!r}\nC2 0 n {farad!r}\nRl p n {LOAD_OHM!r}"
    )


@pytest.fixture(scope="module")
def solve(tmp_path_factory):
    """Return a function that settles a rectifier: (direct, ripple, peak, rms over mean)."""
    folder = tmp_path_factory.mktemp("rectifiers")
    with Pool(jobs=1) as pool:

        def settle(circuit, wcr, share):
            path = folder / "rectifier.cir"
            path.write_text(f"* t\n{cards(circuit, wcr, share)}\n{DIODE}\n.end\n", encoding="ascii")
            netlist = read(path)
            twin = Twin(
                elements=netlist.elements,
                models=netlist.models,
                period_s=1 / LINE_HZ,
                currents=("D1",),
            )
            name = f"{circuit} {wcr} {share}"
            (answer,) = pool.solve([Case(name=name, twin=twin)])
            assert isinstance(answer, Settled), answer
            waves = answer.waves
            out = waves.voltage("p", "n" if circuit == "doubler" else "0")
            current, mean = waves.current("D1"), waves.mean(out)
            average = waves.mean(current)
            return (
                mean / PEAK_V,
                waves.rms(out - mean) / mean,
                current.max() / average,
                waves.rms(current) / average,
            )

        yield settle


@pytest.mark.parametrize("row", TABLE, ids=lambda r: f"{r.circuit}-{r.wcr:g}-{r.share:g}")
def test_the_tabulated_grid(row, solve):
    direct, ripple, peak, _ = solve(row.circuit, row.wcr, row.share)

    last = 0.05 if row.circuit == "doubler" else 0.005
    assert 100 * direct == pytest.approx(row.direct, abs=last + 3e-4 * row.direct)
    assert 100 * ripple == pytest.approx(row.ripple, abs=0.005 + 7e-3 * row.ripple)
    assert peak == pytest.approx(row.peak, abs=0.005 + 1.5e-2 * row.peak)


@pytest.mark.parametrize("share", [0.005, 0.01, 0.02, 0.05, 0.10])
@pytest.mark.parametrize(("circuit", "turns"), [("half", 1.0), ("full", 2.0), ("doubler", 0.5)])
def test_a_very_large_capacitor(circuit, turns, share, solve):
    """tan t - t = pi Rs/(n R), Vdc = Vm cos t, of a doubler twice that with n = 1/2.

    At wCR = 2000 the ripple is 0.1 % at most, and so is its effect on the direct voltage.
    The rms value and peak of the current follow from a sine's tip above the direct voltage.
    """
    angle = brentq(lambda t: math.tan(t) - t - math.pi * share / turns, 1e-3, 1.5)
    cosine = math.cos(angle)
    average = (math.sin(angle) - angle * cosine) / math.pi  # of Vm/Rs
    square = (angle * (1 + 2 * cosine**2) - 1.5 * math.sin(2 * angle)) / (2 * math.pi)
    direct, _, peak, rms = solve(circuit, 2000.0, share)

    assert direct == pytest.approx(cosine * (2 if circuit == "doubler" else 1), rel=1.5e-3)
    assert peak == pytest.approx((1 - cosine) / average, rel=1.5e-2)
    assert rms == pytest.approx(math.sqrt(square) / average, rel=1e-2)


# Vdc/Vm as tabulated [computed] for the same limit, four figures: the formula above is the same.
LIMITS = [("half", 0.005, 0.9376), ("half", 0.05, 0.7518), ("full", 0.02, 0.9035)]


@pytest.mark.parametrize(("circuit", "share", "printed"), LIMITS)
def test_the_limit_as_tabulated(circuit, share, printed, solve):
    direct, *_ = solve(circuit, 2000.0, share)

    assert direct == pytest.approx(printed, rel=1.5e-3)
