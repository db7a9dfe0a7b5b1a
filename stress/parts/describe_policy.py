"""A derating policy number by number, each with its line of the document, for people."""

from __future__ import annotations

from collections.abc import Iterator
from math import inf

from stress.parts import styles
from stress.parts.citation import Citation
from stress.parts.policy import Clause, Policy, Rule
from stress.text.figure import figure


def description(policy: Policy) -> str:
    """Return every number of a policy, a line each, then the sources by number."""
    lines = [f"{policy.name}: {policy.document}"]
    sources: dict[Citation, int] = {}
    for name, rule in policy.rules.items():
        for said, clause, source in _rules(rule):
            number = sources.setdefault(source, len(sources) + 1)
            line = f" ({clause})" if clause else ""
            lines.append(f"  {name:<18} {said}{line}  [{number}]")
    silent = [name for name in styles.styles() if name not in policy.rules]
    if silent:
        lines.append(f"  not covered: {', '.join(silent)}")
    lines += [f"  [{number}] {source}" for source, number in sources.items()]
    return "\n".join(lines)


def _rules(rule: Rule) -> Iterator[tuple[str, str, Citation]]:
    """Yield what a rule says, by which line, and its source."""
    for clause in rule.voltage:
        yield f"voltage {_share(clause)}", clause.clause, clause.source
    for what, one in (("surge", rule.surge), ("ripple", rule.ripple), ("reverse", rule.reverse)):
        if one is not None:
            yield f"{what} {_share(one)}", one.clause, one.source
    if rule.temperature is not None:
        heat = rule.temperature
        most = f"at most {figure(heat.most_degC, 'degC')}" if heat.most_degC < inf else ""
        below = f"{heat.below_highest_K:g} K below its highest" if heat.below_highest_K else ""
        said = ", ".join(one for one in (most, below) if one) or "up to its highest"
        yield f"temperature {said}", heat.clause, heat.source
    if rule.low is not None:
        low = rule.low
        said = f"at least {figure(low.least_V, 'V')} below {figure(low.below_V, 'V')}"
        yield said, low.clause, low.source


def _share(clause: Clause) -> str:
    rated = f", ratings to {figure(clause.up_to_V, 'V')}" if clause.up_to_V < inf else ""
    warm = f", to {figure(clause.up_to_degC, 'degC')}" if clause.up_to_degC < inf else ""
    return f"{100 * clause.share:g} %{rated}{warm}"
