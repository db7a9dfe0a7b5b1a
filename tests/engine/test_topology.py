"""What a circuit lacks for a simulation."""

import pytest

from stress.engine.topology import LoopOfSources, gaps

CASES = [
    ("V1 a 0 5\nR1 a b 1k\nR2 b 0 1k", (), ()),
    ("V1 a 0 5\nC1 a b 1u\nC2 b 0 1u", ("b",), ()),
    ("V1 a 0 5\nR1 a 0 1k\nL1 p q 1\nR2 p q 5\nC1 p 0 1u", ("p",), ()),
    ("V1 a 0 5\nL1 a 0 1", (), ("L1",)),
    ("V1 a 0 5\nR1 a b 1\nL1 b 0 1\nL2 b 0 2", (), ("L2",)),
    ("V1 a 0 5\nR1 a b 1k\nD1 b c DM\nC1 c 0 1u\n.model DM D", (), ()),
    ("I1 0 a 1m\nC1 a 0 1u", ("a",), ()),
]


@pytest.mark.parametrize(("cards", "floating", "stiff"), CASES)
def test_gaps_are_found(twin_of, cards, floating, stiff):
    found = gaps(twin_of(cards).elements)

    assert found.floating == floating
    assert found.stiff == stiff


def test_a_loop_of_sources_has_no_solution(twin_of):
    with pytest.raises(LoopOfSources, match="V2"):
        gaps(twin_of("V1 a 0 5\nV2 a 0 6\nR1 a 0 1k").elements)
