"""Roles that the signal tells: bypasses at pins, detector and AVC, coupling, feedback."""

from __future__ import annotations

from stress.circuit.circuit import Kind, Role
from stress.circuit.graph import GROUND, Edge, Pin
from stress.circuit.role_power import Found
from stress.circuit.surroundings import RADIO_F, SIGNAL_OHM, STOPPER_OHM, Ends, Near, Surroundings

AVC_OHM = 220e3  # AVC lines are fed through more than this (common practice)
RETURN_OHM = 47e3
DETECTOR_F = 5e-9
WORDS = {"cathode": "cathode", "emitter": "emitter", "source": "source", "filament": "filament"}


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
    part = s.graph.parts[pin.part]
    at = {Pin(part.name, role).kind: s.graph.at(node) for role, node in part.pins.items()}
    held = at.get("input", "")
    clamped = any(j.cathode == held and not j.tube for j in s.graph.junctions)
    rail = at.get("output", "")
    fed = rail in s.supply.feeds and (s.is_held(rail) or rail in s.supply.outputs)
    return fed and held != GROUND and (s.still(held) or clamped)


def _at_cathode(s: Surroundings, pin: Pin, quiet: str) -> Found:
    word = WORDS.get(pin.role.rstrip("0123456789"), "cathode")
    return Role.CATHODE_BYPASS, f"{word} bypass, {pin.text} to {s.words(quiet)}"


def _at_plate(s: Surroundings, c: Edge, e: Ends, pin: Pin, quiet: str) -> Found:
    if e.control or e.ohm >= 1000.0:
        return Role.TONE, f"tone, {pin.text} to {s.words(quiet)}"
    return (
        Role.PLATE_BYPASS,
        f"{pin.role.rstrip('0123456789')} bypass, {pin.text} to {s.words(quiet)}",
    )


def _at_grid(s: Surroundings, c: Edge, e: Ends, node: str, pin: Pin, quiet: str) -> Found:
    leak = _leak_at(s, node)
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
    if (c.value or 0.0) > DETECTOR_F or node in s.supply.outputs:
        return False
    reached = s.graph.reach(
        node, through=lambda x: x.letter in "RSW", stop=s.still, limit_ohm=STOPPER_OHM
    )
    return any(_at_detector(s, n) for n in reached if not s.still(n))


def _at_detector(s: Surroundings, node: str) -> bool:
    """Say whether a signal rectifier is at a node, or behind the winding there."""
    return bool(_signal_junctions(s, node)) or any(
        _signal_junctions(s, edge.other(node))
        for edge in s.graph.around(node)
        if edge.letter == "L"
    )


def _signal_junctions(s: Surroundings, node: str) -> list[str]:
    driven = s.drive.nodes
    return [
        j.part
        for j in s.graph.junctions
        if node in (j.anode, j.cathode) and not {j.anode, j.cathode} & driven
    ]


def _detector(s: Surroundings, node: str) -> str:
    found = _signal_junctions(s, node)
    for edge in s.graph.around(node):
        if edge.letter == "L":
            found += _signal_junctions(s, edge.other(node))
    return f"load of {found[0]}" if found else s.words(node)


def _behind_resistors(s: Surroundings, c: Edge, e: Ends, node: str, quiet: str) -> Found:
    """No pin at the node itself: what its resistors and windings lead to."""
    value = c.value or 0.0
    grids = _return_of(s, node)
    fed = node in s.supply.feeds
    if grids and _leads_to_rectifier(s, node) and not fed:
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
    for edge in s.graph.around(node):
        if edge.letter == "L":
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
        for edge in s.graph.around(there):
            if edge.letter == "L":
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


def _leads_to_rectifier(s: Surroundings, node: str) -> bool:
    """Say whether large resistors lead from a node to a signal rectifier or its load."""
    reached = s.graph.reach(node, through=lambda x: x.letter in "RSWL", stop=lambda n: n == GROUND)
    return any(_signal_junctions(s, there) for there, ohm in reached.items() if ohm >= RETURN_OHM)


def coupling(s: Surroundings, c: Edge, e: Ends) -> Found:
    """Between two nodes of which neither stands still, or from one to a load."""
    a, b = _best(s, e.a), _best(s, e.b)
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
        leak = _leak_at(s, node)
        if leak is not None:
            return Role.GRID_LEAK, f"grid capacitor with {leak.name}, {grids[0].text}"
    return None


def _leak_at(s: Surroundings, node: str) -> Edge | None:
    return next((x for x in s.graph.around(node) if x.letter == "R" and x.ohm >= 10e3), None)


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
