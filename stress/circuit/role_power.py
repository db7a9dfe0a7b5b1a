"""Roles that the power tells: across rectifiers, switches and windings, in supplies."""

from __future__ import annotations

from stress.circuit.circuit import Role
from stress.circuit.drive import HASH_F, HELD_F
from stress.circuit.graph import Edge
from stress.circuit.joined import GROUND
from stress.circuit.role_line import Found
from stress.circuit.surroundings import RADIO_F, Ends, Surroundings

AFTER_RECTIFIER_OHM = 1000.0
COPPER_OHM = 1000.0
STARTER_OHM = 1000.0
DAMPING_F = 5e-9
DAMPING_OHM = 470.0  # in series with a capacitor across a choke (common practice)
DECOUPLING_OHM = 10e3  # filter resistors are smaller, those of one stage larger (common practice)


def snubber(s: Surroundings, c: Edge, e: Ends) -> Found:
    """Across a rectifier, a switch, or a winding that a switch drives."""
    if (c.value or 0.0) >= HELD_F:
        return None
    driven = s.drive.nodes | s.drive.pumped
    for other in s.graph.between(e.a, e.b):
        if other.name.lower() in s.gated:
            return Role.SNUBBER, f"snubber across {other.name}"
        if other.letter in "SW" or other.name.lower() in s.graph.contacts:
            return Role.SNUBBER, f"spark quencher across the switch {other.name}"
        if other.letter == "L" and other.name.lower() in s.drive.switched_cores:
            return Role.SNUBBER, f"snubber across the winding {other.name}"
    for j in s.graph.junctions_at(e.a) if {e.a, e.b} & driven else ():
        if e.b in (j.anode, j.cathode):
            return Role.SNUBBER, f"across the rectifier {j.part}"
    for node, far in ((e.a, e.b), (e.b, e.a)):
        if node in s.supply.outputs:
            if _clamps(s, node, far):
                return Role.SNUBBER, f"clamp, {node} to {s.words(far)}"
            continue
        if node not in s.drive.switched or not s.still(far):
            continue
        worked = any(x.name.lower() in s.gated for x in s.graph.around(node))
        if worked or s.direct(node, "output"):
            return Role.SNUBBER, f"snubber at the switched node {node}"
    return None


def _clamps(s: Surroundings, node: str, far: str) -> bool:
    """Say whether a node only takes peaks of a switched node and bleeds into a supply."""
    output = s.supply.outputs[node]
    bled = any(x.letter == "R" for x in s.graph.between(node, far))
    return output.origin == "switched" and bled and far != GROUND


def across_winding(s: Surroundings, c: Edge, e: Ends) -> Found:
    """In parallel with one winding or two in series."""
    edge = _winding_between(s, e.a, e.b)
    if edge is None:
        return None
    name = edge.name.lower()
    if name in s.drive.line_cores:
        return Role.BUFFER, f"buffer across the winding {edge.name}"
    plate = [p for node in (e.a, e.b) for p in s.direct(node, "output")]
    if (c.value or 0.0) <= RADIO_F and (edge.value or 0.0) < 0.1:
        return Role.TUNING, f"tunes the winding {edge.name}"
    if e.ohm >= 1000.0 and not e.control and (c.value or 0.0) <= DAMPING_F:
        return Role.SNUBBER, f"damps the winding {edge.name}" + (
            f", {plate[0].text}" if plate else ""
        )
    if plate and e.ohm < 1000.0 and not e.control:
        return Role.PLATE_BYPASS, f"{plate[0].text}, across the winding {edge.name}"
    if plate:
        return Role.TONE, f"tone, {plate[0].text}, across the winding {edge.name}"
    if e.a in s.supply.feeds and e.b in s.supply.feeds:
        # A resistor in series would spoil a resonance: it takes the kick of the choke.
        if e.ohm >= DAMPING_OHM:
            return Role.SNUBBER, f"damps the choke {edge.name}, {e.ohm:.0f} ohm in series"
        return Role.TUNING, f"tunes the choke {edge.name} to the ripple"
    if len(s.graph.windings_with(edge.name)) > 1 and (edge.value or 0.0) < 0.1:
        return Role.TUNING, f"tunes the winding {edge.name}"
    return Role.TONE, f"tone, across the winding {edge.name}"


def _winding_between(s: Surroundings, a: str, b: str) -> Edge | None:
    """Return the winding that leads from one node to another, its copper and a second winding
    on its core passed."""
    for start, end in ((a, b), (b, a)):
        for first in s.graph.windings(start):
            middle = first.other(start)
            core = s.graph.windings_with(first.name)
            reached = {middle}
            for second in s.graph.windings(middle):
                if second is not first and second.name.lower() in core:
                    reached.add(second.other(middle))
            around = s.graph.around(middle)
            if len(around) == 2 and not s.graph.pins(middle):
                copper = around[0] if around[1] is first else around[1]
                if copper.letter == "R" and copper.ohm <= COPPER_OHM:
                    reached.add(copper.other(middle))
            if end in reached - {start}:
                return first
    return None


def supply(s: Surroundings, c: Edge, e: Ends) -> Found:
    """From a supply to its return: reservoir, smoothing, output filter, bias, decoupling."""
    pair = _supply_and_return(s, e)
    if pair is None:
        return None
    node, back = pair
    feed = s.supply.feeds[node]
    larger = s.larger(c)
    if larger is not None:
        return Role.DECOUPLING, f"radio-frequency bypass beside {larger}, {s.words(node)}"
    loads = s.loads(node) | frozenset(p.kind for p in s.graph.pins(node))
    where = f"{_named(node, feed.output.sign)} to {s.words(back)}"
    if feed.output.sign < 0 and loads and loads <= {"input", "other"}:
        return Role.BIAS_FILTER, f"filter of the bias supply, {where}"
    # A small capacitor only quiets what a large one or a choke holds; alone it is the reservoir
    # of a supply of little current, such as that of a picture tube.
    small = (c.value or 0.0) <= HASH_F and (s.is_held(node) or bool(s.graph.windings(node)))
    if feed.output.origin == "switched" and not small:
        starter = _starter(s, node)
        if starter is not None:
            return Role.RESERVOIR, f"start-up and supply of the controller, {where}, {starter}"
        by = ", ".join(feed.output.by)
        return Role.OUTPUT_FILTER, f"output filter, {where}, fed by {by}"
    if feed.output.origin == "source" and node == feed.output.node:
        if any(x.name.lower() in s.gated for x in s.graph.around(node)) and not small:
            return Role.RESERVOIR, f"input reservoir of the converter, {where}"
        return Role.DECOUPLING, f"decoupling, {where}, across the source"
    if _is_first(s, c, node) and feed.output.origin == "line":
        if small:
            return Role.DECOUPLING, f"quiets the rectifier, {where}"
        by = ", ".join(feed.output.by) or "the bias resistor"
        if feed.choke:
            return Role.SMOOTHING, f"smoothing behind the choke of a choke-input filter, {where}"
        if feed.output.sign < 0 and not feed.output.by:
            return Role.BIAS_FILTER, f"filter of the back bias, {where}"
        return Role.RESERVOIR, f"reservoir, {where}, fed by {by}"
    return _distribution(s, c, node, where, loads)


def leads_to_detector(s: Surroundings, node: str, *, least_ohm: float) -> bool:
    """Say whether resistors of some size lead from a node to a signal rectifier or its load."""
    reached = s.graph.reach(node, through=lambda x: x.letter in "RSWL", stop=s.still)
    return any(signal_junctions(s, there) for there, ohm in reached.items() if ohm >= least_ohm)


def signal_junctions(s: Surroundings, node: str) -> list[str]:
    """Return the rectifiers at a node that no power drives."""
    driven = s.drive.nodes
    return [
        j.part
        for j in s.graph.junctions_at(node)
        if j.anode not in driven and j.cathode not in driven
    ]


def _starter(s: Surroundings, node: str) -> str | None:
    """Return the resistor that feeds a switched supply from the input before it runs."""
    for edge in s.graph.around(node):
        there = edge.other(node)
        feed = s.supply.feeds.get(there)
        if edge.letter != "R" or edge.ohm < STARTER_OHM or feed is None or not s.still(there):
            continue
        if feed.output.origin in ("line", "source") and feed.output.sign > 0:
            return f"started through {edge.name}"
    return None


def _distribution(s: Surroundings, c: Edge, node: str, where: str, loads: frozenset[str]) -> Found:
    """Behind the first capacitor: by what is fed and through how much."""
    feed = s.supply.feeds[node]
    if s.direct(node, "screen") and not loads & {"output", "common"}:
        return Role.SCREEN_BYPASS, f"screen bypass, {_pin(s, node, 'screen')}"
    screens = [n.pin for n in s.near(node, "screen", ohm=10e3)]
    if loads and loads <= {"screen", "other"} and screens:
        return Role.SCREEN_BYPASS, f"screen bypass, {screens[0].text}"
    near = loads or {n.pin.kind for n in s.near(node, ohm=1e6)}
    bases = [w for w in s.graph.windings(node) if s.direct(w.other(node), "input")]
    inputs_only = bool(near) and near <= {"input", "other"}
    far = feed.since_ohm >= DECOUPLING_OHM
    if (inputs_only or bases) and far and leads_to_detector(s, node, least_ohm=1e3):
        return Role.AVC, f"AVC filter, {where}"
    if inputs_only:
        return Role.DECOUPLING, f"decoupling of the bias, {where}"
    if feed.choke:
        return Role.SMOOTHING, f"smoothing behind the choke, {where}"
    if feed.since_ohm < DECOUPLING_OHM and (c.value or 0.0) >= HELD_F:
        return Role.SMOOTHING, f"smoothing, {where}"
    return Role.DECOUPLING, f"decoupling, {where}"


def _pin(s: Surroundings, node: str, kind: str) -> str:
    return s.direct(node, kind)[0].text


def _named(node: str, sign: int) -> str:
    return f"{'bias' if sign < 0 else 'supply'} {node}"


def _is_first(s: Surroundings, c: Edge, node: str) -> bool:
    """Say whether no large capacitor lies between an output and this node."""
    feed = s.supply.feeds[node]
    near = feed.ohm <= AFTER_RECTIFIER_OHM or feed.choke
    large = (c.value or 0.0) >= HELD_F
    return feed.stage == 0 and near and (node == feed.output.node or large)


def _supply_and_return(s: Surroundings, e: Ends) -> tuple[str, str] | None:
    """Return the fed end and the still one; None where the fed end is a stage's own."""
    for node, back in ((e.a, e.b), (e.b, e.a)):
        feed = s.supply.feeds.get(node)
        if feed is None or (not s.still(back) and back not in s.drive.returns):
            continue
        if back != GROUND and back in s.supply.feeds:
            # Between two supplies the one that is further from the source is decoupled
            # against the other; between both ends of a rectifier the positive one counts.
            if s.supply.feeds[back].ohm > feed.ohm and back not in s.supply.outputs:
                continue
            if feed.output.sign < 0 and s.supply.feeds[back].output.sign > 0:
                continue
        if node in s.supply.outputs or _is_rail(s, node):
            return node, back
    return None


def _is_rail(s: Surroundings, node: str) -> bool:
    """Say whether a fed node passes current on to more than its own stage."""
    if s.direct(node, "output") and not s.is_held(node):
        return False
    if s.direct(node, "common"):
        return s.is_held(node) and bool(s.loads(node) & {"output"})
    if s.direct(node, "input", "diode"):
        return False
    feed = s.supply.feeds[node]
    return feed.ohm <= 2.2e6 and (s.is_held(node) or bool(s.loads(node)) or feed.stage == 0)
