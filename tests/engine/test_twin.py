"""The twin: every position as C, ESR and leakage; every pin behind a meter."""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Circuit, Kind, Line, Part, Position, Role
from stress.engine.twin import build, insulation_of, metered_pins
from stress.netlist.expression import Binary, Number, Voltage
from stress.netlist.flat import Element, Law, Netlist
from stress.parts.sheet import Sheet
from stress.parts.styles import find
from stress.text.span import Span

SPAN = Span("twin.cir", 1, 1, 1, "")


def capacitor(**known):
    return Position(
        name="C1",
        nodes=("p", "0"),
        role=Role.SMOOTHING,
        role_text="smoothing",
        style=find("aluminium"),
        style_source="sheet",
        value_F=10e-6,
        rated_V=450.0,
        span=SPAN,
        **known,
    )


def circuit(position, *, pins, elements=()):
    own = tuple(element.name for element in elements)
    tube = Part(name="XU1", kind=Kind.TUBE, pins=pins, elements=own, envelope="XU1", span=SPAN)
    c1 = Element(name="C1", letter="C", nodes=("p", "0"), value=10e-6, span=SPAN)
    return Circuit(
        netlist=Netlist(path="twin.cir", title="", elements=(c1, *elements)),
        sheet=Sheet(),
        name="twin",
        positions=(position,),
        parts=(tube,),
        line=Line(),
        period_s=0.02,
    )


PINS = {"plate": "p", "grid": "g", "cathode": "k"}


def test_a_position_becomes_three_elements():
    twin = build(circuit(capacitor(esr_ohm=2.0, insulation_ohm=1e7), pins=PINS))

    shown = {e.name: (e.letter, e.nodes, e.value) for e in twin.elements}
    assert shown["C1"] == ("C", ("p", "c1#"), 10e-6)
    assert shown["C1#esr"] == ("R", ("c1#", "0"), 2.0)
    assert shown["C1#leak"] == ("R", ("p", "0"), 1e7)
    assert "C1" in twin.currents


def test_esr_is_never_below_a_milliohm_and_insulation_never_above_100_gigohm():
    twin = build(circuit(capacitor(esr_ohm=0.0, insulation_ohm=1e15), pins=PINS))

    shown = {e.name: e.value for e in twin.elements}
    assert shown["C1#esr"] == 1e-3
    assert shown["C1#leak"] == 1e11


def test_assumed_esr_belongs_to_the_ripple_frequency():
    at_100 = build(circuit(capacitor(), pins=PINS), frequency_Hz={"C1": 100.0})
    at_10k = build(circuit(capacitor(), pins=PINS), frequency_Hz={"C1": 10e3})

    def esr(twin):
        return next(e.value for e in twin.elements if e.name == "C1#esr")

    assert esr(at_10k) < esr(at_100)


def test_a_tube_sits_behind_its_meters_with_its_expressions():
    law = Law("I", Binary("*", Number(1e-3), Voltage("g", "k")))
    source = Element(name="XU1.B1", letter="B", nodes=("p", "k"), law=law, span=SPAN)

    twin = build(circuit(capacitor(), pins=PINS, elements=(source,)))

    inner = next(e for e in twin.elements if e.name == "XU1.B1")
    assert inner.nodes == ("xu1#plate", "k")
    assert inner.law.expression == Binary("*", Number(1e-3), Voltage("xu1#grid", "k"))
    meters = {e.name: e.nodes for e in twin.elements if e.letter == "V"}
    assert meters == {"XU1#plate": ("p", "xu1#plate"), "XU1#grid": ("g", "xu1#grid")}


@pytest.mark.parametrize(
    ("pins", "metered"),
    [
        # The cathode carries what the others carry.
        ({"plate": "p", "screen": "s", "grid": "g", "cathode": "0"}, ("plate", "screen", "grid")),
        # A suppressor at the cathode carries nothing that could be told apart.
        ({"plate": "p", "grid": "g", "suppressor": "k", "cathode": "k"}, ("plate", "grid")),
        # Connected as a triode: the plate's meter stands for both.
        ({"plate": "p", "screen": "p", "grid": "g", "cathode": "k"}, ("plate", "grid")),
        # Two units in one glass.
        (
            {"plate": "a", "cathode": "k", "plate2": "b", "cathode2": "m", "heater": "h"},
            ("plate", "plate2"),
        ),
    ],
)
def test_metered_pins(pins, metered):
    part = Part(name="XU1", kind=Kind.TUBE, pins=pins, span=SPAN)

    assert metered_pins(part) == metered


def test_resistors_carry_no_meter():
    part = Part(name="R1", kind=Kind.RESISTOR, pins={"plus": "a", "minus": "b"}, span=SPAN)

    assert metered_pins(part) == ()


@pytest.mark.parametrize(
    ("elements", "metered"),
    [(("D1",), ()), ((), ()), (("D1.Dx", "D1.Rs"), ("plus",))],
    ids=["an element", "by hand", "a model with elements of its own"],
)
def test_a_diode_is_metered_where_it_is_no_element_itself(elements, metered):
    pins = {"plus": "a", "minus": "b"}
    part = Part(name="D1", kind=Kind.DIODE, pins=pins, elements=elements, span=SPAN)

    assert metered_pins(part) == metered


def test_nodes_put_in_series_start_where_the_netlist_says():
    """Else a capacitor that `.ic` charges against a node would start with that node at 0 V."""
    drawn = circuit(replace(capacitor(), nodes=("p", "k")), pins=PINS)
    netlist = replace(drawn.netlist, initial_V={"P": 200.0, "k": 5.0})
    twin = build(replace(drawn, netlist=netlist))

    assert twin.initial_V == {"p": 200.0, "k": 5.0, "c1#": 5.0, "xu1#plate": 200.0}


def test_insulation_without_a_value_is_the_best_there_is():
    position = Position(
        name="C9",
        nodes=("a", "b"),
        role=Role.UNKNOWN,
        role_text="",
        style=find("film"),
        style_source="sheet",
        value_F=None,
        span=SPAN,
    )

    assert insulation_of(position) == 1e11
