"""The review as one self-contained HTML page with a bench card for printing."""

from __future__ import annotations

import base64
import hashlib
from collections import Counter
from dataclasses import dataclass
from pathlib import Path
from urllib.parse import quote

from jinja2 import Environment, FileSystemLoader, StrictUndefined
from markupsafe import Markup

from stress.circuit.circuit import Kind
from stress.finding import Severity
from stress.report import borne, tables, words
from stress.report.card import Card, Fact, capacitance, cards
from stress.report.change import fitted_table, order_changes, step_changes
from stress.report.circuit_map import circuit_map
from stress.report.discharge_page import after_view
from stress.report.leak_curve import VERDICTS
from stress.report.order import Step, order_of_work
from stress.report.power_page import plan_view
from stress.report.shopping import shopping_list
from stress.report.table import PAGE, Table
from stress.report.words import amount
from stress.study.conditions import INRUSH
from stress.study.result import Review
from stress.text.figure import figure

_TEMPLATES = Path(__file__).parent / "templates"
_GROUPS = (
    (Severity.REPLACE, "Replace before any power"),
    (Severity.TEST, "Test before power"),
    (Severity.WATCH, "Watch"),
    (Severity.NOTE, "Notes"),
)


_HEATED = {Kind.TUBE.value, Kind.RECTIFIER.value}


@dataclass(frozen=True, slots=True, kw_only=True)
class Group:
    """The steps of one severity."""

    severity: Severity
    heading: str
    steps: tuple[Step, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class BenchRow:
    """One line of the printed bench card."""

    rank: str
    name: str
    marked: str
    do: str
    fit: str
    leakage: str
    esr: str
    capacitance: str
    lift: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Fitted:
    """What the chosen parts change: by position, in the order of work, among the findings."""

    table: Table
    orders: tuple[tuple[str, str], ...]
    changes: tuple[tuple[str, tuple[Step, ...]], ...]


def write_page(review: Review, path: Path, *, fitted: Review | None = None) -> None:
    """Write the page of a review to a file, UTF-8.

    Args:
        review: The equipment as it is.
        path: The file.
        fitted: The same with the chosen parts in place, where that was asked for.

    Raises:
        OSError: Where the file cannot be written.
    """
    path.write_text(page(review, fitted=fitted), encoding="utf-8")


def page(review: Review, *, fitted: Review | None = None) -> str:
    """Return the page of a review: nothing in it is fetched from anywhere."""
    environment = Environment(
        loader=FileSystemLoader(_TEMPLATES),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.policies["json.dumps_kwargs"] = {"ensure_ascii": False, "separators": (",", ":")}
    environment.filters |= {"fragment": _fragment, "tidy": words.tidy}
    script = (_TEMPLATES / "page.js").read_text(encoding="utf-8")
    shown = cards(review)
    drawn = circuit_map(review)
    return environment.get_template("page.html").render(
        review=review,
        circuit=review.circuit,
        groups=_groups(review),
        glance=_glance(review),
        cards=shown,
        positions_named={each.name for each in review.circuit.positions},
        map=drawn,
        positions=tables.positions(review).place(PAGE),
        parts=tables.parts(review).place(PAGE),
        shopping=shopping_list(review).place(PAGE),
        fitted=_fitted(review, fitted) if fitted is not None else None,
        proofs=tables.proofs(review).place(PAGE),
        conditions=_conditions(review),
        severities=words.SEVERITIES,
        plan=plan_view(review.power_up) if review.power_up else None,
        after=after_view(review.discharge) if review.discharge else None,
        bench=_bench_card(review, shown),
        data={
            "verdicts": VERDICTS,
            "said": drawn.said if drawn else {},
            "curves": {c.position.name: c.what_if.data for c in shown if c.what_if is not None},
        },
        script=Markup(script),
        script_hash=_integrity(script),
        style=Markup((_TEMPLATES / "page.css").read_text(encoding="utf-8")),
    )


def _fitted(before: Review, after: Review) -> Fitted:
    return Fitted(
        table=fitted_table(before, after).place(PAGE),
        orders=tuple(order_changes(before.risks, after.risks)),
        changes=tuple(step_changes(before, after)),
    )


def _fragment(name: str) -> str:
    """Return the deep link to a position."""
    return "#" + quote(name)


def _integrity(script: str) -> str:
    """Return what the page's policy allows: this script and no other."""
    digest = hashlib.sha256(script.encode("utf-8")).digest()
    return "sha256-" + base64.b64encode(digest).decode("ascii")


def _groups(review: Review) -> tuple[Group, ...]:
    steps = order_of_work(review)
    groups = (
        Group(
            severity=severity,
            heading=heading,
            steps=tuple(each for each in steps if each.severity is severity),
        )
        for severity, heading in _GROUPS
    )
    urgent = (Severity.REPLACE, Severity.TEST)  # "nothing" is an answer there
    return tuple(group for group in groups if group.steps or group.severity in urgent)


def _glance(review: Review) -> tuple[Fact, ...]:
    circuit = review.circuit
    counts = Counter(risk.severity for risk in review.risks)
    line = circuit.line
    fed = "no alternating line"
    if line.sources:
        fed = f"{figure(line.nominal_V, 'V')} nominal, {figure(line.high_V, 'V')} high"
    kinds = Counter(part.kind.value for part in circuit.parts)
    todo = ", ".join(f"{counts[severity]} {words.SEVERITIES[severity]}" for severity, _ in _GROUPS)
    others = ", ".join(f"{n} {kind}{'s' if n > 1 else ''}" for kind, n in kinds.items())
    heated = [Fact(name="heaters", text=circuit.heaters)] if _HEATED & set(kinds) else []
    return (
        Fact(name="positions", text=f"{len(circuit.positions)}: {todo}"),
        Fact(name="line", text=fed),
        *heated,
        Fact(name="other parts", text=others or "none"),
        Fact(name="around the chassis", text=figure(circuit.ambient_degC, "degC")),
        Fact(name="netlist", text=circuit.netlist.path),
        Fact(name="part sheet", text=circuit.sheet.path or "none: styles and ratings are assumed"),
        Fact(name="ratings chosen by", text=review.policy or words.NOT_KNOWN),
        Fact(name="simulated", text=(
            f"{review.run.cases} cases, {review.run.unsolved or 'none'} unsolved, "
            f"{review.run.cycles} periods in {figure(review.run.wall_s, 's')}; "
            f"ngspice {review.versions.ngspice}, PySpice {review.versions.pyspice}")),
    )  # fmt: skip


def _conditions(review: Review) -> tuple[Fact, ...]:
    answered = {name for held in review.working.positions.values() for name in held} | {INRUSH}
    facts = []
    for each in borne.conditions(review):
        line = "" if each.line_V is None else f"line {figure(each.line_V, 'V')}"
        missing = "" if each.name in answered else words.missing_in(review, each.name)
        text = "; ".join(part for part in (line, each.text, missing) if part)
        facts.append(Fact(name=each.name, text=text or "as drawn"))
    facts += [Fact(name="two faults at once", text=text) for text in review.pair_texts]
    offered = borne.on_offer(review)
    if offered:
        facts.append(Fact(name="on offer with --condition", text="; ".join(offered)))
    facts += [
        Fact(name=each.case, text=f"{each.kind}; {each.text}") for each in review.working.unanswered
    ]
    return tuple(facts)


def _bench_card(review: Review, shown: tuple[Card, ...]) -> tuple[BenchRow, ...]:
    rows = []
    for card in shown:
        name = card.position.name
        bench = review.bench.get(name)
        fit = review.replacements.get(name)
        leakage = esr = "no limit known"
        if bench and bench.leakage_max_A is not None and bench.test_V is not None:
            leakage = f"{figure(bench.leakage_max_A, 'A')} at {figure(bench.test_V, 'V')}"
        if bench and bench.esr_max_ohm is not None:
            at = "" if bench.esr_Hz is None else f" at {figure(bench.esr_Hz, 'Hz')}"
            esr = amount(bench.esr_max_ohm, "ohm") + at
        rows.append(
            BenchRow(
                rank=str(card.risk.rank) if card.risk else "none",
                name=name,
                marked=card.marked,
                do=words.SEVERITIES[card.risk.severity] if card.risk else "nothing known",
                fit=words.fit(fit) if fit else words.NOT_STUDIED,
                leakage=leakage,
                esr=esr,
                capacitance=capacitance(bench) if bench else words.NOT_KNOWN,
                lift=f"; {bench.in_leakage}" if bench and bench.in_leakage else "",
            )
        )
    return tuple(rows)
