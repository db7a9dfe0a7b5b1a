"""Roles at the line and at its windings: across it, to the chassis, doublers, buffers."""

from __future__ import annotations

from stress.circuit.circuit import Role
from stress.circuit.drive import HELD_F
from stress.circuit.graph import Edge
from stress.circuit.joined import GROUND
from stress.circuit.surroundings import Ends, Surroundings

Found = tuple[Role, str] | None


def at_line(s: Surroundings, c: Edge, e: Ends) -> Found:
    """Across the line, or from the line to what can be touched."""
    touch, pair = s.touch, {e.a, e.b}
    for plus, minus in s.drive.poles:
        across = (e.a in plus and e.b in minus) or (e.b in plus and e.a in minus)
        if not s.drive.alternating:
            continue
        if across and touch.secondary:
            return Role.BUFFER, "buffer across the winding that feeds the rectifier"
        if across:
            note = "" if GROUND not in pair else ", whose return is ground"
            return Role.LINE_ACROSS, "across the line" + note
        for pole in (plus, minus):
            if e.a in pole and e.b in pole:
                return Role.SNUBBER, "across the line switch or choke"
    if touch.secondary:
        return _to_case(s, e)
    grounds = frozenset() if touch.hot_ground else frozenset({GROUND})
    safe = (touch.touchable | grounds) - touch.hot
    for hot, cold in ((e.a, e.b), (e.b, e.a)):
        if hot not in touch.hot or cold not in safe:
            continue
        if _is_antenna(cold):
            return Role.COUPLING, f"coupling, {cold} to the set, isolates it from the line"
        what = "line" if _in_pole(s, hot) else s.words(hot) + ", which is line-connected,"
        if hot == GROUND:
            what = "B- (ground), which is line-connected,"
        return Role.LINE_CHASSIS, f"{what} to {_chassis(cold)}"
    return _to_case(s, e)


def _in_pole(s: Surroundings, node: str) -> bool:
    return any(node in pole for poles in s.drive.poles for pole in poles)


def _is_antenna(node: str) -> bool:
    return node.startswith(("ant", "aerial"))


def _to_case(s: Surroundings, e: Ends) -> Found:
    """From ground or a supply to a case that is not ground."""
    for here, case in ((e.a, e.b), (e.b, e.a)):
        if case in s.touch.touchable and case != GROUND and here not in s.touch.touchable:
            if _is_antenna(case):
                return Role.COUPLING, f"coupling, {case} to {_aerial_coil(s, here)}"
            if s.is_joined(here, case):
                continue
            if here == GROUND or here in s.supply.outputs:
                return Role.LINE_CHASSIS, f"{s.words(here)} to {case}"
    for here, case in ((e.a, e.b), (e.b, e.a)):
        if _is_antenna(case) and case != here:
            return Role.COUPLING, f"coupling, {case} to {_aerial_coil(s, here)}"
    return None


def _aerial_coil(s: Surroundings, node: str) -> str:
    return "the input coil" if node == GROUND else s.words(node)


def _chassis(node: str) -> str:
    return "chassis" if node == GROUND else node


def doubler(s: Surroundings, c: Edge, e: Ends) -> Found:
    """From a driven node to one that only it drives and that has rectifiers."""
    driven, pumped = s.drive.nodes, s.drive.pumped
    for here, there in ((c.a, c.b), (c.b, c.a)):
        if there in pumped and here in driven:
            return Role.FLYING, f"doubler, {s.words(here)} to the rectifiers at {there}"
        if (c.value or 0.0) >= HELD_F and there in _midpoints(s) and here in _midpoints(s)[there]:
            return Role.FLYING, f"doubler half, {s.words(here)} to the midpoint {there}"
        if there in s.drive.returns and here in s.supply.outputs and (c.value or 0) >= HELD_F:
            by = ", ".join(s.supply.outputs[here].by)
            return (
                Role.RESERVOIR,
                f"reservoir, {s.words(here)} to the return {there}, fed by {by}",
            )
    return None


def _midpoints(s: Surroundings) -> dict[str, set[str]]:
    """Return the nodes where the two halves of a full-wave doubler meet, with the far ends:
    two rectifiers at one driven node lead to both ends of two large capacitors in series."""
    found: dict[str, set[str]] = {}
    for x in s.drive.nodes:
        up = {j.cathode for j in s.graph.junctions_at(x) if j.anode == x}
        down = {j.anode for j in s.graph.junctions_at(x) if j.cathode == x}
        for plus in up - down:
            for minus in down - up:
                for middle in _held_to(s, plus) & _held_to(s, minus):
                    if middle in s.drive.returns:
                        found.setdefault(middle, set()).update((plus, minus))
    return found


def _held_to(s: Surroundings, node: str) -> set[str]:
    return {
        x.other(node)
        for x in s.graph.around(node)
        if x.letter == "C" and (x.value or 0.0) >= HELD_F
    }


def buffer(s: Surroundings, c: Edge, e: Ends) -> Found:
    """From a driven end of a winding to ground or to its other end."""
    hot = [n for n in (e.a, e.b) if n in s.drive.line and n not in s.drive.returns]
    if len(hot) == 2:
        return Role.BUFFER, f"buffer, {s.words(e.a)} to {s.words(e.b)}"
    if hot:
        far = e.b if hot[0] == e.a else e.a
        if s.still(far) or far in s.drive.returns:
            return Role.BUFFER, f"buffer, {s.words(hot[0])} to {s.words(far)}"
    return None
