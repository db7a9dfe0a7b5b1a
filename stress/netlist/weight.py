"""About how many elements a subcircuit expands to, told without expanding it."""

from __future__ import annotations

from dataclasses import dataclass, field

from stress.netlist.scan import Definition, scan
from stress.netlist.scope import Block

DEEPEST = 40
LARGEST = 10**9


@dataclass(slots=True)
class Weights:
    """Counts the cards of definitions, each once, so that bombs are refused before they go off."""

    _known: dict[int, int] = field(default_factory=dict)

    def of(self, definition: Definition, outer: Block, depth: int = 0) -> int:
        """Return about how many elements a definition stands for, at most `LARGEST`.

        Args:
            definition: What to count.
            outer: The block in whose text it stands.
            depth: How many definitions lead here; one that holds itself counts as nothing.
        """
        key = id(definition)
        if key in self._known:
            return self._known[key]
        self._known[key] = 0
        inner: dict[str, Definition] = {}
        weight = 0
        calls: list[str] = []
        for entry in scan(definition.body).entries:
            line = entry.source.lines[entry.index].lstrip()
            if entry.definition is not None:
                words = line.split(None, 2)
                inner[words[1].lower() if len(words) > 1 else ""] = entry.definition
            elif not entry.word and line[:1] in ("x", "X"):
                calls.append(line.partition("=")[0])
            elif not entry.word:
                weight += 1
        holders = (inner, *(block.subcircuits for block in outer.outward()))
        for call in calls:
            words = [word.lower() for word in reversed(call.split()[1:])]
            named = next((held[word] for word in words for held in holders if word in held), None)
            if named is not None and depth < DEEPEST:
                weight += self.of(named, outer, depth + 1)
        self._known[key] = min(weight, LARGEST)
        return self._known[key]
