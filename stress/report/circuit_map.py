"""The circuit map: what stands where, what must be done, and whom each fault would hit."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from markupsafe import Markup

from stress.circuit.chain import Chains
from stress.circuit.joined import GROUND
from stress.finding import Severity
from stress.report import words
from stress.report.circuit_layout import Layout, Link, layout
from stress.report.drawing import line, svg, tag, text
from stress.study.result import Review

_CHIP, _CHIP_HEIGHT = 58.0, 30.0


@dataclass(frozen=True, slots=True, kw_only=True)
class CircuitMap:
    """The picture, and what is said when a position is selected.

    Attributes:
        svg: Everything that a position's fault runs through carries the position's name in
            `data-chain`, separated by spaces.
        said: Position to its sentence.
    """

    svg: Markup
    said: dict[str, str]


def circuit_map(review: Review) -> CircuitMap | None:
    """Return the map of the equipment, or None where there is nothing to draw."""
    hit = {
        name: _victims(review, name) for name in (each.name for each in review.circuit.positions)
    }
    volts = {
        node: by_condition["nominal"]
        for node, by_condition in review.working.nodes.items()
        if "nominal" in by_condition
    }
    placed = layout(
        review.circuit, volts=volts, keep={part for parts in hit.values() for part in parts}
    )
    if not placed.links:
        return None
    ways = Chains(review.circuit)
    chains = _reached(ways, hit)
    drawn = [*_rails(placed, chains), *_wires(placed, chains), *_devices(review, placed, chains)]
    drawn += _chips(review, placed, chains)
    return CircuitMap(
        svg=svg(
            *drawn,
            width=placed.width,
            height=placed.height,
            title="Circuit map: higher is more positive, the signal goes from left to right",
            class_="map",
            role="group",
        ),
        said={name: _sentence(review, ways, name, parts) for name, parts in hit.items()},
    )


def _victims(review: Review, name: str) -> tuple[str, ...]:
    """Return the parts that a fault of the position drives past a limit, the first one first."""
    found = []
    leakage = review.leakage.get(name)
    if leakage and leakage.governing and leakage.governing.victim:
        found.append(leakage.governing.victim.part)
    for failure in review.failures.get(name, ()):
        found += [victim.part for victim in failure.victims]
    known = {part.name for part in review.circuit.parts}
    known |= {position.name for position in review.circuit.positions}
    return tuple(part for part in dict.fromkeys(found) if part in known)


def _sentence(review: Review, ways: Chains, name: str, victims: Sequence[str]) -> str:
    told = f"{name}, {review.circuit.position(name).role_text}: "
    if not victims:
        return f"{told}its faults hit no known limit."
    first = " -> ".join(ways.words(name, victims[0]))
    others = f"; also past a limit: {', '.join(victims[1:])}" if victims[1:] else ""
    return f"{told}{first}{others}."


def _reached(ways: Chains, hit: Mapping[str, tuple[str, ...]]) -> dict[str, list[str]]:
    """Return for every part and net of the map the positions whose fault reaches it.

    The way is drawn to the first victim only; of the others the parts stand out.
    """
    reached: dict[str, list[str]] = {}
    for position, parts in hit.items():
        lit = {f"part {position}"} | {f"part {part}" for part in parts}
        for step in ways.steps(position, parts[0]) if parts else ():
            lit.add(f"net {step.name}" if step.kind == "node" else f"part {step.name}")
        for key in lit:
            reached.setdefault(key, []).append(position)
    return reached


def _chain(chains: dict[str, list[str]], *keys: str) -> str | None:
    lit = [set(chains.get(key, ())) for key in keys]
    both = sorted(set.intersection(*lit)) if lit else []
    return " ".join(both) or None


def _any(chains: dict[str, list[str]], parts: Iterable[str]) -> str | None:
    reached = {name for part in parts for name in chains.get(f"part {part}", ())}
    return " ".join(sorted(reached)) or None


def _rails(placed: Layout, chains: dict[str, list[str]]) -> list[Markup]:
    drawn = []
    for net, (left, right, y) in placed.rails.items():
        class_ = "rail ground" if net == GROUND else "rail"
        drawn.append(line(left, y, right, y, class_, data_chain=_chain(chains, f"net {net}")))
        name = "ground" if net == GROUND else net
        drawn.append(text(left, y - 5, name, class_="tick"))
    return drawn


def _wires(placed: Layout, chains: dict[str, list[str]]) -> list[Markup]:
    drawn = []
    for link in placed.links:
        drawn.append(
            tag(
                "polyline",
                tag("title", " + ".join(link.parts)),
                points=" ".join(f"{x:.1f},{y:.1f}" for x, y in _run(placed, link)),
                class_="wire of-position" if link.position else "wire",
                data_chain=_any(chains, link.parts),
            )
        )
        drawn += _names(placed, link, chains)
    for device, net in placed.pins:
        x, y = placed.devices[device]
        x2, y2 = placed.dots.get(net, (x, placed.rails[net][2] if net in placed.rails else y))
        chain = _chain(chains, f"part {device}", f"net {net}")
        drawn.append(line(x, y, x2, y2, "wire pin", data_chain=chain))
    for net, (x, y) in placed.dots.items():
        drawn.append(
            tag(
                "circle", tag("title", f"node {net}"), cx=x, cy=y, r=3, class_="dot",
                data_chain=_chain(chains, f"net {net}"),
            )
        )  # fmt: skip
    return drawn


def _names(placed: Layout, link: Link, chains: dict[str, list[str]]) -> list[Markup]:
    """Return the names of parts without a chip or box; they show when a fault reaches them."""
    if link.position:
        return []
    (x1, y1), (x2, y2) = _run(placed, link)[-2:]
    named = [part for part in link.parts if f"part {part}" in chains]
    return [
        tag(
            "text",
            part,
            x=(x1 + x2) / 2 + 6,
            y=(y1 + y2) / 2 + 14 * i,
            class_="name of-hit",
            data_chain=_chain(chains, f"part {part}"),
        )
        for i, part in enumerate(named)
    ]


def _run(placed: Layout, link: Link) -> list[tuple[float, float]]:
    """Return the corners of a part's line; to a rail it stands upright, in a place of its own."""
    a, b = placed.dots.get(link.a), placed.dots.get(link.b)
    if a is not None and b is not None:
        return [a, b]
    dot = a or b
    own = placed.slots.get(link.parts[0])
    x = own if own is not None else dot[0] if dot is not None else placed.width / 2
    rails = [placed.rails[net][2] for net in (link.a, link.b) if net in placed.rails]
    if dot is None:
        return [(x, y) for y in rails]
    return [*([dot] if own is not None else []), (x, dot[1]), (x, rails[0])]


def _devices(review: Review, placed: Layout, chains: dict[str, list[str]]) -> list[Markup]:
    drawn = []
    for name, (x, y) in placed.devices.items():
        part = review.circuit.part(name)
        drawn.append(
            tag(
                "g",
                tag("title", f"{name}, {part.kind.value} {part.type}".rstrip()),
                tag("rect", x=x - 30, y=y - 19, width=60, height=38, rx=18),
                text(x, y - 1, name, anchor="middle", class_="name"),
                text(x, y + 12, part.type or part.kind.value, anchor="middle", class_="tick"),
                class_="device",
                data_chain=_chain(chains, f"part {name}"),
            )
        )
    return drawn


def _chips(review: Review, placed: Layout, chains: dict[str, list[str]]) -> list[Markup]:
    severity = {risk.position: risk.severity for risk in review.risks}
    taken = [(x, y, 66.0, 44.0) for x, y in placed.devices.values()]
    drawn = []
    for link in placed.links:
        if not link.position:
            continue
        name = link.parts[0]
        first, second = _run(placed, link)[-2:]
        x, y, beside = _free(first, second, taken)
        if beside:
            drawn.append(line(x, y, x, y - beside, "wire of-position"))
        taken.append((x, y, _CHIP + 4, _CHIP_HEIGHT + 4))
        held = severity.get(name)
        do = held.value.partition("-")[0] if held else "unranked"
        outer = []
        if held is Severity.TEST:  # a double frame
            outer = [tag("rect", x=x - _CHIP / 2 - 3, y=y - _CHIP_HEIGHT / 2 - 3,
                         width=_CHIP + 6, height=_CHIP_HEIGHT + 6)]  # fmt: skip
        label = f"{name}: {words.SEVERITIES[held] if held else 'not ranked'}"
        drawn.append(
            tag(
                "g",
                tag("title", label),
                *outer,
                tag("rect", x=x - _CHIP / 2, y=y - _CHIP_HEIGHT / 2, width=_CHIP,
                    height=_CHIP_HEIGHT),
                text(x, y - 2, name, anchor="middle", class_="name"),
                text(x, y + 11, do, anchor="middle", class_="tick"),
                class_=f"chip {held.value if held else 'unranked'}",
                data_position=name,
                data_chain=_chain(chains, f"part {name}"),
                role="button",
                tabindex=0,
                aria_label=label,
                aria_pressed="false",
            )
        )  # fmt: skip
    return drawn


def _free(
    first: tuple[float, float],
    second: tuple[float, float],
    taken: list[tuple[float, float, float, float]],
) -> tuple[float, float, float]:
    """Return a place on a part's line where its chip covers no other, nearest to the middle.

    Where the line is too short for that, above or below it; by how much is returned too.
    """
    shares = sorted((i / 40 for i in range(3, 38)), key=lambda share: abs(share - 0.5))
    run_x, run_y = second[0] - first[0], second[1] - first[1]
    places = [
        (first[0] + share * run_x, first[1] + share * run_y + beside, beside)
        for beside in (0.0, -36.0, 36.0, -72.0, 72.0)
        for share in shares
    ]
    for x, y, beside in places:
        if not any(
            abs(x - ox) < (_CHIP + w) / 2 and abs(y - oy) < (_CHIP_HEIGHT + h) / 2
            for ox, oy, w, h in taken
        ):
            return x, y, beside
    return places[0]
