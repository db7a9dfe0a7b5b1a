"""Roles of what lies between two nodes of the signal: coupling, feedback, grid capacitors."""

from __future__ import annotations

from stress.circuit.circuit import Kind, Role
from stress.circuit.graph import Edge, Pin
from stress.circuit.joined import GROUND
from stress.circuit.role_bypass import leak_at
from stress.circuit.role_line import Found
from stress.circuit.surroundings import RADIO_F, SIGNAL_OHM, Ends, Surroundings


def coupling(s: Surroundings, c: Edge, e: Ends) -> Found:
    """Between two nodes of which neither stands still, or from one to a load."""
    a, b = _best(s, e.a), _best(s, e.b)
    if a is None and b is not None:
        a = _beyond(s, c, e.a, e.b)
    elif b is None and a is not None:
        b = _beyond(s, c, e.b, e.a)
    elif a is None and b is None and not (_load(s, e.a) or _load(s, e.b)):
        a, b = _beyond(s, c, e.a, e.b), _beyond(s, c, e.b, e.a)
    for one, other in ((a, b), (b, a)):
        if one is None or other is None:
            continue
        if one.part == other.part and one.kind == "output" and other.kind in ("input", "common"):
            if other.kind == "common":
                return Role.PLATE_BYPASS, f"{one.text} to its {other.role}"
            return Role.FEEDBACK, f"feedback, {one.text} to its {other.role}"
    biased = _across_bias(s, e, a, b)
    if biased is not None:
        return biased
    if a is not None and b is not None and a.part == b.part:
        for x in s.graph.between(e.a, e.b):
            if x.letter == "R":
                return Role.TONE, f"treble bypass across {x.name}, {a.text}"
    leak = _grid_leak(s, c, e)
    if leak is not None:
        return leak
    for here, there, near, far in ((e.a, e.b, a, b), (e.b, e.a, b, a)):
        found = _signal_pair(s, c, here, there, near, far)
        if found is not None:
            return found
    return _to_load(s, e, a, b)


def _across_bias(s: Surroundings, e: Ends, a: Pin | None, b: Pin | None) -> Found:
    """Across a bias resistor that does not end at ground: the split cathode resistor."""
    parallel = any(x.letter == "R" and x.other(e.a) == e.b for x in s.graph.around(e.a))
    for here, there in ((e.a, e.b), (e.b, e.a)):
        commons = s.direct(here, "common")
        if commons and parallel and not s.direct(there, "input", "output", "screen"):
            word = commons[0].role.rstrip("0123456789")
            return Role.CATHODE_BYPASS, f"{word} bypass, {commons[0].text} to {there}"
    return None


def _best(s: Surroundings, node: str) -> Pin | None:
    """Return the pin that a node belongs to: one right there, else the nearest output, else
    the nearest other."""
    if s.still(node):
        return None
    order = ("output", "input", "common", "screen", "diode")
    direct = sorted(s.direct(node, *order), key=lambda p: order.index(p.kind))
    if direct:
        return direct[0]
    if s.winding_at(node) is not None or _speaker(s, node):
        return None
    outputs = s.near(node, "output")
    if outputs:
        return outputs[0].pin
    near = s.near(node, *order, ohm=SIGNAL_OHM)
    return near[0].pin if near else None


def _beyond(s: Surroundings, c: Edge, node: str, other: str) -> Pin | None:
    """Return the pin that a node without any reaches through the capacitors and resistors of a
    network, such as that of a phase-shift oscillator or a tone control."""
    if _load(s, node) or s.still(node):
        return None
    reached = s.graph.reach(
        node,
        through=lambda x: x.letter in "RC" and x.name != c.name,
        stop=lambda n: s.still(n) or n == other or bool(s.graph.pins(n)),
        limit_ohm=SIGNAL_OHM,
    )
    order = ("output", "input", "common")
    pins = [
        pin
        for there in reached
        if there != other and not s.still(there)
        for pin in s.direct(there, *order)
    ]
    return min(pins, key=lambda pin: order.index(pin.kind), default=None)


def _speaker(s: Surroundings, node: str) -> bool:
    parts = (s.parts.get(edge.name.lower()) for edge in s.graph.around(node))
    return any(part is not None and part.kind is Kind.LOUDSPEAKER for part in parts)


def _signal_pair(
    s: Surroundings, c: Edge, here: str, there: str, near: Pin | None, far: Pin | None
) -> Found:
    if near is None or far is None or near.part == far.part:
        return None
    if near.kind in ("output", "common") and far.kind == "input":
        if s.after(far.part, near.part, without=c.name) and not s.after(
            near.part, far.part, without=c.name
        ):
            return Role.FEEDBACK, f"feedback, {near.text} to {far.text}"
        return Role.COUPLING, f"coupling, {near.text} to {far.text}"
    if near.kind == "output" and far.kind == "common":
        if s.after(far.part, near.part, without=c.name):
            return Role.FEEDBACK, f"feedback, {near.text} to {far.text}"
        return Role.COUPLING, f"coupling, {near.text} to {far.text}"
    if near.kind == "output" and far.kind == "diode":
        return Role.COUPLING, f"coupling, {near.text} to {far.text}"
    if near.kind == far.kind == "output":
        if s.direct(here, "output") and s.direct(there, "output"):
            return Role.PLATE_BYPASS, f"{near.text} to {far.text}"
        return Role.COUPLING, f"coupling, {near.text} to {far.text}"
    if near.kind == "diode" and far.kind == "input":
        return Role.COUPLING, f"coupling, detector {near.part} to {far.text}"
    if near.kind == far.kind == "input":
        return Role.COUPLING, f"coupling, {near.text} to {far.text}"
    return None


def _grid_leak(s: Surroundings, c: Edge, e: Ends) -> Found:
    """A small capacitor from a tuned circuit to a grid whose only return is its leak."""
    for tank, node in ((e.a, e.b), (e.b, e.a)):
        grids = s.direct(node, "input")
        if not grids or s.direct(tank, "output") or (c.value or 0.0) > RADIO_F:
            continue
        winding = s.winding_at(tank)
        if winding is None or tank in s.drive.nodes:
            continue
        leak = leak_at(s, node)
        if leak is not None:
            return Role.GRID_LEAK, f"grid capacitor with {leak.name}, {grids[0].text}"
    return None


def _to_load(s: Surroundings, e: Ends, a: Pin | None, b: Pin | None) -> Found:
    """To a loudspeaker, an antenna, a winding, a source or a load without pins."""
    for there, near in ((e.b, a), (e.a, b)):
        load = _load(s, there)
        if near is not None and load:
            back = near.kind in ("input", "common") and _output_core(s, there, near.part)
            if back:
                return Role.FEEDBACK, f"feedback, {load} to {near.text}"
            pair = (load, near.text) if near.kind == "input" else (near.text, load)
            return Role.COUPLING, f"coupling, {pair[0]} to {pair[1]}"
    if a is None and b is None:
        loads = [load for load in (_load(s, e.a), _load(s, e.b)) if load]
        if len(loads) == 2:
            loads.sort(key=lambda load: load.startswith("loudspeaker"))
            return Role.COUPLING, f"coupling, {loads[0]} to {loads[1]}"
        return None
    live, other = (a, e.b) if a is not None else (b, e.a)
    if live is not None and not s.still(other):
        return Role.COUPLING, f"coupling, {live.text} to {s.words(other)}"
    return None


def _load(s: Surroundings, node: str) -> str:
    """Return what hangs on a node without being a pin: antenna, winding, loudspeaker, source."""
    if node in s.touch.touchable and node != GROUND:
        return node
    winding = s.winding_at(node)
    if winding is not None:
        return f"winding {winding.name}"
    for edge in s.graph.around(node):
        part = s.parts.get(edge.name.lower())
        if part is not None and part.kind is Kind.LOUDSPEAKER:
            return f"loudspeaker {edge.name}"
        if edge.letter in "VI" and s.graph.elements[edge.name.lower()].wave is not None:
            return f"the signal source {edge.name}"
    return ""


def _output_core(s: Surroundings, node: str, part: str) -> bool:
    """Say whether a node hangs on a core that a stage after `part` drives."""
    reached = s.graph.reach(node, through=lambda x: x.letter in "RL", stop=s.still)
    for there in reached:
        for edge in s.graph.around(there):
            if edge.letter != "L":
                continue
            for name in s.graph.windings_with(edge.name):
                for end in {s.graph.at(n) for n in s.graph.elements[name].nodes}:
                    for near in () if s.still(end) else s.near(end, "output", ohm=1000.0):
                        if near.pin.part != part and s.after(part, near.pin.part, without=""):
                            return True
    return False
