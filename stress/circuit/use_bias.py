"""Bias and drive that can be lost, and the tubes and rectifiers it concerns."""

from __future__ import annotations

from collections.abc import Iterator

from stress.circuit.circuit import Kind, Part, Use
from stress.circuit.graph import Pin
from stress.circuit.joined import GROUND
from stress.circuit.sources import Sources
from stress.circuit.supply import Output
from stress.circuit.surroundings import Surroundings

GRID_LEAK_OHM = (1e3, 220e3)  # of a stage that is biased by its drive (common practice)


def rectifiers(s: Surroundings) -> list[Part]:
    """Return the tubes and diodes that make direct current of the line."""
    kinds = (Kind.RECTIFIER, Kind.DIODE)
    return [
        part
        for part in s.parts.values()
        if part.kind in kinds
        and any(s.graph.at(node) in s.drive.line for node in part.pins.values())
    ]


def tubes(s: Surroundings) -> list[Part]:
    """Return the tubes with a plate that warm up behind the rectifiers."""
    return [p for p in s.graph.parts.values() if p.kind is Kind.TUBE and "plate" in p.pins]


def bias(s: Surroundings, fed: Sources) -> Iterator[Use]:
    """A negative supply for grids that has a rectifier of its own."""
    shared = {name for o in s.supply.outputs.values() if o.sign > 0 for name in o.by}
    for output in s.supply.outputs.values():
        if output.sign >= 0 or output.origin != "line":
            continue
        grids = sorted(
            {
                near.pin.part
                for node, feed in s.supply.feeds.items()
                if feed.output == output
                for near in s.near(node, "input", ohm=2.2e6)
            }
            | {pin.part for pin in _through_windings(s, output)}
        )
        makers = [p for p in rectifiers(s) if p.name not in shared and _makes(s, p, output)]
        if grids and makers:
            names = tuple(p.name for p in makers)
            yield Use(
                name="bias-lost",
                open=tuple(p.name for p in makers if p.kind is Kind.DIODE),
                pulled=tuple(p.name for p in makers if p.kind is Kind.RECTIFIER),
                text=f"fixed bias lost ({', '.join(names)} dead)",
                tests=f"what {', '.join(grids)} then draw",
            )
            return


def _through_windings(s: Surroundings, output: Output) -> list[Pin]:
    """Return the grids behind a winding whose other end the bias feeds."""
    return [
        near.pin
        for node, feed in s.supply.feeds.items()
        if feed.output == output
        for edge in s.graph.windings(node)
        for near in s.near(edge.other(node), "input")
    ]


def _makes(s: Surroundings, part: Part, output: Output) -> bool:
    """Say whether a rectifier makes a supply: named by it, or on its winding."""
    if part.name in output.by:
        return True
    reached = s.graph.reach(
        output.node, through=lambda e: e.letter in "RL", stop=lambda n: n == GROUND, limit_ohm=1e3
    )
    return any(s.graph.at(n) in reached for n in part.pins.values() if s.graph.at(n) != GROUND)


def drive(s: Surroundings, fed: Sources) -> Iterator[Use]:
    """Grids that only their drive makes negative: a leak to the cathode, driven from outside."""
    driven = {}
    for tube in tubes(s):
        grid = s.graph.at(tube.pins.get("grid", GROUND))
        if _has_no_other_bias(s, tube, grid):
            drivers, muted = _drivers(s, tube, grid, fed)
            if drivers or muted:
                driven[tube.name] = (drivers, muted)
    if driven:
        pulled = tuple(dict.fromkeys(name for drivers, _ in driven.values() for name in drivers))
        muted = tuple(dict.fromkeys(name for _, muted in driven.values() for name in muted))
        told = [*(f"{name} pulled" for name in pulled), *(f"{name} silent" for name in muted)]
        yield Use(
            name="drive-lost",
            pulled=pulled,
            muted=muted,
            text=f"drive lost ({', '.join(told)})",
            tests=f"only its drive biases {', '.join(driven)}",
        )


def _has_no_other_bias(s: Surroundings, tube: Part, grid: str) -> bool:
    cathode = s.graph.at(tube.pins.get("cathode", GROUND))
    if grid == GROUND or cathode != GROUND or grid in s.supply.feeds:
        return False
    leaks = s.graph.reach(
        grid,
        through=lambda e: e.letter in "RL",
        stop=lambda n: n == GROUND,
        limit_ohm=GRID_LEAK_OHM[1],
    )
    fed = any(node in s.supply.feeds for node in leaks)
    return not fed and leaks.get(GROUND, 0.0) >= GRID_LEAK_OHM[0]


def _drivers(
    s: Surroundings, tube: Part, grid: str, fed: Sources
) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Return the tubes and the sources that drive a grid through a capacitor or a core."""
    places = {grid}
    for edge in s.graph.around(grid):
        if edge.letter == "C" and not s.still(edge.other(grid)):
            places.add(edge.other(grid))
        if edge.letter == "L":
            for name in s.graph.windings_with(edge.name):
                ends = {s.graph.at(n) for n in s.graph.elements[name].nodes}
                places |= {end for end in ends if not s.still(end)}
    near = s.graph.reach(places, through=lambda e: e.letter == "R", stop=s.still, limit_ohm=1e3)
    outputs = [p for node in near for p in s.direct(node, "output") if p.part != tube.name]
    glasses = [s.graph.parts[p.part].envelope or p.part for p in outputs if p.part in s.graph.parts]
    own = tube.envelope or tube.name
    sources = [
        name
        for name in (*fed.signals, *fed.gates)
        if any(s.graph.at(n) in near for n in s.graph.elements[name.lower()].nodes if n != GROUND)
    ]
    return tuple(g for g in dict.fromkeys(glasses) if g != own), tuple(dict.fromkeys(sources))
