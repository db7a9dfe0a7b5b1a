"""A twin and what is left out of it, as the draft of the decks of many cases. Pure."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace

from stress.engine import card
from stress.engine.case import Twin
from stress.engine.deck import Deck, Hysteresis, Probe, State
from stress.engine.ease import NODE, eased, held, holders
from stress.engine.periodic import has_amplitude, repeats, scaled, settled, shifted
from stress.engine.topology import gaps
from stress.engine.tree import reads_time
from stress.netlist.flat import Element, Model, Wave

TIE_OHM = 1e11  # as much as the leakage of the best capacitor in a twin
SERIES_SHARE = 1e-3  # of the reactance at the period's frequency, for a winding without resistance
LEAST_SERIES_OHM = 1e-3
_CURRENT_OF = {"C": "i", "D": "id", "Q": "ic", "J": "id", "M": "id", "R": "i", "S": "i", "I": "c"}
_BRANCHED = frozenset("VLEH")
# Of the user's options those that belong to the circuit; the others would steer the solver.
PHYSICAL = frozenset({"gmin", "tnom", "defl", "defw", "defad", "defas"})


@dataclass(frozen=True, slots=True)
class _Entry:
    element: Element
    value: float | None
    wave: Wave | None


class Draft:
    """What all cases of one twin with the same parts removed have in common.

    Args:
        twin: The circuit.
        removed: Elements that are left out; what couples or senses them goes with them.
        forever: Whether sources are taken in the form that they settle to.
        easy: Whether laws are written as ngspice computes them fastest.
        changed: Voltage sources that cases change; the laws take the others as they are.

    Raises:
        LoopOfSources: Where voltage sources form a loop.
    """

    def __init__(
        self,
        twin: Twin,
        removed: frozenset[str],
        *,
        forever: bool,
        easy: bool = True,
        changed: frozenset[str] = frozenset(),
    ) -> None:
        self.twin = twin
        self._removed = frozenset(name.lower() for name in removed)
        self._forever = forever
        self._notices: list[str] = []
        kept = _without(twin.elements, self._removed)
        kept = tuple(element for element in kept if not _is_nothing(element))
        self._held = frozenset(holders(kept)) - changed if easy else frozenset()
        if easy:
            kept = eased(kept, held_V=held(kept, but=changed))
        kept = self._metered(kept)
        found = gaps(kept)
        self._floating, self._stiff = found.floating, frozenset(n.lower() for n in found.stiff)
        self.names = card.name_all(kept, twin.models)
        self._entries = {element.name.lower(): self._entry(element) for element in kept}
        self._cards = {key: self._card(entry) for key, entry in self._entries.items()}
        self._tail = self._closing()

    @property
    def elements(self) -> tuple[Element, ...]:
        """The elements that are left, as they stand in the deck."""
        return tuple(entry.element for entry in self._entries.values())

    def deck(
        self,
        values: Mapping[str, float],
        *,
        phase_deg: float = 0.0,
        driven: str = "",
        keep: tuple[str, ...] = (),
    ) -> Deck:
        """Return the deck of a case.

        Args:
            values: As in `Case`.
            phase_deg: Added to the phase of every sine.
            driven: The source of a small-signal response.
            keep: Names of the rows wanted; empty: all.

        Raises:
            ValueError: Where a source is changed that the laws have taken as it is.
        """
        fixed = self._held & {name.lower() for name in (*values, driven)}
        if fixed:
            raise ValueError(f"the draft holds {', '.join(sorted(fixed))}")
        cards, entries = dict(self._cards), dict(self._entries)
        for name, value in values.items():
            key = name.lower()
            if key in entries:
                entries[key] = _changed(entries[key], value)
                cards[key] = self._card(entries[key])
        for key, entry in entries.items():
            if phase_deg and entry.wave is not None:
                entries[key] = replace(entry, wave=shifted(entry.wave, phase_deg))
                cards[key] = self._card(entries[key])
        if driven:
            cards[driven.lower()] += " ac 1"
        states = tuple(
            state for entry in entries.values() if (state := self._state(entry)) is not None
        )
        moving = any(e.wave is not None and has_amplitude(e.wave) for e in entries.values())
        moving = moving or any(
            e.element.law is not None and reads_time(e.element.law.expression)
            for e in entries.values()
        )
        probes = self._probes(frozenset(name.lower() for name in keep))
        return Deck(
            cards=(
                "* capstress",
                *cards.values(),
                *self._tail,
                *_saves(probes, everything=not keep),
            ),
            states=states,
            probes=probes,
            nodes={deck: node for node, deck in self.names.nodes.items() if deck != "0"},
            initial_V={
                self.names.nodes[node.lower()]: value
                for node, value in self.twin.initial_V.items()
                if node.lower() in self.names.nodes
            },
            period_s=self.twin.period_s if moving else None,
            plain=self._plain(entries.values()),
            junctions=tuple(self._junctions()),
            removed=self._removed,
            hysteresis=tuple(self._hysteresis()),
            notices=tuple(self._notices),
        )

    def _metered(self, elements: tuple[Element, ...]) -> tuple[Element, ...]:
        """Put a 0 V source in series where a current is sensed that has no branch of its own."""
        wanted = card.sensed(elements)
        result: list[Element] = []
        for element in elements:
            if element.name.lower() in wanted and card.needs_meter(element):
                inner = (element.name + card.METER).lower()
                meter = Element(
                    name=element.name + card.METER,
                    letter="V",
                    nodes=(element.nodes[0], inner),
                    value=0.0,
                    span=element.span,
                )
                result += [meter, replace(element, nodes=(inner, *element.nodes[1:]))]
            else:
                result.append(element)
        return tuple(result)

    def _entry(self, element: Element) -> _Entry:
        value, wave = element.value, element.wave
        if wave is not None and self._forever:
            left, change = settled(wave)
            if change:
                self._notices.append(f"{element.name}: {change}")
            if isinstance(left, float):
                value, wave = left, None
            else:
                wave = left
        return _Entry(element, value, wave)

    def _card(self, entry: _Entry) -> str:
        element = entry.element
        text = card.card(element, self.names, value=entry.value, wave=entry.wave)
        if element.name.lower() not in self._stiff:
            return text
        words = text.split(" ")
        words[2] = f"{words[2]}x{words[0]}"
        return " ".join(words)

    def _closing(self) -> list[str]:
        """Return series resistors, ties, models and the user's options as cards."""
        lines = []
        for key in sorted(self._stiff):
            entry = self._entries[key]
            ohm = self._series_ohm(entry.value or 0.0)
            node, device = self.names.node(entry.element.nodes[1]), self.names.device(key)
            lines.append(f"rx{device} {node}x{device} {node} {card.number(ohm)}")
            self._notices.append(
                f"{entry.element.name}: no resistance in its loop; {ohm:.3g} ohm in series assumed"
            )
        for node in self._floating:
            lines.append(f"rx{self.names.node(node)} {self.names.node(node)} 0 {TIE_OHM!r}")
        if self._floating:
            self._notices.append(
                f"no path for direct current, tied to ground by {TIE_OHM:.0e} ohm: "
                + ", ".join(self._floating)
            )
        used = {entry.element.model.lower() for entry in self._entries.values()}
        for key, model in self.twin.models.items():
            if key.lower() in used:
                lines.append(card.model_card(model, self.names.models[key.lower()]))
        lines.append(f".temp {card.number(self.twin.temperature_degC)}")
        lines += [
            f".options {name}={card.number(value)}"
            for name, value in self.twin.options.items()
            if name.lower() in PHYSICAL
        ]
        return lines

    def _series_ohm(self, henry: float) -> float:
        if not self.twin.period_s:
            return LEAST_SERIES_OHM
        reactance = 2.0 * math.pi * abs(henry) / self.twin.period_s
        return max(SERIES_SHARE * reactance, LEAST_SERIES_OHM)

    def _state(self, entry: _Entry) -> State | None:
        element = entry.element
        if element.letter not in "CL" or (element.law is not None and entry.value is None):
            return None
        device = self.names.device(element.name)
        size, start = abs(entry.value or 0.0), element.parameters.get("ic")
        if element.letter == "L":
            return State(element.name, device, "L", f"{device}#branch", "", size, start)
        plus, minus = (self.names.node(node) for node in element.nodes[:2])
        return State(element.name, device, "C", plus, minus, size, start)

    def _probes(self, keep: frozenset[str]) -> tuple[Probe, ...]:
        rows = [
            Probe(f"v({node})", deck)
            for node, deck in self.names.nodes.items()
            if deck != "0" and not node.endswith(card.METER) and not node.startswith(NODE)
        ]
        wanted = {name.lower() for name in self.twin.currents}
        for key, entry in self._entries.items():
            letter = entry.element.letter
            device = self.names.device(key)
            if letter in _BRANCHED and entry.element.law is None:
                rows.append(Probe(f"i({key})", f"{device}#branch"))
            elif key in wanted and letter in _CURRENT_OF and entry.element.law is None:
                rows.append(Probe(f"i({key})", f"@{device}[{_CURRENT_OF[letter]}]"))
        return tuple(row for row in rows if not keep or row.name in keep)

    def _junctions(self) -> list[tuple[str, str]]:
        """Return the pins of devices that store charge of their own."""
        pairs = []
        for entry in self._entries.values():
            element = entry.element
            if element.letter in "DQJMZ" and _stores(self.twin, element.model):
                nodes = [self.names.node(node) for node in element.nodes]
                pairs += [(nodes[0], node) for node in nodes[1:]]
        return pairs

    def _hysteresis(self) -> Iterator[Hysteresis]:
        for entry in self._entries.values():
            element = entry.element
            if element.letter not in "SW":
                continue
            model = _model(self.twin, element.model)
            kind = "v" if element.letter == "S" else "i"
            middle, half = (
                float(model.parameters.get(f"{kind}{end}", 0.0)) if model else 0.0 for end in "th"
            )
            if half == 0.0:
                continue
            if element.letter == "S":
                control = tuple("" if n == "0" else f"v({n.lower()})" for n in element.nodes[2:4])
            else:
                control = (f"i({element.controls[0].lower()})", "")
            low, high = middle - abs(half), middle + abs(half)
            yield Hysteresis(element.name, (control[0], control[1]), low, high)

    def _plain(self, entries: Iterable[_Entry]) -> str:
        """Return why a period cannot be started from a state, or where sources disagree."""
        period_s = self.twin.period_s
        for entry in entries:
            element, law = entry.element, entry.element.law
            if element.letter == "T":
                return f"{element.name} is a transmission line"
            if element.letter in "CL" and law is not None and entry.value is None:
                return f"{element.name} is a behavioural {element.letter}"
            if law is not None and reads_time(law.expression):
                return f"{element.name} depends on time"
            if entry.wave is not None and period_s and not repeats(entry.wave, period_s):
                return f"{element.name} does not repeat with the common period"
        return ""


def _saves(probes: tuple[Probe, ...], *, everything: bool) -> list[str]:
    """Return the `.save` cards, a few vectors each; without "all" only what is named is kept."""
    names = [p.vector for p in probes if not everything or p.vector.startswith("@")]
    if everything:
        names.insert(0, "all")
    return [".save " + " ".join(names[at : at + 20]) for at in range(0, len(names), 20)]


def _changed(entry: _Entry, value: float) -> _Entry:
    if entry.element.letter not in "VI":
        return replace(entry, value=value)
    if entry.wave is not None:
        return replace(entry, wave=scaled(entry.wave, value))
    return replace(entry, value=(entry.value or 0.0) * value)


_CHARGES = frozenset(
    {"cjo", "cj0", "cj", "tt", "cje", "cjc", "tf", "tr", "cgs", "cgd", "cbd", "cbs"}
)
_CHARGES |= {"cgso", "cgdo", "cgbo", "tox", "cgdmax", "cgdmin", "cjs"}


def _stores(twin: Twin, model: str) -> bool:
    found = _model(twin, model)
    return found is not None and any(found.parameters.get(key) for key in _CHARGES)


def _model(twin: Twin, name: str) -> Model | None:
    return next((m for key, m in twin.models.items() if key.lower() == name.lower()), None)


def _is_nothing(element: Element) -> bool:
    """Whether an element is a placeholder without value: it is left out like an open part."""
    if element.law is not None or element.model or element.letter not in "RCL":
        return False
    return element.value is None or (element.letter == "C" and element.value == 0.0)


def _without(elements: tuple[Element, ...], removed: frozenset[str]) -> tuple[Element, ...]:
    """Leave out elements, and what couples inductors or senses sources that are gone."""
    kept = tuple(element for element in elements if element.name.lower() not in removed)
    present = {element.name.lower() for element in kept}
    return tuple(e for e in kept if all(name.lower() in present for name in e.controls))
