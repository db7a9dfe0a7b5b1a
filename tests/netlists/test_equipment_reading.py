"""What the reference equipments are, before anything is solved."""

from dataclasses import dataclass

import pytest

from stress.circuit.circuit import Kind, Role
from stress.finding import Severity


@dataclass(frozen=True)
class Row:
    """An equipment: how many capacitors it has at least, its period, its tubes by type."""

    stem: str
    capacitors: int
    period_s: float
    tubes: tuple[str, ...]


ROWS = [
    Row("shore_receiver", 19, 1 / 60, ("6SA7", "6SK7", "6SQ7", "6V6GT", "5Y3GT")),
    Row("harbour_midget", 15, 1 / 60, ("12SA7", "12SK7", "12SQ7", "50L6GT", "35Z5GT")),
    Row(
        "hall_amplifier",
        22,
        1 / 50,
        ("12AX7", "12AX7", "12AU7", "12AU7", "EL34", "EL34", "5AR4"),
    ),
    Row(
        "beacon_transmitter",
        20,
        1 / 50,
        ("866A", "866A", "5R4GY", "6X4", "6SN7GT", "807", "807"),
    ),
    Row("charthouse_smps", 17, 20e-6, ()),
]
EACH = pytest.mark.parametrize("row", ROWS, ids=lambda row: row.stem)


@EACH
def test_reads_without_obstacle_or_trap(row, read_equipment):
    netlist = read_equipment(row.stem)

    assert netlist.obstacles == ()
    told = [n.text for n in netlist.notices if "model of the part table" not in n.text]
    assert told == []


@EACH
def test_has_what_it_is_said_to_have(row, equipment):
    circuit = equipment(row.stem)

    assert len(circuit.positions) >= row.capacitors
    assert circuit.period_s == pytest.approx(row.period_s, rel=1e-6)
    tubes = [p.type for p in circuit.parts if p.kind in (Kind.TUBE, Kind.RECTIFIER)]
    assert sorted(tubes) == sorted(row.tubes)


@EACH
def test_the_sheet_is_complete(row, equipment):
    """Every style and rating is stated; no limit is assumed."""
    circuit = equipment(row.stem)

    for position in circuit.positions:
        assert position.style_source == "sheet", position.name
        assert position.rated_V is not None, position.name
        assert position.role is not Role.UNKNOWN, position.name
    for part in circuit.parts:
        assert part.limits, part.name
        assert not [name for name, limit in part.limits.items() if limit.assumed], part.name


@EACH
def test_polarised_parts_are_the_right_way_round(row, equipment):
    stated = circuit_hints = 0
    circuit = equipment(row.stem)
    for position in circuit.positions:
        stated += position.style.polar
        circuit_hints += position.style.polar and position.plus is not None
    assert circuit_hints == stated
    assert not [f for f in circuit.findings if "reversed" in f.text]


@dataclass(frozen=True)
class Seen:
    """A role that a technician would name at sight."""

    stem: str
    position: str
    role: Role


SEEN = [
    Seen("shore_receiver", "C13", Role.COUPLING),
    Seen("shore_receiver", "C17", Role.RESERVOIR),
    Seen("shore_receiver", "C18", Role.SMOOTHING),
    Seen("shore_receiver", "C14", Role.CATHODE_BYPASS),
    Seen("shore_receiver", "C3", Role.AVC),
    Seen("shore_receiver", "C9", Role.DETECTOR),
    Seen("shore_receiver", "C6", Role.SCREEN_BYPASS),
    Seen("shore_receiver", "C16", Role.TONE),
    Seen("shore_receiver", "C15", Role.PLATE_BYPASS),
    Seen("shore_receiver", "C1", Role.LINE_CHASSIS),
    Seen("harbour_midget", "C1", Role.LINE_ACROSS),
    Seen("harbour_midget", "C2", Role.LINE_CHASSIS),
    Seen("harbour_midget", "C3", Role.RESERVOIR),
    Seen("hall_amplifier", "C5", Role.BIAS_FILTER),
    Seen("hall_amplifier", "C12", Role.COUPLING),
    Seen("hall_amplifier", "C16", Role.SNUBBER),
    Seen("hall_amplifier", "C19", Role.LINE_ACROSS),
    Seen("beacon_transmitter", "C7", Role.BIAS_FILTER),
    Seen("beacon_transmitter", "C4", Role.RESERVOIR),
    Seen("beacon_transmitter", "C17", Role.SNUBBER),
    Seen("charthouse_smps", "C5", Role.OUTPUT_FILTER),
    Seen("charthouse_smps", "C4", Role.SNUBBER),
    Seen("charthouse_smps", "C18", Role.DECOUPLING),
    Seen("charthouse_smps", "C13", Role.FEEDBACK),
]


@pytest.mark.parametrize("seen", SEEN, ids=lambda seen: f"{seen.stem}-{seen.position}")
def test_role_at_sight(seen, equipment):
    assert equipment(seen.stem).position(seen.position).role is seen.role


def test_line_positions_ask_for_their_class(equipment):
    """Across the line class X, to what can be touched class Y (IEC 60384-14; common practice)."""
    for stem, wanted in {
        "harbour_midget": {"C1": "class X", "C2": "class Y", "C14": "class Y"},
        "hall_amplifier": {"C19": "class X", "C20": "class Y", "C22": "class Y"},
        "shore_receiver": {"C1": "class Y"},
    }.items():
        urgent = {
            f.where: f.text for f in equipment(stem).findings if f.severity is Severity.REPLACE
        }
        assert set(urgent) == set(wanted)
        for position, words in wanted.items():
            assert words in urgent[position]
