"""Where the elements of the flat circuit are put, and where their models are looked up."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field

from stress.netlist.card import Field
from stress.netlist.flat import NOTHING, Element, Instance, Law, Model, Tags, Wave
from stress.netlist.modelcard import MESHED, read_model
from stress.netlist.part import Part
from stress.netlist.problem import Problems
from stress.netlist.scan import Entry
from stress.netlist.scope import Scope, did_you_mean, place
from stress.netlist.source import Source
from stress.text.span import SourceError, Span

_NAMES = re.compile(r"=\s*[^\W\d]|[{']|ako", re.IGNORECASE)
MOST_ELEMENTS = 50_000
NO_TAGS = Tags()


@dataclass(slots=True)
class Assembly:
    """The flat circuit while it grows.

    Attributes:
        step_s, stop_s: Of the `.tran` card, which waves take as defaults.
        dollar: Whether a dollar sign begins a comment.
    """

    problems: Problems
    elements: list[Element] = field(default_factory=list)
    instances: list[Instance] = field(default_factory=list)
    models: dict[str, Model] = field(default_factory=dict)
    initial_V: dict[str, float] = field(default_factory=dict)
    step_s: float | None = None
    stop_s: float | None = None
    dollar: bool = True
    _seen: dict[str, Span] = field(default_factory=dict)
    _made: dict[tuple[Entry, Scope | None], str] = field(default_factory=dict)
    _hidden: dict[Source, dict[str, Entry]] = field(default_factory=dict)
    _same: dict[tuple[object, ...], str] = field(default_factory=dict)

    def add(
        self,
        part: Part,
        letter: str,
        nodes: tuple[str, ...],
        value: float | None = None,
        *,
        suffix: str = "",
        model: str = "",
        parameters: Mapping[str, float] = NOTHING,
        controls: tuple[str, ...] = (),
        wave: Wave | None = None,
        law: Law | None = None,
        tags: Tags = NO_TAGS,
    ) -> None:
        """Put an element; `suffix` marks one that a card needs besides its own ("#rser").

        Raises:
            SourceError: The name is taken.
        """
        name = part.full + suffix
        span = part.span()
        first = self._seen.setdefault(name.lower(), span)
        if first is not span:
            raise part.error(
                f'"{part.name}" is defined twice, first at {place(first)}',
                part.head,
                "names are told apart without regard to upper and lower case",
            )
        if len(self.elements) >= MOST_ELEMENTS:
            self.problems.stop(
                f"more than {MOST_ELEMENTS:,} elements after expansion",
                span,
                "a review is for one piece of equipment; take out the parts that do not matter",
            )
        self.elements.append(
            Element(
                name=name,
                letter=letter,
                nodes=nodes,
                value=value,
                model=model,
                parameters=parameters,
                controls=controls,
                wave=wave,
                law=law,
                tags=tags,
                inside=part.scope.name,
                span=span,
            )
        )

    def holds(self, name: str) -> bool:
        """Whether an element of that name is there."""
        return name.lower() in self._seen

    def knows_model(self, scope: Scope, name: str) -> bool:
        """Whether a model of that name can be used here."""
        return self._find(scope, name.lower()) is not None

    def model(self, part: Part, word: Field, kinds: tuple[str, ...]) -> str:
        """Return the key of the model that a word names; "" and an obstacle where it is missing.

        Args:
            part, word: The card, and where it names the model.
            kinds: The kinds of model that fit the card.

        Raises:
            SourceError: The model is of another kind, or its card is wrong.
        """
        name = word.text.lower()
        found = self._find(part.scope, name) or self._elsewhere(part, word)
        if found is None:
            known = {known for block in part.scope.block.outward() for known in block.models}
            mend = did_you_mean(name, known) or (
                f"add a .model {word.text} {kinds[0].upper()}(…) or include the file that has it"
            )
            raise part.obstacle(f'the model "{word.text}" is missing', word, mend)
        first = f"{name}.1"
        if found[1].name_of() == first:
            key = self._binned(part, name, found[0]) or self._key(first, *found)
        else:
            key = self._key(name, *found)
        if not key:
            return ""
        kind = self.models[key].kind
        if kind not in kinds:
            raise part.error(
                f'the model "{word.text}" is of kind {kind.upper()}, {part.name} needs '
                f"{' or '.join(kind.upper() for kind in kinds if kind not in MESHED)}",
                word,
            )
        return key

    def _find(self, scope: Scope, name: str) -> tuple[Scope, Entry] | None:
        """Look along the text, then along the calls."""
        holder: Scope | None = scope
        while holder is not None:
            for block in holder.block.outward():
                entry = block.models.get(name) or block.models.get(f"{name}.1")
                if entry is not None:
                    owner = holder
                    while owner.block is not block and owner.caller is not None:
                        owner = owner.caller
                    return owner, entry
            holder = holder.caller
        return None

    def _binned(self, part: Part, name: str, scope: Scope) -> str:
        """Return the model of a family ("nch.1", "nch.2" …) that is for this length and width."""
        sizes = {side: part.number(part.given[side]) for side in ("l", "w") if side in part.given}
        for block in scope.block.outward():
            for key, entry in block.models.items():
                if key.rpartition(".")[0] != name:
                    continue
                made = self._key(key, scope, entry)
                held = self.models[made].parameters if made else {}
                limits = [
                    (held.get(f"{side}min", 0.0), size, held.get(f"{side}max", 1e9))
                    for side, size in sizes.items()
                ]
                if made and all(
                    isinstance(low, float) and isinstance(high, float) and low <= size <= high
                    for low, size, high in limits
                ):
                    return made
        return ""

    def _elsewhere(self, part: Part, word: Field) -> tuple[Scope, Entry] | None:
        """Look into the other subcircuits of the same files: old libraries share models so."""
        scope, name = part.scope, word.text.lower()
        sources = [block.source for block in scope.block.outward()]
        sources += [
            definition.source
            for block in scope.block.outward()
            for definition in block.subcircuits.values()
        ]
        for source in dict.fromkeys(sources):
            held = self._hidden.get(source)
            if held is None:
                held = self._hidden[source] = _models_in(source)
            if name in held:
                while scope.caller is not None:
                    scope = scope.caller
                part.notice(
                    "model-elsewhere",
                    f'the model "{word.text}" stands inside another subcircuit and is used here',
                    word,
                )
                return scope, held[name]
        return None

    def _key(self, name: str, scope: Scope, entry: Entry) -> str:
        """Return the key of a model, reading its card at the first use."""
        card = entry.card(dollar=self.dollar)
        # Without a name in it, a model is the same in every instance of its subcircuit.
        place_of = (entry, scope if _NAMES.search(card.text) else None)
        held = self._made.get(place_of)
        if held is not None:
            return held
        self._made[place_of] = ""  # so that an AKO cycle ends, and an error is told once
        try:
            model = read_model(card, scope, self.problems, self._base)
        except SourceError as error:
            self.problems.error(error)
            return ""
        same = (entry, model.kind, tuple(sorted(model.parameters.items(), key=str)))
        key = self._same.get(same)
        if key is None:
            key, number = name, 2
            while key in self.models:
                key, number = f"{name}#{number}", number + 1
            self._same[same] = key
            self.models[key] = Model(
                name=key, kind=model.kind, parameters=model.parameters, span=model.span
            )
        self._made[place_of] = key
        return key

    def _base(self, scope: Scope, name: str) -> Model | None:
        """Return the model that an AKO model is like."""
        found = self._find(scope, name.lower())
        if found is None:
            return None
        key = self._key(name.lower(), *found)
        return self.models.get(key)


def _models_in(source: Source) -> dict[str, Entry]:
    """Return every model of a file, whatever it stands in; the first of each name."""
    found: dict[str, Entry] = {}
    for index, line in enumerate(source.lines):
        if line.lstrip()[:6].lower() == ".model":
            words = line.split(None, 2)
            if len(words) > 1:
                found.setdefault(words[1].lower(), Entry(source, index, ".model"))
    return found
