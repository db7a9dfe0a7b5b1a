"""Roles of what goes to ground or to another node that stands still: bypasses, detector, AVC."""

from __future__ import annotations

from collections.abc import Mapping

from stress.circuit.circuit import Kind, Role
from stress.circuit.graph import Edge, Pin
from stress.circuit.joined import GROUND
from stress.circuit.role_line import Found
from stress.circuit.role_power import leads_to_detector, signal_junctions
from stress.circuit.surroundings import RADIO_F, SIGNAL_OHM, STOPPER_OHM, Ends, Near, Surroundings

RETURN_OHM = 47e3  # less between grid and return is a stopper (common practice)
DETECTOR_F = 5e-9  # behind resistors; more there filters AVC
LOAD_F = 60e-9  # at the detector itself
SMOOTHING_F = 1e-6  # a capacitor from this size smooths what a part in series passes on


def compensation(s: Surroundings, c: Edge, e: Ends) -> Found:
    """From a node of a control loop through a resistor of its own to ground or a supply."""
    for node, middle in ((c.a, c.b), (c.b, c.a)):
        if node not in s.controls or s.still(middle) or s.graph.pins(middle):
            continue
        others = [x for x in s.graph.around(middle) if x.name != c.name]
        if len(others) == 1 and others[0].letter == "R" and s.still(others[0].other(middle)):
            return Role.FEEDBACK, f"compensates the loop with {others[0].name}, {node} to " + (
                s.words(others[0].other(middle))
            )
    return None


def bypass(s: Surroundings, c: Edge, e: Ends) -> Found:
    """From a pin to ground, or to another node that stands still."""
    still = [n for n in (e.b, e.a) if s.still(n)]
    if not still:
        return None
    quiet = GROUND if GROUND in still else still[0]
    node = e.a if quiet == e.b else e.b
    pins = {p.kind: p for p in reversed(s.graph.pins(node))}
    if not pins and node in s.controls:
        return Role.FEEDBACK, f"compensates the loop, {node} to {s.words(quiet)}"
    if "common" in pins and not s.direct(node, "output"):
        if _is_regulated(s, pins["common"]):
            larger = s.larger(c)
            if larger is not None:
                return Role.DECOUPLING, f"radio-frequency bypass beside {larger}, {node}"
            return Role.SMOOTHING, f"smoothing of the regulated supply {node}"
        return _at_cathode(s, pins["common"], quiet)
    if "output" in pins:
        return _at_plate(s, c, e, pins["output"], quiet)
    if "screen" in pins:
        return Role.SCREEN_BYPASS, f"screen bypass, {pins['screen'].text} to {s.words(quiet)}"
    if _is_detector(s, c, node):
        return Role.DETECTOR, f"detector filter, {_detector(s, node)} to {s.words(quiet)}"
    if "input" in pins:
        return _at_grid(s, c, e, node, pins["input"], quiet)
    if "other" in pins:
        return Role.DECOUPLING, f"radio-frequency bypass, {pins['other'].text}"
    return _behind_resistors(s, c, e, node, quiet)


def _is_regulated(s: Surroundings, pin: Pin) -> bool:
    """Say whether a part passes a supply on: its output on a rail, its input held still."""
    part = s.graph.parts.get(pin.part)
    if part is None:
        return False
    at = {Pin(part.name, role).kind: s.graph.at(node) for role, node in part.pins.items()}
    held = at.get("input", "")
    if _passes_supply(s, at):
        return True
    clamped = any(j.cathode == held and not j.tube for j in s.graph.junctions_at(held))
    rail = at.get("output", "")
    fed = rail in s.supply.feeds and (s.is_held(rail) or rail in s.supply.outputs)
    return fed and held != GROUND and (s.still(held) or clamped)


def _passes_supply(s: Surroundings, at: Mapping[str, str]) -> bool:
    """Say whether the output of a part lies on a supply itself, with neither load nor winding in
    between, and what its common pin feeds is smoothed by a large capacitor to ground: a part in
    series with the supply, whatever works its input."""
    rail, fed = at.get("output", GROUND), at.get("common", GROUND)
    supplied = rail in s.supply.outputs or (rail in s.supply.feeds and s.is_held(rail))
    smoothed = any(
        x.letter == "C" and (x.value or 0.0) >= SMOOTHING_F and x.other(fed) == GROUND
        for x in s.graph.around(fed)
    )
    loaded = any(
        x.letter != "C" and x.other(fed) not in (rail, GROUND) for x in s.graph.around(fed)
    )
    return supplied and smoothed and loaded and fed != GROUND


def _at_cathode(s: Surroundings, pin: Pin, quiet: str) -> Found:
    word = pin.role.rstrip("0123456789_")
    return Role.CATHODE_BYPASS, f"{word} bypass, {pin.text} to {s.words(quiet)}"


def _at_plate(s: Surroundings, c: Edge, e: Ends, pin: Pin, quiet: str) -> Found:
    if e.control or e.ohm >= 1000.0:
        return Role.TONE, f"tone, {pin.text} to {s.words(quiet)}"
    return (
        Role.PLATE_BYPASS,
        f"{pin.role.rstrip('0123456789')} bypass, {pin.text} to {s.words(quiet)}",
    )


def _at_grid(s: Surroundings, c: Edge, e: Ends, node: str, pin: Pin, quiet: str) -> Found:
    leak = leak_at(s, node)
    if leak is not None and {node, quiet} != {c.a, c.b} and (c.value or 0.0) <= RADIO_F:
        return Role.GRID_LEAK, f"grid capacitor with {leak.name}, {pin.text}"
    if s.winding_at(node) is not None and (c.value or 0.0) <= RADIO_F:
        return Role.TUNING, f"tuning, {pin.text} to {s.words(quiet)}"
    if (c.value or 0.0) <= RADIO_F:
        return Role.TONE, f"treble shunt, {pin.text} to {s.words(quiet)}"
    return (
        Role.DECOUPLING,
        f"{pin.role.rstrip('0123456789')} bypass, {pin.text} to {s.words(quiet)}",
    )


def _is_detector(s: Surroundings, c: Edge, node: str) -> bool:
    """Say whether a small capacitor is at a signal rectifier, at the cold end of its winding,
    or behind a resistor of its load."""
    value = c.value or 0.0
    if node in s.supply.outputs or value > LOAD_F:
        return False
    if value > DETECTOR_F:
        return _at_detector(s, node)
    reached = s.graph.reach(
        node, through=lambda x: x.letter in "RSW", stop=s.still, limit_ohm=STOPPER_OHM
    )
    return any(_at_detector(s, n) for n in reached if not s.still(n))


def _at_detector(s: Surroundings, node: str) -> bool:
    """Say whether a signal rectifier is at a node, or behind the winding there."""
    return bool(signal_junctions(s, node)) or any(
        signal_junctions(s, edge.other(node)) for edge in s.graph.windings(node)
    )


def _detector(s: Surroundings, node: str) -> str:
    found = signal_junctions(s, node)
    for edge in s.graph.windings(node):
        found += signal_junctions(s, edge.other(node))
    return f"load of {found[0]}" if found else s.words(node)


def _behind_resistors(s: Surroundings, c: Edge, e: Ends, node: str, quiet: str) -> Found:
    """No pin at the node itself: what its resistors and windings lead to."""
    value = c.value or 0.0
    grids = _return_of(s, node)
    fed = node in s.supply.feeds
    if grids and leads_to_detector(s, node, least_ohm=RETURN_OHM) and not fed:
        return Role.AVC, f"AVC filter, return of {_names(grids)}"
    if grids and fed and s.supply.feeds[node].output.sign < 0:
        return Role.BIAS_FILTER, f"filter of the grid bias, return of {_names(grids)}"
    for near in s.near(node, "common", ohm=10e3):
        return Role.CATHODE_BYPASS, f"cathode bypass, {near.pin.text} through {near.ohm:.0f} ohm"
    for near in s.near(node, "screen", ohm=10e3):
        return Role.SCREEN_BYPASS, f"screen bypass, {near.pin.text} through {near.ohm:.0f} ohm"
    winding = s.winding_at(node)
    if winding is not None and value <= RADIO_F:
        return Role.TUNING, f"tuning, winding {winding.name} to {s.words(quiet)}"
    if winding is not None and (pins := s.direct(winding.other(node), "output")):
        return Role.DECOUPLING, f"decoupling of the winding {winding.name} of {pins[0].part}"
    if winding is not None and (pins := s.direct(winding.other(node), "input")):
        return Role.DECOUPLING, f"return of the winding {winding.name} at the {pins[0].text}"
    plates = s.near(node, "output")
    if plates and value <= RADIO_F:
        return Role.PLATE_BYPASS, f"radio-frequency bypass behind the {plates[0].pin.text}"
    if grids and not fed:
        if _far(grids) and _control_between(s, node) is None:
            return Role.DECOUPLING, f"decoupling of the grid return of {_names(grids)}"
        return Role.TONE, f"tone, before the grid of {_names(grids)}"
    if fed and s.supply.feeds[node].output.by:
        return Role.DECOUPLING, f"decoupling, {s.words(node)} to {s.words(quiet)}"
    if e.control or plates:
        what = plates[0].pin.text if plates else s.words(node)
        return Role.TONE, f"tone, {what} to {s.words(quiet)}"
    return None


def _return_of(s: Surroundings, node: str) -> list[Near]:
    """Return the grids whose direct current returns through a node: through resistors, or
    through a winding and resistors."""
    found = list(s.near(node, "input", ohm=SIGNAL_OHM))
    for edge in s.graph.windings(node):
        found += s.near(edge.other(node), "input", ohm=SIGNAL_OHM)
    reached = s.graph.reach(
        node,
        through=lambda x: x.letter in "RSW",
        stop=s.still,
        limit_ohm=SIGNAL_OHM,
    )
    for there, ohm in reached.items():
        if there == node or s.still(there):
            continue
        for edge in s.graph.windings(there):
            far = s.direct(edge.other(there), "input")
            found += [Near(p, ohm) for p in far if not s.still(edge.other(there))]
    return list({n.pin: n for n in sorted(found, key=lambda n: -n.ohm)}.values())


def _names(grids: list[Near]) -> str:
    return ", ".join(dict.fromkeys(n.pin.part for n in grids))


def _far(grids: list[Near]) -> bool:
    return all(n.ohm >= RETURN_OHM for n in grids)


def _control_between(s: Surroundings, node: str) -> Edge | None:
    for edge in s.graph.around(node):
        part = s.parts.get(edge.name.lower())
        if part is not None and part.kind is Kind.CONTROL:
            return edge
    return None


def leak_at(s: Surroundings, node: str) -> Edge | None:
    """Return the resistor by which a grid returns."""
    return next((x for x in s.graph.around(node) if x.letter == "R" and x.ohm >= 10e3), None)
