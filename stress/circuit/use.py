"""How else the equipment may be run: leads off, bias or drive gone, silicon, another line.

Each use is offered only where the graph shows that it applies. Nothing here simulates.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from stress.circuit import use_bias
from stress.circuit.circuit import Kind, Line, Part, Use
from stress.circuit.graph import Edge, Pin, cathode_of
from stress.circuit.joined import GROUND
from stress.circuit.sources import Sources
from stress.circuit.surroundings import Surroundings
from stress.circuit.use_bias import rectifiers, tubes
from stress.netlist.flat import Element
from stress.parts.sheet import Sheet

CONTACT_OHM = 0.1  # a resistor up to this stands for a contact (common practice)
COPPER_OHM = 1000.0  # of a plate winding
FIELD_OHM = 400.0  # field coils have 400 to 2500 Ω, filter chokes less (common practice)


@dataclass(frozen=True, slots=True)
class Supplied:
    """What lines give today.

    Attributes:
        designed_V: Lowest and highest nominal voltage of the equipment made for such a line.
        nominal_V, high_V: Today, rms.
        source: Where that is laid down.
    """

    designed_V: tuple[float, float]
    nominal_V: float
    high_V: float
    source: str


TODAY = (
    Supplied((105.0, 119.0), 120.0, 126.0, "ANSI C84.1, range A"),  # [memory M]
    Supplied((200.0, 229.0), 230.0, 253.0, "IEC 60038"),  # [memory H]
)
NOMINAL_HIGHER, HIGH_HIGHER = 1.03, 1.01  # less is within what the sheet's own line covers


def find(s: Surroundings, *, fed: Sources, sheet: Sheet) -> tuple[Use, ...]:
    """Return every use that applies and that the sheet does not have as its own."""
    found = [use for rule in RULES for use in rule(s, fed)]
    if sheet.equipment.heaters == "series":  # pulling a tube cools all others
        found = [use for use in found if not use.pulled]
    names = {condition.name.lower() for condition in sheet.conditions}
    stated = [(_lower(c.open), _lower(c.pulled)) for c in sheet.conditions if not c.short]
    return tuple(
        use
        for use in found
        if use.name not in names
        and not ((use.open or use.pulled) and (_lower(use.open), _lower(use.pulled)) in stated)
    )


def without_drive(
    uses: tuple[Use, ...], *, signals: tuple[str, ...], sheet: Sheet
) -> tuple[str, ...]:
    """Return what is assumed of stages that only their drive biases, while signals are silent."""
    if not signals or sheet.equipment.driven:
        return ()
    return tuple(
        f"{', '.join(signals)} silent, as in all conditions but `driven`: {use.tests}, so what "
        "stands here of these tubes is without it; state [equipment] driven = true"
        for use in uses
        if use.name == "drive-lost"
    )


def _lower(names: tuple[str, ...]) -> frozenset[str]:
    return frozenset(name.lower() for name in names)


def _standby(s: Surroundings, fed: Sources) -> Iterator[Use]:
    """A contact through which all direct current of the plates flows, behind the rectifier or
    between its winding and ground."""
    for element in s.graph.netlist.elements:
        part = s.parts.get(element.name.lower())
        if not _is_contact(element) or (part is not None and part.kind is Kind.FUSE):
            continue
        if _parts_supply(s, element):
            yield Use(
                name="standby",
                open=(element.name,),
                text=f"standby switch {element.name} open, tubes hot",
                tests="what stands before it bears the unloaded voltage as long as it is left so",
            )
            return


def _is_contact(element: Element) -> bool:
    small = element.letter == "R" and 0.0 < abs(element.value or 0.0) <= CONTACT_OHM
    return small or element.letter == "S"


def _parts_supply(s: Surroundings, contact: Element) -> bool:
    """Say whether opening a contact takes the direct current from every plate."""
    glass = [p for p in s.graph.parts.values() if p.kind is Kind.TUBE]
    plates = {n for p in glass for role, n in p.pins.items() if Pin(p.name, role).kind == "output"}
    feeding = rectifiers(s)
    hot = {n for p in feeding for n in p.pins.values() if n in _cathodes(p)}
    cold = {n for p in feeding for n in p.pins.values()} - hot
    ways = ((hot, plates), (cold, {GROUND}))
    for starts, ends in ways:
        if starts & ends or not ends & _reached(s, starts, without=""):
            continue
        if not ends & _reached(s, starts, without=contact.name):
            return True
    return False


def _cathodes(part: Part) -> frozenset[str]:
    return frozenset(
        node for role in part.pins if (node := cathode_of(part, role)) is not None
    ) or frozenset({part.pins.get("cathode", "")})


def _reached(s: Surroundings, starts: set[str], *, without: str) -> set[str]:
    """Return the nodes of the netlist that direct current reaches through copper alone, ground
    not passed."""
    seen, queue = set(starts), list(starts)
    while queue:
        node = queue.pop()
        if node == GROUND:
            continue
        for element in s.copper.get(node, ()):
            if element.name != without:
                fresh = set(element.nodes[:2]) - seen
                seen |= fresh
                queue += fresh
    return seen


def _speaker(s: Surroundings, fed: Sources) -> Iterator[Use]:
    """The loudspeaker, the primary of its transformer, and its field coil."""
    speakers = tuple(p for p in s.parts.values() if p.kind is Kind.LOUDSPEAKER)
    cores = {c for p in speakers for n in p.pins.values() for c in _cores_near(s, n)}
    driven = [(tube, edge) for tube in tubes(s) if (edge := _at_plate(s, tube, cores)) is not None]
    if not speakers:
        return
    if driven:
        names = tuple(p.name for p in speakers)
        yield Use(
            name="speaker-out",
            open=names,
            driven=True,
            text=f"loudspeaker unplugged ({', '.join(names)} off)",
            tests="nothing loads the output stage",
        )
        screens = [tube.name for tube, _ in driven if "screen" in tube.pins]
        told = f"the screen of {', '.join(screens)} takes the current" if screens else ""
        leads = tuple(dict.fromkeys(edge.name for _, edge in driven))
        yield Use(
            name="primary-out",
            open=leads,
            text=f"output primary unplugged ({', '.join(leads)} open)",
            tests=told or "the plates are without their supply",
        )
    for part in s.parts.values():
        if part.kind is Kind.WINDING and _is_field(s, part):
            yield Use(
                name="field-out",
                open=(part.name,),
                text=f"field coil {part.name} unplugged with the loudspeaker",
                tests="what stands before it bears the unloaded voltage",
            )


def _cores_near(s: Surroundings, node: str) -> frozenset[str]:
    """Return the inductors on the cores whose windings end at a node, or close to it."""
    reached = s.graph.reach(s.graph.at(node), through=lambda e: e.letter == "R", limit_ohm=50.0)
    return frozenset(
        name
        for there in reached
        if there != GROUND
        for edge in s.graph.windings(there)
        for name in s.graph.windings_with(edge.name)
    )


def _at_plate(s: Surroundings, tube: Part, cores: set[str]) -> Edge | None:
    """Return what joins a plate to its winding on one of these cores: the winding, or copper."""
    plate = s.graph.at(tube.pins["plate"])
    for edge in s.graph.around(plate):
        if edge.name.lower() in cores:
            return edge
        beyond = edge.other(plate)
        copper = edge.letter == "R" and edge.ohm <= COPPER_OHM and not s.still(beyond)
        if copper and any(w.name.lower() in cores for w in s.graph.windings(beyond)):
            return edge
    return None


def _is_field(s: Surroundings, part: Part) -> bool:
    """Say whether a winding alone on its core carries the supply and has a field's resistance."""
    alone = len(s.graph.windings_with(part.name)) == 1
    fed = [s.supply.feeds.get(s.graph.at(node)) for node in part.pins.values()]
    positive = all(f is not None and f.output.sign > 0 for f in fed)
    return alone and positive and (part.resistance_ohm or 0.0) >= FIELD_OHM


def _silicon(s: Surroundings, fed: Sources) -> Iterator[Use]:
    """Rectifier tubes at the line or at a winding of it."""
    names = tuple(p.name for p in rectifiers(s) if p.kind is Kind.RECTIFIER)
    if names:
        yield Use(
            name="silicon",
            silicon=names,
            text=f"{', '.join(names)} replaced by silicon diodes",
            tests="no drop in the tube, and all of B+ while the other tubes are cold",
        )


def _today(s: Surroundings, fed: Sources) -> Iterator[Use]:
    """A line voltage that nobody supplies any more."""
    line: Line = fed.line
    if not line.sources or not s.drive.alternating:
        return
    for today in TODAY:
        low, high = today.designed_V
        higher = today.nominal_V > NOMINAL_HIGHER * line.nominal_V
        if low <= line.nominal_V <= high and (higher or today.high_V > HIGH_HIGHER * line.high_V):
            yield Use(
                name="todays-line",
                nominal_V=max(today.nominal_V, line.nominal_V),
                high_V=max(today.high_V, line.high_V),
                text=f"made for {line.nominal_V:g} V, run on today's line",
                tests=f"{today.nominal_V:g} V, at the highest {today.high_V:g} V ({today.source})",
            )


RULES: tuple[Callable[[Surroundings, Sources], Iterator[Use]], ...] = (
    _standby,
    _speaker,
    use_bias.bias,
    use_bias.drive,
    _silicon,
    _today,
)
