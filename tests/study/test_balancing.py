"""Series strings: the published rule, and the sharing by an independent solution."""

import numpy as np
import pytest

from stress.study import balancing


def test_largest_resistor_by_the_published_rule():
    """R = (2·UR - V)/dI with dI = 0.0015·C·V µA, Cornell Dubilier guide [memory M]; by hand:
    (700 - 600) V / (0.0015·100·600 µA) = 1111.1 kΩ."""
    ohm = balancing.largest_resistor_ohm(100e-6, count=2, each_V=350.0, total_V=600.0)
    assert ohm == pytest.approx(1111.1e3, rel=1e-4)


def test_ratings_that_do_not_add_up_are_refused():
    with pytest.raises(ValueError, match="do not bear"):
        balancing.largest_resistor_ohm(100e-6, count=2, each_V=300.0, total_V=600.0)


@pytest.mark.parametrize("count", [2, 3, 4])
def test_sharing_by_nodal_analysis(count):
    """The string solved with numpy as a ladder: the first part leaks nothing."""
    value_F, ohm, total_V = 100e-6, 220e3, 300.0 * count
    spread = balancing.leakage_spread_A(value_F, total_V=total_V)
    resistors = [ohm * 1.05] + [ohm * 0.95] * (count - 1)
    leaks = [0.0] + [spread] * (count - 1)
    # Unknown: the voltage of each part. Equal currents in neighbours, and the sum of voltages.
    matrix, right = np.zeros((count, count)), np.zeros(count)
    for row in range(count - 1):
        matrix[row, row] = 1.0 / resistors[row]
        matrix[row, row + 1] = -1.0 / resistors[row + 1]
        right[row] = leaks[row + 1] - leaks[row]
    matrix[-1], right[-1] = 1.0, total_V
    expected_V = np.linalg.solve(matrix, right)[0]

    found = balancing.shared_V(value_F, count=count, resistor_ohm=ohm, total_V=total_V)
    assert found == pytest.approx(expected_V, rel=1e-9)
    assert found > total_V / count


def test_a_string_keeps_every_part_within_its_rating():
    string = balancing.series(
        47e-6, count=2, each_F=100e-6, each_V=350.0, steady_V=600.0, brief_V=650.0
    )
    assert string.share_V <= 350.0
    assert string.resistor_ohm == 680e3  # E12 below what the rule and 5 % resistors leave
    assert string.resistor_W >= 2.0 * string.share_V**2 / string.resistor_ohm
    # ±20 % by capacitance: V·(1/0.8)/(1/0.8 + 1/1.2) = 0.6 V
    assert string.brief_V == pytest.approx(0.6 * 650.0)


def test_no_resistor_can_share_what_is_too_much():
    with pytest.raises(ValueError, match="350"):
        balancing.series(47e-6, count=2, each_F=100e-6, each_V=350.0, steady_V=699.0, brief_V=0.0)
