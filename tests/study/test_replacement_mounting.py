"""Outer foil, metal case, cans, the fitted circuit and the shopping list."""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Kind, Part, Role
from stress.parts import styles
from stress.study import shopping
from stress.study.fitted import fitted
from stress.study.replacement_mounting import can_of, metal_case, outer_foil
from stress.study.result import Replacement


def tube(circuit, **pins):
    span = circuit.netlist.elements[0].span
    return Part(name="XU1", kind=Kind.TUBE, pins=pins, span=span)


@pytest.mark.parametrize(
    ("lines", "pins", "expected"),
    [
        # A plate with its load against a grid with its leak: the plate drives, foil there.
        (("C1 p g 1e-8", "R1 p b 1e5", "R2 g 0 4.7e5"), {"plate": "p"}, "to node p"),
        (("C1 g p 1e-8", "R1 p b 1e5", "R2 g 0 4.7e5"), {"plate": "p"}, "to node p"),
        # A bypass: foil to chassis.
        (("C1 s 0 1e-7", "R1 s b 1e5"), {"screen": "s"}, "to node 0"),
        # B+ with its reservoir against a screen.
        (("C1 s b 1e-7", "R1 s b 1e5", "C2 b 0 4e-5"), {}, "to node b"),
        (("C1 x y 1e-8", "R1 x 0 1e5", "R2 y 0 1e5"), {}, "either way round"),
    ],
)
def test_outer_foil(circuit_of, lines, pins, expected):
    """Common practice: to the end of lower impedance, where it shields."""
    circuit = circuit_of(*lines)
    circuit = replace(circuit, parts=(tube(circuit, **pins),))
    found = outer_foil(circuit.position("C1"), circuit=circuit, style="film")
    assert expected in found


def test_the_inside_of_a_tube_model_does_not_count(circuit_of):
    # A grid is of high impedance, whatever its model draws grid current through.
    lines = ("C1 p g 1e-8", "R1 p b 1e5", "R2 g 0 4.7e5", "Rmodel g m 2000")
    circuit = circuit_of(*lines)
    grid = replace(tube(circuit, plate="p", grid="g"), elements=("Rmodel",))
    found = outer_foil(
        circuit.position("C1"), circuit=replace(circuit, parts=(grid,)), style="film"
    )
    assert "to node p" in found


@pytest.mark.parametrize("style", ["mica", "ceramic-1", "aluminium", "line-Y"])
def test_styles_without_an_outer_foil(circuit_of, style):
    circuit = circuit_of("C1 s 0 1e-7")
    assert outer_foil(circuit.position("C1"), circuit=circuit, style=style) == ""


@pytest.mark.parametrize(
    ("minus", "live", "expected"),
    [
        ("0", ("l1", "l2"), "may touch it"),
        ("0", ("l1", "0"), "hangs on the line: insulate"),
        ("x", ("l1", "l2"), "node x (-18 V from ground): insulate it from the chassis"),
    ],
)
def test_metal_case(circuit_of, minus, live, expected):
    circuit = circuit_of("C1 b 0 1e-5", live=live)
    position = circuit.position("C1")
    assert expected in metal_case(position, circuit=circuit, minus=minus, volts=-18.0)


def part(name, *, value_F=47e-6, rated_V=450.0, style="aluminium", **keys):
    return Replacement(
        position=name,
        value_F=value_F,
        rated_V=rated_V,
        style=style,
        ripple_rms_A=keys.pop("ripple_rms_A", None),
        reason="",
        **keys,
    )


@pytest.fixture
def three(circuit_of):
    circuit = circuit_of("C1 b 0 4e-5", "C2 c 0 2e-5", "C3 d 0 2e-5", "C4 d e 5e-8")
    positions = [replace(p, can="K1") if p.name in ("C1", "C2") else p for p in circuit.positions]
    return replace(circuit, positions=tuple(positions))


def test_sections_of_a_can(three):
    assert [p.name for p in can_of(three.position("C2"), circuit=three)] == ["C1", "C2"]
    assert can_of(three.position("C3"), circuit=three) == ()


def test_the_fitted_circuit(three):
    chosen = {
        "C1": part("C1"),
        "C3": part("C3", value_F=22e-6, balance_ohm=440e3, quantity=2),
        "C4": part("C4", value_F=47e-9, rated_V=630.0, style="film"),
    }
    found = fitted(three, chosen)
    assert [p.value_F for p in found.positions] == [47e-6, 2e-5, 22e-6, 47e-9]
    assert found.position("C4").style is styles.find("film")
    assert found.position("C4").style_source == "fitted"
    assert {e.name: e.value for e in found.netlist.elements} == {
        "C1": 47e-6,
        "C2": 2e-5,
        "C3": 22e-6,
        "C3#balance": 440e3,
        "C4": 47e-9,
    }
    assert three.position("C1").value_F == 4e-5  # the circuit as found is as it was


def test_a_line_part_is_judged_by_the_crest_of_its_rating(three):
    chosen = part("C4", value_F=47e-9, rated_V=275.0, style="line-X", safety_class="X")
    found = fitted(three, {"C4": chosen})
    assert found.position("C4").rated_V == pytest.approx(388.9, abs=0.1)  # 275 V · √2


def test_shopping_list(three):
    chosen = {
        "C1": part("C1", ripple_rms_A=0.16, ripple_Hz=120.0),
        "C2": part("C2", value_F=22e-6, rated_V=400.0, ripple_rms_A=0.02, ripple_Hz=120.0),
        "C3": part(
            "C3",
            value_F=22e-6,
            rated_V=350.0,
            parts_F=(47e-6, 47e-6),
            quantity=2,
            arrangement="two in series with 220 kΩ 1 W across each",
        ),
        "C4": part("C4", value_F=47e-9, rated_V=630.0, style="film"),
    }
    found = shopping.rows(chosen, circuit=three)
    can, pair, film = found
    assert (can.designators, can.quantity, can.value_F) == (("C1", "C2"), 1, (47e-6, 22e-6))
    assert (can.rated_V, can.ripple_rms_A, can.ripple_Hz) == (450.0, 0.16, 120.0)
    assert can.remarks.startswith("can K1: one part with 2 sections")
    assert (pair.quantity, pair.value_F, pair.rated_V) == (2, (47e-6,), 350.0)
    assert pair.remarks == "two in series with 220 kΩ 1 W across each"
    assert (film.value_F, film.style, film.ripple_rms_A) == ((47e-9,), "film", None)


def test_equal_parts_stand_on_one_line(circuit_of):
    circuit = circuit_of("C1 a 0 1e-8", "C2 b 0 1e-8", "C3 c 0 1e-8")
    chosen = {name: part(name, value_F=1e-8, style="film") for name in ("C1", "C2")}
    chosen["C3"] = part("C3", value_F=1e-8, rated_V=250.0, style="line-Y", safety_class="Y")
    found = shopping.rows(chosen, circuit=circuit)
    assert [(row.designators, row.quantity) for row in found] == [(("C1", "C2"), 2), (("C3",), 1)]
    assert (found[1].rated_V, found[1].safety_class) == (250.0, "Y")


def test_roles_do_not_matter_for_the_list(circuit_of):
    circuit = circuit_of("C1 a 0 1e-8", roles={"C1": Role.TUNING})
    assert shopping.rows({}, circuit=circuit) == ()
