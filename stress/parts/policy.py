"""Derating policies: how much of its rating a new part may bear, by style, clause by clause.

Policies are data (`policies/*.toml`), each number with its source and how sure it is. A user's
own file has the same form. Shares count the direct voltage plus the peak of the ac on it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cache
from importlib.resources import files
from math import inf
from pathlib import Path as File
from typing import Any

from stress.parts import styles
from stress.parts.citation import Citation, cited
from stress.parts.style import Style
from stress.parts.toml_record import Keys, Read, Tables, amount, nested, several, text
from stress.parts.toml_source import Path, decode, parse, whole
from stress.text.span import SourceError, SourceErrors
from stress.text.unit import unit

DEFAULT = "common-practice"


@dataclass(frozen=True, slots=True, kw_only=True)
class Clause:
    """One share of a rating that a document allows, and where it says so.

    Attributes:
        share: Of the rating; of the surge rating for brief stress.
        up_to_V: Ratings it holds for, and `up_to_degC` temperatures.
        clause: The line of the document, in its own terms.
    """

    share: float = field(metadata=unit("1"))
    up_to_V: float = field(default=inf, metadata=unit("V"))
    up_to_degC: float = field(default=inf, metadata=unit("degC"))
    clause: str = ""
    source: Citation

    def __str__(self) -> str:
        line = f": {self.clause}" if self.clause else ""
        return f"{100 * self.share:g} %, {self.source}{line}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Heat:
    """How hot the part may be: a temperature, or so much below the highest of its style."""

    most_degC: float = field(default=inf, metadata=unit("degC"))
    below_highest_K: float = field(default=0.0, metadata=unit("K"))
    clause: str = ""
    source: Citation

    def limit_degC(self, style: Style) -> float:
        """Return the highest temperature for a style."""
        return min(self.most_degC, style.highest_degC.value - self.below_highest_K)


@dataclass(frozen=True, slots=True, kw_only=True)
class Low:
    """The smallest rating for parts at a low voltage."""

    below_V: float = field(metadata=unit("V"))
    least_V: float = field(metadata=unit("V"))
    clause: str = ""
    source: Citation


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """What a policy says of one style; None where it is silent."""

    voltage: tuple[Clause, ...]
    surge: Clause | None = None
    ripple: Clause | None = None
    reverse: Clause | None = None
    temperature: Heat | None = None
    low: Low | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice:
    """The rating that a policy asks for.

    Attributes:
        rated_V: The smallest one on sale that will do, or None where none does.
        needed_V: What the clause asks for, before any step on sale.
        reason: The share, the document and its line.
    """

    rated_V: float | None = field(metadata=unit("V"))
    needed_V: float = field(metadata=unit("V"))
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Policy:
    """A derating policy.

    Attributes:
        name, document: Short name, and the document as it calls itself.
        rules: By style; a style that is missing is not covered.
    """

    name: str
    document: str
    rules: Mapping[str, Rule]

    def rule(self, style: Style) -> Rule | None:
        """Return what it says of a style, or None when it does not cover it."""
        return self.rules.get(style.name)

    def clause(self, style: Style, *, rated_V: float, temperature_degC: float) -> Clause | None:
        """Return the clause on the lasting voltage of a part; None where it has none."""
        rule = self.rule(style)
        if rule is None:
            return None
        for clause in rule.voltage:
            if rated_V <= clause.up_to_V and temperature_degC <= clause.up_to_degC:
                return clause
        return None

    def choose(self, style: Style, volts: float, *, temperature_degC: float) -> Choice | None:
        """Return the rating to buy for a lasting voltage.

        Args:
            style: Of the part to buy.
            volts: Direct voltage plus the peak on it.
            temperature_degC: Around the part.

        Returns:
            None when the policy does not cover the style, or not at this temperature.
        """
        rule = self.rule(style)
        last = self.clause(style, rated_V=inf, temperature_degC=temperature_degC)
        if rule is None or last is None:
            return None
        low = rule.low if rule.low is not None and volts < rule.low.below_V else None
        for rated_V in style.steps.rated_V:
            clause = self.clause(style, rated_V=rated_V, temperature_degC=temperature_degC)
            if clause is None or volts > clause.share * rated_V * (1 + 1e-9):
                continue
            if low is None:
                return Choice(rated_V=rated_V, needed_V=volts / clause.share, reason=str(clause))
            if rated_V >= low.least_V:
                reason = f"{low.source}: {low.clause}" if low.clause else str(low.source)
                return Choice(rated_V=rated_V, needed_V=low.least_V, reason=reason)
        return Choice(rated_V=None, needed_V=volts / last.share, reason=str(last))


@cache
def policies() -> Mapping[str, Policy]:
    """Return the built-in policies by name, the default first."""
    found = [
        read_text(entry.read_text(encoding="utf-8"), file=entry.name)
        for entry in sorted(files("stress.parts").joinpath("policies").iterdir(), key=str)
        if entry.name.endswith(".toml")
    ]
    found.sort(key=lambda policy: policy.name != DEFAULT)
    return {policy.name: policy for policy in found}


def find(name: str) -> Policy | None:
    """Return a built-in policy by its name, in any case and with spaces for hyphens."""
    wanted = name.strip().lower().replace(" ", "-")
    for policy in policies().values():
        if policy.name.lower().replace(" ", "-") == wanted:
            return policy
    return None


def load(path: File) -> Policy:
    """Return the policy in a user's file.

    Raises:
        SourceErrors: The file cannot be read, or a number of it lacks its unit or source.
    """
    try:
        data = path.read_bytes()
    except OSError as error:
        reason = f"the policy cannot be read: {error.strerror or error}"
        raise SourceErrors([SourceError(reason, whole(str(path)))]) from None
    return read_text(decode(data, file=str(path)), file=str(path))


def read_text(content: str, *, file: str) -> Policy:
    """Return the policy in a text.

    Raises:
        SourceErrors: As `load`.
    """
    tables = Tables(parse(content, file=file))
    values = dict(tables.document.values)
    rules: Keys = {
        "styles": ("rules", _rules(_rule_keys(cited(tables, values.pop("sources", {})))))
    }
    header: Keys = {"name": ("name", text), "document": ("document", text)}
    policy = tables.record(Policy, {**header, **rules}, (), values)
    tables.raise_errors()
    assert policy is not None, "without an error there is a policy"
    return policy


def _rules(keys: Keys) -> Read:
    """Read the tables of the styles, by any of their names."""

    def read(tables: Tables, path: Path, value: Any) -> Any:
        found = {}
        for name, table in tables.table(path, value).items():
            style = styles.find(name)
            rule = tables.record(Rule, keys, (*path, name), table)
            if style is None:
                tables.unknown((*path, name), "capacitor style", tuple(styles.styles()))
            elif style.name in found:
                tables.wrong((*path, name), f"{style.name} has its rules above already")
            elif rule is not None:
                found[style.name] = rule
        return found

    return read


def _rule_keys(cite: Read) -> Keys:
    share = ("share", amount("1", most=1.0, above=False))
    said: Keys = {"source": ("source", cite), "clause": ("clause", text)}
    clause: Keys = {
        **said,
        "share": share,
        "up_to_rated": ("up_to_V", amount("V")),
        "up_to": ("up_to_degC", amount("degC")),
    }
    heat: Keys = {
        **said,
        "most": ("most_degC", amount("degC")),
        "below_highest": ("below_highest_K", amount("K", above=False)),
    }
    low: Keys = {**said, "below": ("below_V", amount("V")), "least": ("least_V", amount("V"))}
    one = nested(Clause, clause)
    above_zero: Keys = {**clause, "share": ("share", amount("1", most=1.0))}
    return {
        "voltage": ("voltage", several(nested(Clause, above_zero), least=1)),
        "surge": ("surge", one),
        "ripple": ("ripple", one),
        "reverse": ("reverse", one),
        "temperature": ("temperature", nested(Heat, heat)),
        "low": ("low", nested(Low, low)),
    }
