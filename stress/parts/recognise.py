"""Tells from the name of a subcircuit which type it may be."""

from __future__ import annotations

import re
from collections.abc import Iterator

_PREFIX = re.compile(
    r"\A(?:X|T|V|TUBE|VALVE|TRIODE|PENTODE|RECT|DIODE|NH|KOREN|AYUMI)+(?=[0-9A-Z])"
)


def plain(name: str) -> str:
    """Return the letters and digits of a designation, upper case."""
    return re.sub(r"[^0-9A-Z]", "", name.upper())


def candidates(name: str) -> Iterator[str]:
    """Yield plain designations that the name of a subcircuit may mean, likeliest first."""
    whole = plain(name)
    yield whole
    parts = [plain(part) for part in re.split(r"[^0-9A-Za-z]+", name) if part]
    yield from parts
    for text in (whole, *parts):
        bare = _PREFIX.sub("", text)
        if bare != text:
            yield bare
    for text in (whole, *parts):
        for length in range(len(text) - 1, 2, -1):
            yield text[:length]
