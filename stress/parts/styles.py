"""The capacitor styles of `styles.toml`, and which one is assumed where nobody tells."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from difflib import get_close_matches
from functools import cache
from importlib.resources import files
from math import inf

from stress.parts.citation import Citation, cited
from stress.parts.style import Style
from stress.parts.style_keys import assumption_keys, style_keys
from stress.parts.toml_record import Tables, nested, several
from stress.parts.toml_source import parse
from stress.text.unit import unit

FILE = "styles.toml"


@dataclass(frozen=True, slots=True, kw_only=True)
class Assumption:
    """A row of the table of assumed styles; every condition that is stated must hold."""

    style: str
    text: str
    source: Citation
    roles: tuple[str, ...] = ()
    polar: bool | None = None
    least_F: float = field(default=0.0, metadata=unit("F"))
    below_F: float = field(default=inf, metadata=unit("F"))
    rated_below_V: float | None = field(default=None, metadata=unit("V"))

    def fits(
        self, value_F: float, *, role: str, polar_hint: bool | None, rated_V: float | None
    ) -> bool:
        """Return whether every condition of the row holds."""
        return (
            self.least_F <= value_F * (1 + 1e-9)
            and value_F < self.below_F
            and (not self.roles or role in self.roles)
            and (self.polar is None or polar_hint is self.polar)
            and (self.rated_below_V is None or (rated_V or inf) < self.rated_below_V)
        )


@dataclass(frozen=True, slots=True)
class _Table:
    styles: Mapping[str, Style]
    assumptions: tuple[Assumption, ...]


def styles() -> Mapping[str, Style]:
    """Return every style by name."""
    return _table().styles


def find(name: str) -> Style | None:
    """Return the style of a name or alias, in any case and with spaces for hyphens."""
    wanted = name.strip().lower().replace(" ", "-").replace("_", "-")
    return _names().get(wanted)


def near(name: str) -> str:
    """Return what a name that is no style may have meant, or what would be accepted."""
    close = get_close_matches(name.strip().lower(), _names(), n=1, cutoff=0.6)
    if close:
        return f'did you mean "{_names()[close[0]].name}"?'
    return f"accepted: {', '.join(styles())}"


def assumed(
    value_F: float, *, role: str, polar_hint: bool | None, rated_V: float | None
) -> tuple[Style, str]:
    """Return the style assumed for a part of unknown style, and why.

    Args:
        value_F: Capacitance.
        role: What it does, by the words of `stress.circuit.circuit.Role`.
        polar_hint: Whether its symbol or place is polarised; None where that is open.
        rated_V: Marked rating.
    """
    for row in _table().assumptions:
        if row.fits(value_F, role=role, polar_hint=polar_hint, rated_V=rated_V):
            return styles()[row.style], f"assumed: {row.style}, {row.text}"
    raise AssertionError("the last row of the table fits everything")


@cache
def _names() -> Mapping[str, Style]:
    names = {name.lower(): style for name, style in styles().items()}
    for style in styles().values():
        names |= dict.fromkeys(style.aliases, style)
    return names


@cache
def _table() -> _Table:
    source = files("stress.parts").joinpath(FILE)
    return read(source.read_text(encoding="utf-8"), file=FILE)


def read(content: str, *, file: str) -> _Table:
    """Return the table in the text of `styles.toml`.

    Raises:
        SourceErrors: A number lacks its unit or source, or a key is unknown.
    """
    tables = Tables(parse(content, file=file))
    values = tables.document.values
    cite = cited(tables, values.get("sources", {}))
    keys = style_keys(cite)
    found = {}
    for name, table in tables.table(("styles",), values.get("styles")).items():
        style = tables.record(Style, keys, ("styles", name), table, name=name)
        if style is not None:
            found[name] = style
    assumptions = several(nested(Assumption, assumption_keys(cite)))
    rows = assumptions(tables, ("assumed",), values.get("assumed", []))
    tables.raise_errors()
    return _Table(found, rows)
