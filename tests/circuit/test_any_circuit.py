"""Whatever is wired to whatever: the circuit layer answers or raises its own error."""

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from stress.circuit.build import survey
from stress.circuit.chain import Chains
from stress.circuit.circuit import Role
from stress.circuit.skeleton import skeleton
from stress.netlist.expression import Voltage
from stress.netlist.flat import Element, Instance, Law, Netlist, Wave
from stress.parts.read_sheet import read_text
from stress.parts.sheet import EquipmentEntry, LineEntry, Sheet
from stress.text.span import Span

SPAN = Span("any.cir", 1, 1, 1, "x")
NODES = st.sampled_from(["0", "a", "b", "c", "d", "chassis", "ant"])
WAVES = st.sampled_from(
    [
        None,
        Wave("sin", (0.0, 165.0, 60.0)),
        Wave("sin", (0.0, 1.0)),
        Wave("pulse", (0.0, 5.0, 0.0, 1e-8, 1e-8, 4e-6, 1e-5)),
        Wave("pulse", (0.0, 5.0)),
        Wave("pwl", (0.0, 0.0, 1e-3, 5.0)),
        Wave("pwl", (0.0, 0.0, 1e-3, 5.0), 0.0),
        Wave("sffm", (0.0, 1.0, 1e6, 1.0, 400.0)),
        Wave("am", (1.0, 0.0, 400.0, 1e6)),
        Wave("exp", (0.0, 1.0)),
    ]
)
ENDS = {"Q": 3, "J": 3, "Z": 3, "M": 4, "S": 4, "E": 4, "G": 4, "T": 4}
VALUES = st.sampled_from([None, 0.0, 1e-12, 1e-8, 1e-5, 1e-3, 0.05, 1.0, 47.0, 1e3, 1e5, 1e7])


@st.composite
def netlists(draw):
    elements = []
    for number, letter in enumerate(
        draw(st.lists(st.sampled_from("RRRCCCCLLVIDQJMZSWTBEFGHK"), max_size=24))
    ):
        nodes = () if letter == "K" else tuple(draw(NODES) for _ in range(ENDS.get(letter, 2)))
        coils = [e.name for e in elements if e.letter == "L"]
        sources = [e.name for e in elements if e.letter == "V"]
        controls: tuple[str, ...] = ()
        if letter == "K":
            if len(coils) < 2:
                continue
            controls = tuple(draw(st.permutations(coils))[:2])
        if letter in "FHW":
            if not sources:
                continue
            controls = (draw(st.sampled_from(sources)),)
        elements.append(
            Element(
                name=f"{letter}{number}",
                letter=letter,
                nodes=nodes,
                value=draw(VALUES),
                wave=draw(WAVES) if letter in "VI" else None,
                law=Law(draw(st.sampled_from("VI")), Voltage("a", "b")) if letter == "B" else None,
                controls=controls,
                inside=draw(st.sampled_from(["", "", "X1"])),
                span=SPAN,
            )
        )
    pins = draw(
        st.sampled_from([("P", "G", "K"), ("P", "S", "G", "K"), ("A", "K"), ("1", "2", "3")])
    )
    instance = Instance(
        name="X1",
        subcircuit=draw(st.sampled_from(["TRI", "6V6GT", "5Y3GT", "12AX7", "1N4007", "BOX"])),
        pins=pins,
        nodes=tuple(draw(NODES) for _ in pins),
        span=SPAN,
    )
    return Netlist(path="any.cir", title="", elements=tuple(elements), instances=(instance,))


@settings(max_examples=250, deadline=None, suppress_health_check=list(HealthCheck))
@given(netlists(), st.booleans())
def test_any_circuit(netlist, stated):
    voltages = [e.name for e in netlist.elements if e.letter == "V"]
    sheet = Sheet(
        equipment=EquipmentEntry(touchable=("chassis",) if stated else ()),
        line=LineEntry(sources=tuple(voltages[:1]) if stated else ()),
    )
    circuit, _ = survey(netlist, sheet)

    capacitors = {e.name for e in netlist.elements if e.letter == "C"}
    assert {p.name for p in circuit.positions} <= capacitors
    for position in circuit.positions:
        assert isinstance(position.role, Role)
        assert position.role_text
        assert position.plus in (None, 0, 1)
    read_text(skeleton(circuit), path="skeleton.toml")
    chains = Chains(circuit)
    for position in circuit.positions[:3]:
        for part in circuit.parts[:5]:
            assert chains.words(position.name, part.name)[0] == position.name
