"""The tables of a review: one source for the terminal, the page and the CSV files."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator, Mapping
from pathlib import Path

from stress.circuit.circuit import Part, Position
from stress.parts.limit import Limit
from stress.report import borne, words
from stress.report.course import judged_in
from stress.report.shopping import shopping_list
from stress.report.table import (
    BROAD,
    BUT_NARROW,
    FILE,
    NARROW,
    SHOWN,
    WIDE,
    Cell,
    Column,
    Table,
    number,
)
from stress.study.result import Failure, Review, Surge

POSITIONS = (
    Column("rank", "#", number=True),
    Column("position", "part"),
    Column("role", "role", places=frozenset({NARROW})),
    Column("role_text", "role", places=BUT_NARROW),
    Column("fitted", "marked", places=BROAD),
    Column("style", "style", places=frozenset({FILE})),
    Column("value_F", "value", number=True, places=frozenset({FILE})),
    Column("rated_V", "rated", number=True, places=frozenset({NARROW, FILE})),
    Column("bears_V", "bears", number=True),
    Column("worst_V", "worst", number=True),
    Column("worst_condition", "in", places=BUT_NARROW),
    Column("brief_V", "brief", number=True, places=BUT_NARROW),
    Column("ripple_rms_A", "ripple", number=True, places=frozenset({WIDE, FILE})),
    Column("critical_ohm", "damage below", number=True),
    Column("victim", "to", places=BUT_NARROW),
    Column("functional_ohm", "works above", number=True, places=BUT_NARROW),
    Column("fit", "fit", places=SHOWN),
    Column("fit_value_F", "fit value", number=True, places=frozenset({FILE})),
    Column("fit_rated_V", "fit rated", number=True, places=frozenset({FILE})),
    Column("fit_style", "fit style", places=frozenset({FILE})),
    Column("leakage_max_A", "may leak", number=True, places=frozenset({WIDE, FILE})),
    Column("leakage_test_V", "at", number=True, places=frozenset({WIDE, FILE})),
    Column("do", "do", places=frozenset({NARROW})),
    Column("severity", "do", places=BUT_NARROW),
)
PARTS = (
    Column("part", "part"),
    Column("kind", "what"),
    Column("stress", "stress"),
    Column("judged", "bears", number=True),
    Column("condition", "in"),
    Column("limit", "limit", number=True),
    Column("verdict", "verdict"),
    Column("largest", "largest", number=True, places=BUT_NARROW),
    Column("largest_condition", "in", places=BUT_NARROW),
    Column("rating", "rating system", places=BUT_NARROW),
    Column("source", "limit from", places=BUT_NARROW),
)
FAILURES = (
    Column("position", "part", places=frozenset({NARROW, WIDE, FILE})),
    Column("fault", "fault"),
    Column("condition", "in", places=BUT_NARROW),
    Column("dangerous", "dangerous"),
    Column("victims", "past a limit"),
    Column("text", "what happens"),
)
BEARS = (
    Column("condition", "condition"),
    Column("dc_V", "mean", number=True),
    Column("peak_V", "peak", number=True),
    Column("reverse_V", "reverse", number=True),
    Column("ripple_pp_V", "ripple, peak to peak", number=True),
    Column("ripple_rms_A", "ripple current, rms", number=True),
    Column("esr_loss_W", "lost in its ESR", number=True),
    Column("error_V", "settled within", number=True),
)
PROOFS = (
    Column("condition", "condition"),
    Column("method", "method"),
    Column("cycles", "periods", number=True),
    Column("jacobian_cycles", "for the Jacobian", number=True),
    Column("points", "points a period", number=True),
    Column("distance", "distance", number=True),
    Column("residual", "residual", number=True),
    Column("multiplier", "multiplier", number=True),
)
VERDICT = next(i for i, column in enumerate(PARTS) if column.key == "verdict")
WITHIN, NO_LIMIT = "within", "no limit known"
PAST, PAST_ASSUMED = "PAST ITS LIMIT", "past an assumed limit"


def write_csv(review: Review, folder: Path) -> tuple[Path, ...]:
    """Write positions.csv, parts.csv, failures.csv and shopping.csv; return their paths.

    Raises:
        OSError: Where they cannot be written.
    """
    folder.mkdir(parents=True, exist_ok=True)
    paths = []
    for table in (positions(review), parts(review), failures(review), shopping_list(review)):
        shown = table.place(FILE)
        path = folder / f"{table.name}.csv"
        with path.open("w", encoding="utf-8", newline="") as file:
            writer = csv.writer(file)
            writer.writerow([column.key for column in shown.columns])
            writer.writerows([_inert(cell.written) for cell in row] for row in shown.rows)
        paths.append(path)
    return tuple(paths)


def _inert(text: str) -> str:
    """Return text that no spreadsheet takes for a formula."""
    try:
        float(text)
    except ValueError:
        text = words.plain(text)
        return "'" + text if text[:1] in ("=", "+", "-", "@") else text
    return text


def positions(review: Review) -> Table:
    """Return the table of positions, in the order of work, those without a rank last."""
    rank = {risk.position: risk.rank for risk in review.risks}
    ordered = sorted(review.circuit.positions, key=lambda each: rank.get(each.name, len(rank) + 1))
    return Table("positions", POSITIONS, tuple(_position(review, each) for each in ordered))


def _position(review: Review, of: Position) -> tuple[Cell, ...]:
    name = of.name
    worst = review.worst.get(name)
    risk = next((each for each in review.risks if each.position == name), None)
    nominal = review.working.positions.get(name, {}).get("nominal")
    no_nominal = words.missing_in(review, "nominal")
    leakage = review.leakage.get(name)
    governing = leakage.governing if leakage else None
    if leakage is None:
        critical = functional = Cell(words.NOT_STUDIED)
    elif not leakage.limited:
        critical = functional = Cell("not limited")
    elif governing is None:
        critical = functional = Cell(words.UNSOLVED)
    else:
        critical = Cell(words.critical(governing), governing.critical_ohm)
        functional = Cell(words.functional(governing), governing.functional_ohm)
    victim = governing.victim if governing else None
    fit = review.replacements.get(name)
    bench = review.bench.get(name)
    cells = {
        "rank": Cell(str(risk.rank), risk.rank) if risk else Cell("none"),
        "position": Cell(name),
        "role": Cell(of.role.value),
        "role_text": Cell(of.role_text),
        "fitted": Cell(words.marked(of)),
        "style": Cell(of.style.name),
        "value_F": number(of.value_F, "F"),
        "rated_V": number(of.rated_V, "V"),
        "bears_V": number(nominal.dc_V if nominal else None, "V", missing=no_nominal),
        "worst_V": number(worst.worst_V if worst else None, "V", missing="unsolved"),
        "worst_condition": Cell(worst.condition if worst else "none"),
        "brief_V": number(worst.brief_V if worst else None, "V", missing="none"),
        "ripple_rms_A": number(nominal.ripple_rms_A if nominal else None, "A", missing=no_nominal),
        "critical_ohm": critical,
        "victim": Cell(f"{victim.part} {words.quantity(victim.quantity)}" if victim else "nothing"),
        "functional_ohm": functional,
        "fit": Cell(words.fit(fit) if fit else words.NOT_STUDIED),
        "fit_value_F": number(fit.value_F if fit else None, "F"),
        "fit_rated_V": number(fit.rated_V if fit else None, "V"),
        "fit_style": Cell(fit.style if fit else words.NOT_STUDIED),
        "leakage_max_A": number(bench.leakage_max_A if bench else None, "A"),
        "leakage_test_V": number(bench.test_V if bench else None, "V"),
        "do": Cell(risk.severity.value.partition("-")[0] if risk else "nothing"),
        "severity": Cell(words.SEVERITIES[risk.severity] if risk else "nothing"),
    }
    return tuple(cells[column.key] for column in POSITIONS)


def bears(review: Review, of: Position) -> Table:
    """Return what one position bears in each condition."""
    rows = []
    for condition, stress in borne.position(review, of):
        if stress is None:
            missing = Cell(words.missing_in(review, condition))
            rows.append((Cell(condition), *[missing] * (len(BEARS) - 1)))
            continue
        if isinstance(stress, Surge):
            peak = number(stress.peak_V, "V")
            reverse = number(stress.reverse_V, "V", missing="not polar")
            brief = Cell("brief")
            rows.append((Cell(condition), brief, peak, reverse, *[brief] * (len(BEARS) - 4)))
            continue
        rows.append(
            (
                Cell(condition),
                number(stress.dc_V, "V"),
                number(stress.peak_V, "V"),
                number(stress.reverse_V, "V", missing="not polar"),
                number(stress.ripple_pp_V, "V"),
                number(stress.ripple_rms_A, "A"),
                number(stress.esr_loss_W, "W"),
                number(stress.error_V, "V"),
            )
        )
    return Table("bears", BEARS, tuple(rows))


def parts(review: Review) -> Table:
    """Return the table of the other parts: a row for every stress that has a number or a limit."""
    rows = (row for each in review.circuit.parts for row in _part(review, each))
    return Table("parts", PARTS, tuple(rows))


def _part(review: Review, of: Part) -> Iterator[tuple[Cell, ...]]:
    held = borne.part(review, of.name)
    names = dict.fromkeys([*of.limits, *(name for each in held.values() for name in each)])
    for stress in names:
        limit = of.limits.get(stress)
        unit = words.unit_of(stress)
        by_condition = {
            condition: values[stress] for condition, values in held.items() if stress in values
        }
        condition = _judged_in(review, of.name, stress, by_condition)
        judged = by_condition.get(condition)
        largest = max(by_condition, key=lambda each: by_condition[each], default=None)
        if limit is None:
            verdict = NO_LIMIT
        elif judged is None:
            verdict = words.missing_in(review, condition)
        else:
            past = PAST_ASSUMED if limit.assumed else PAST
            verdict = past if judged > limit.value else WITHIN
        yield (
            Cell(of.name),
            Cell(f"{of.kind.value} {of.type}".rstrip()),
            Cell(words.quantity(stress), stress),
            number(judged, unit, missing=words.missing_in(review, condition)),
            Cell(condition),
            number(limit.value if limit else None, unit),
            Cell(verdict),
            number(by_condition[largest] if largest else None, unit, missing="unsolved"),
            Cell(largest or "none"),
            Cell(limit.rating.value if limit else "none"),
            Cell(_source(limit)),
        )


def _judged_in(review: Review, part: str, stress: str, by_condition: Mapping[str, float]) -> str:
    """Return the lasting condition, of those its limit is judged in, where a stress is largest."""
    judging = [
        each.name
        for each in review.working.conditions
        if each.lasts and stress in judged_in(review, each.name).get(part, {})
    ]
    known = [name for name in judging if name in by_condition]
    if known:
        return max(known, key=lambda name: by_condition[name])
    return judging[0] if judging else "nominal"


def _source(limit: Limit | None) -> str:
    if limit is None:
        return "not known: add it to the sheet"
    return f"assumed: {limit.source}" if limit.assumed else limit.source


def failures(review: Review) -> Table:
    """Return the table of what each failure of each position does."""
    listed = [
        each
        for position in review.circuit.positions
        for each in review.failures.get(position.name, ())
    ]
    return Table("failures", FAILURES, failure_rows(listed))


def failure_rows(of: Iterable[Failure]) -> tuple[tuple[Cell, ...], ...]:
    """Return the rows of the table of failures for some of them."""
    return tuple(_failure(each) for each in of)


def _failure(of: Failure) -> tuple[Cell, ...]:
    more = [each for each in of.consequences if each not in of.text]
    victims = "; ".join(words.victim(each) for each in of.victims)
    if of.unanswered:
        victims = of.unanswered.kind
    return (
        Cell(of.position),
        Cell(of.fault),
        Cell(of.condition),
        Cell("yes" if of.dangerous else "no"),
        Cell(victims or "nothing"),
        Cell(" ".join((of.text, *more)) or "nothing to tell"),
    )


def proofs(review: Review) -> Table:
    """Return how each condition was settled, and how far from settled it may be."""
    rows = []
    for condition in review.working.conditions:
        proof = review.working.proofs.get(condition.name)
        if proof is None:
            missing = words.missing_in(review, condition.name)
            rows.append((Cell(condition.name), Cell(missing), *[Cell("none")] * 6))
            continue
        rows.append(
            (
                Cell(condition.name),
                Cell(proof.method),
                Cell(str(proof.cycles), proof.cycles),
                Cell(str(proof.jacobian_cycles), proof.jacobian_cycles),
                Cell(str(proof.points), proof.points),
                Cell(f"{proof.distance:.1e}", proof.distance),
                Cell(f"{proof.residual:.1e}", proof.residual),
                Cell("none", None)
                if proof.multiplier is None
                else Cell(f"{proof.multiplier:.4f}", proof.multiplier),
            )
        )
    return Table("proofs", PROOFS, tuple(rows))
