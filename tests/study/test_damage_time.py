"""Orders of magnitude of the time to damage."""

import pytest

from stress.study.damage_time import fuse_s, resistor_s, winding_s


def test_winding_against_the_adiabatic_balance():
    # Hand calculation: 7.5 A/mm² in copper of 2.2e-8 Ω·m gives 1.24 MW/m³, 3.45 MJ/m³K takes
    # 279 s for 100 K; twice the current, a quarter of the time.
    assert winding_s(3.0) == pytest.approx(279.0, rel=0.01)
    assert winding_s(6.0) == pytest.approx(winding_s(3.0) / 4.0)


@pytest.mark.parametrize(("share", "seconds"), [(6.25, 5.0), (11.5, 2.5), (1.2, None)])
def test_resistor_against_its_overload_test(share, seconds):
    # IEC 60115-1 short-time overload: 2.5 times the rated voltage for 5 s (from memory).
    assert resistor_s(share) == seconds


@pytest.mark.parametrize(
    ("share", "blow", "seconds"),
    [(1.5, "fast", None), (2.2, "fast", 1800.0), (3.0, "fast", 2.0), (12.0, "slow", 0.3)],
)
def test_fuse_by_class(share, blow, seconds):
    # IEC 60127-2, largest pre-arcing times (from memory, to be confirmed).
    assert fuse_s(share, blow) == seconds
