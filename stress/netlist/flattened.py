"""Texts that `stress.netlist.write` made: names behind their letter, tags in comments."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from stress.netlist.flat import Element, Tags
from stress.netlist.scope import Scope
from stress.text.number import plain_number

MARK = "* flat netlist: every name stands behind its letter and a dot"
TAGS = "* tags "
_KEYS = {"v": "rated_V", "irms": "ripple_A", "rser": "esr_ohm"}


def is_flattened(lines: list[str]) -> bool:
    """Whether the lines bear the mark."""
    return len(lines) > 1 and lines[1] == MARK


class FlatScope(Scope):
    """The one scope of such a text: its names are whole already."""

    def element(self, name: str) -> str:
        """Return a name without its letter."""
        return name[2:] if name[1:2] == "." else name


def tagged(elements: Iterable[Element], lines: list[str]) -> tuple[Element, ...]:
    """Return the elements with the tags that stand in comments, and the instance they are in."""
    tags: dict[str, Tags] = {}
    for line in lines:
        if line.startswith(TAGS):
            name, *words = line[len(TAGS) :].split()
            tags[name[2:].lower()] = _tags(words)
    return tuple(
        replace(
            element,
            tags=tags.get(element.name.lower(), element.tags),
            inside=element.name.rpartition(".")[0],
        )
        for element in elements
    )


def _tags(words: list[str]) -> Tags:
    found: dict[str, float | None] = {}
    style = None
    for word in words:
        key, _, value = word.partition("=")
        if key == "type":
            style = value
        elif key in _KEYS:
            found[_KEYS[key]] = plain_number(value)
    return Tags(
        rated_V=found.get("rated_V"),
        ripple_A=found.get("ripple_A"),
        style=style,
        esr_ohm=found.get("esr_ohm"),
    )
