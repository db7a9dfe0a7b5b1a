"""Style and voltage of a replacement, requirement by requirement."""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Role
from stress.parts import styles
from stress.study.replacement_style import style_for
from stress.study.replacement_voltage import Need, choose, needs
from stress.study.result import Worst


def position_of(circuit_of, *, value_F=1e-7, style="paper", rated_V=400.0, role=Role.COUPLING):
    position = circuit_of(f"C1 a b {value_F}", roles={"C1": role}).position("C1")
    return replace(position, style=styles.find(style), rated_V=rated_V)


@pytest.mark.parametrize(
    ("style", "value_F", "reverse_V", "safety_class", "slope", "role", "fitted"),
    [
        # wax paper is replaced on sight, by film (common practice)
        ("paper", 2e-8, None, None, 0.0, Role.COUPLING, "film"),
        ("paper-oil", 2e-5, None, None, 0.0, Role.RESERVOIR, "film-pp"),
        ("mica", 1e-10, None, None, 0.0, Role.TUNING, "mica"),
        ("aluminium", 4e-5, 0.0, None, 0.0, Role.RESERVOIR, "aluminium"),
        ("aluminium-wet", 8e-6, 0.0, None, 0.0, Role.RESERVOIR, "aluminium"),
        # IEC 60384-14
        ("paper", 2e-8, None, "Y", 0.0, Role.LINE_CHASSIS, "line-Y"),
        ("paper", 2e-8, None, "X", 0.0, Role.LINE_ACROSS, "line-X"),
        # a polar part stands 1 V the wrong way round (Vishay 198 PHR-SI)
        ("aluminium", 4e-6, 5.0, None, 0.0, Role.COUPLING, "film"),
        ("aluminium", 1e-4, 0.9, None, 0.0, Role.COUPLING, "aluminium"),
        ("aluminium", 1e-4, 5.0, None, 0.0, Role.COUPLING, "aluminium-nonpolar"),
        # 10 V/µs of polyester, half used; 50 V/µs of polypropylene
        ("paper", 5e-9, None, None, 4e6, Role.COUPLING, "film"),
        ("paper", 5e-9, None, None, 12e6, Role.COUPLING, "film-pp"),
        ("paper", 5e-9, None, None, 100e6, Role.COUPLING, "snubber"),
        ("paper", 5e-9, None, None, 1e5, Role.BUFFER, "film-pp"),
        ("film", 1e-9, None, None, 1e5, Role.SNUBBER, "snubber"),
    ],
)
def test_style(circuit_of, style, value_F, reverse_V, safety_class, slope, role, fitted):
    rated_V = 63.0 if style == "aluminium" else 400.0
    position = position_of(circuit_of, value_F=value_F, style=style, rated_V=rated_V, role=role)
    found = style_for(position, safety_class=safety_class, reverse_V=reverse_V, slope_V_per_s=slope)
    assert found.style.name == fitted
    assert found.rule


def test_large_polar_parts_go_back_to_back(circuit_of):
    position = position_of(circuit_of, value_F=1e-4, style="aluminium", rated_V=350.0)
    found = style_for(position, safety_class=None, reverse_V=40.0, slope_V_per_s=0.0)
    assert found.back_to_back
    assert "40 V the wrong way round" in found.why


def asked(position, *, style, worst_V, share=0.8, brief_V=None, ac_V=0.0):
    worst = Worst(
        position="C1", worst_V=worst_V, condition="high", brief_V=brief_V, brief_condition="inrush"
    )
    lasting = Need(worst_V / share, f"{worst_V} V lasts", "the policy's line")
    return needs(position, style=styles.find(style), worst=worst, lasting=lasting, ac_V=ac_V)


@pytest.mark.parametrize(
    ("style", "rated_V", "worst_V", "share", "brief_V", "expected_V", "rule"),
    [
        # 420 V / 0.8 = 525 V, next film step
        ("film", 400.0, 420.0, 0.8, None, 630.0, "policy"),
        ("film", 400.0, 200.0, 0.8, None, 400.0, "never below"),
        # 480 V for a moment is within 1.1 · 450 V (IEC 60384-4)
        ("aluminium", 350.0, 330.0, 0.9, 480.0, 450.0, "surge"),
        # 500 V is not: 1.1 · 450 V = 495 V
        ("aluminium", 350.0, 330.0, 0.9, 500.0, 500.0, "surge"),
        # below 315 V the surge ratio is 1.15: 180 V is within 1.15 · 160 V = 184 V
        ("aluminium", 100.0, 120.0, 0.9, 184.0, 160.0, "surge"),
        ("aluminium", 100.0, 120.0, 0.9, 185.0, 200.0, "surge"),
        # film has no surge rating
        ("film", 200.0, 200.0, 0.8, 450.0, 630.0, "no surge rating"),
        ("aluminium", 25.0, 12.0, 0.8, None, 25.0, "never below"),
    ],
)
def test_rating(circuit_of, style, rated_V, worst_V, share, brief_V, expected_V, rule):
    position = position_of(circuit_of, rated_V=rated_V, style=style)
    wanted = asked(position, style=style, worst_V=worst_V, share=share, brief_V=brief_V)
    found = choose(wanted, position=position, style=styles.find(style))
    assert found.rated_V == expected_V
    assert found.count == 1
    assert rule in found.governing.rule


def test_alternating_voltage_asks_for_more(circuit_of):
    # 250 V rms of alternating voltage on polypropylene: 250/0.35 = 714 V dc (Vishay MMKP 386)
    position = position_of(circuit_of, rated_V=400.0)
    wanted = asked(position, style="film-pp", worst_V=354.0, ac_V=250.0)
    found = choose(wanted, position=position, style=styles.find("film-pp"))
    assert found.governing.volts == pytest.approx(250.0 / 0.35)
    assert found.rated_V == 1000.0


def test_an_old_rating_that_nobody_sells_is_left_with_the_reason(circuit_of):
    position = position_of(circuit_of, rated_V=600.0, style="aluminium", value_F=1e-5)
    wanted = asked(position, style="aluminium", worst_V=380.0, share=0.9)
    found = choose(wanted, position=position, style=styles.find("aluminium"))
    assert found.rated_V == 500.0
    assert "below the old part's 600 V" in found.below


def test_no_single_part_serves(circuit_of):
    # 620 V / 0.9 = 689 V: two of 450 V leave the spread of ±20 % (689·1.2/2 = 413 V)
    position = position_of(circuit_of, rated_V=None, style="aluminium", value_F=1e-5)
    wanted = asked(position, style="aluminium", worst_V=620.0, share=0.9)
    found = choose(wanted, position=position, style=styles.find("aluminium"))
    assert (found.count, found.rated_V) == (2, 420.0)
    assert found.short == ""


def test_what_no_string_covers_is_said(circuit_of):
    position = position_of(circuit_of, rated_V=None, style="aluminium")
    found = choose(
        (Need(5000.0, "5 kV lasts", "policy"),),
        position=position,
        style=styles.find("aluminium"),
    )
    assert "not even 4 in series" in found.short


def test_the_largest_need_comes_first(circuit_of):
    position = position_of(circuit_of, rated_V=400.0)
    wanted = asked(position, style="film", worst_V=100.0, brief_V=300.0)
    assert [need.volts for need in wanted] == [400.0, 300.0, 125.0]
