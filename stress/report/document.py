"""The review as one JSON document: SI numbers, unrounded, the unit in the end of each key."""

from __future__ import annotations

import json
from collections.abc import Mapping
from math import isfinite
from pathlib import Path
from typing import Any

from stress.circuit.circuit import Part, Position
from stress.report import borne, words
from stress.report.pair_document import pairs_document
from stress.report.power_document import discharge_document, power_up_document, unanswered
from stress.study.other_use import on_offer
from stress.study.result import (
    Condition,
    CurvePoint,
    Failure,
    Leakage,
    LeakageIn,
    PositionStress,
    Review,
    Surge,
)
from stress.study.unjudged import Unjudged

SCHEMA = "capstress-review/1"
WORKING = (
    "dc_V",
    "peak_V",
    "reverse_V",
    "ripple_pp_V",
    "ripple_rms_A",
    "esr_loss_W",
    "error_V",
)
FAULTS = ("short", "open", "dried", "low", "reversed")


def write_json(review: Review, path: Path) -> None:
    """Write the document of a review to a file, UTF-8.

    Raises:
        OSError: Where the file cannot be written.
    """
    text = json.dumps(document(review), ensure_ascii=False, allow_nan=False, indent=1)
    path.write_text(text + "\n", encoding="utf-8")


def document(review: Review) -> dict[str, Any]:
    """Return everything a review found, as dictionaries and lists of JSON values.

    None stands for what is not known, does not apply or was not solved; `unanswered` lists
    the last.
    """
    circuit = review.circuit
    finite: dict[str, Any] = _finite(
        {
            "schema": SCHEMA,
            "equipment": {
                "name": circuit.name,
                "netlist": circuit.netlist.path,
                "sheet": circuit.sheet.path,
            },
            "engine": {"ngspice": review.versions.ngspice, "pyspice": review.versions.pyspice},
            "conditions": [_condition(each) for each in borne.conditions(review)],
            "on_offer": [
                {"name": use.name, "text": use.text, "tests": use.tests}
                for use in on_offer(circuit)
            ],
            "positions": [_position(review, each) for each in circuit.positions],
            "parts": [_part(review, each) for each in circuit.parts],
            "power_up": power_up_document(review.power_up) if review.power_up else None,
            "discharge": discharge_document(review.discharge) if review.discharge else None,
            "pairs": pairs_document(review.pairs) if review.pairs else None,
            "findings": [
                {
                    "severity": each.severity.value,
                    "where": each.where,
                    "condition": each.condition,
                    "text": words.joined(each.text, each.action),
                }
                for each in review.findings
            ],
            "unanswered": [
                unanswered(each)
                for each in (
                    *review.working.unanswered,
                    *(review.discharge.unanswered if review.discharge else ()),
                )
            ],
            "run": {
                "cases": review.run.cases,
                "unsolved": review.run.unsolved,
                "cycles": review.run.cycles,
                "wall_s": review.run.wall_s,
            },
        }
    )
    return finite


def _finite(value: Any) -> Any:
    """Return the value with None for every float that JSON cannot hold."""
    if isinstance(value, Mapping):
        return {key: _finite(each) for key, each in value.items()}
    if isinstance(value, list | tuple):
        return [_finite(each) for each in value]
    if isinstance(value, float):
        return float(value) if isfinite(value) else None  # numpy's floats become plain ones
    return value


def _condition(of: Condition) -> dict[str, Any]:
    return {
        "name": of.name,
        "line_V": of.line_V,
        "pulled": of.pulled,
        "open": of.open,
        "short": of.short,
        "cold": of.cold,
        "silicon": of.silicon,
        "muted": of.muted,
        "text": of.text,
    }


def _position(review: Review, of: Position) -> dict[str, Any]:
    worst = review.worst.get(of.name)
    worst_V = worst.worst_V if worst else None
    held = review.working.positions.get(of.name, {})
    # The words of DEVELOPERS.md: margin is (limit - stress) / limit.
    margin = (of.rated_V - worst_V) / of.rated_V if of.rated_V and worst_V is not None else None
    return {
        "name": of.name,
        "nodes": of.nodes,
        "role": of.role.value,
        "style": of.style.name,
        "value_F": of.value_F,
        "rated_V": of.rated_V,
        "plus": _plus(of, held.get("nominal")),
        "working": {name: _stress(stress) for name, stress in borne.position(review, of)},
        "worst_V": worst_V,
        "worst_condition": worst.condition if worst else None,
        "margin": margin,
        "replacement": _replacement(review, of.name),
        "leakage": _leakage(review.leakage.get(of.name)),
        "failures": _failures(review.failures.get(of.name)),
        "bench": _bench(review, of.name),
        "risk": next(
            (
                {"rank": risk.rank, "severity": risk.severity.value, "reason": risk.reason}
                for risk in review.risks
                if risk.position == of.name
            ),
            None,
        ),
    }


def _plus(of: Position, nominal: PositionStress | None) -> str | None:
    """Return the plus node of a polarised part: as known, else the positive one by its mean."""
    if of.plus is not None:
        return of.nodes[of.plus]
    if not of.style.polar or nominal is None:
        return None
    return of.nodes[0 if nominal.dc_V >= 0 else 1]


def _stress(of: PositionStress | Surge | None) -> dict[str, Any] | None:
    if of is None:
        return None
    if isinstance(of, Surge):
        known = {"peak_V": of.peak_V, "reverse_V": of.reverse_V}
        return {key: known.get(key) for key in WORKING}
    return {key: getattr(of, key) for key in WORKING}


def _replacement(review: Review, name: str) -> dict[str, Any] | None:
    of = review.replacements.get(name)
    if of is None:
        return None
    return {
        "value_F": of.value_F,
        "rated_V": of.rated_V,
        "style": of.style,
        "ripple_rms_A": of.ripple_rms_A,
        "reason": of.reason,
        "quantity": of.quantity,
        "arrangement": of.arrangement or None,
        "ac_V": of.ac_V,
        "safety_class": of.safety_class,
    }


def _leakage(of: Leakage | None) -> dict[str, Any] | None:
    if of is None:
        return None
    governing = of.governing
    assumed = governing.assumed_critical_ohm if governing else None
    return {
        **_leakage_in(governing),
        "condition": governing.condition if governing else None,
        "critical_A": governing.critical_A if governing else None,
        "assumed_critical_ohm": assumed,
        "functional_reason": governing.functional_reason if governing else None,
        "reason": words.NOT_LIMITED if not of.limited else _reason(governing),
        "by_condition": {
            each.condition: {
                **_leakage_in(each),
                "governs": each.governs,
                "reason": _reason(each),
            }
            for each in of.by_condition
        },
        "unjudged": [_unjudged(each) for each in governing.unjudged] if governing else [],
        "curve": [_point(each) for each in governing.curve] if governing else [],
    }


def _leakage_in(of: LeakageIn | None) -> dict[str, Any]:
    victim = of.victim if of else None
    return {
        "critical_ohm": of.critical_ohm if of else None,
        "victim": victim.part if victim else None,
        "quantity": victim.quantity if victim else None,
        "limit": victim.limit.value if victim else None,
        "functional_ohm": of.functional_ohm if of else None,
    }


def _reason(of: LeakageIn | None) -> str | None:
    if of is None:
        return words.UNSOLVED  # no condition had an answer to start from
    if of.always:
        return "always"
    return of.unanswered[0].kind if of.critical_ohm is None and of.unanswered else None


def _point(of: CurvePoint) -> dict[str, Any]:
    return {
        "ohm": of.ohm,
        "leak_A": of.leak_A if of.unanswered is None else None,
        "stresses": {part: dict(stresses) for part, stresses in of.stresses.items()},
        "nodes_V": dict(of.nodes),
        "unanswered": of.unanswered.kind if of.unanswered else None,
    }


def _failures(of: tuple[Failure, ...] | None) -> dict[str, Any] | None:
    if of is None:
        return None
    by_fault = {each.fault: each for each in reversed(of)}  # the first of a fault counts
    return {
        fault: _failure(by_fault[fault]) if fault in by_fault else None
        for fault in (*FAULTS, *(name for name in by_fault if name not in FAULTS))
    }


def _failure(of: Failure) -> dict[str, Any]:
    return {
        "condition": of.condition,
        "victims": [
            {
                "part": each.part,
                "quantity": each.quantity,
                "stress": each.stress,
                "limit": each.limit.value,
            }
            for each in of.victims
        ],
        "text": of.text,
        "dangerous": of.dangerous,
        "consequences": of.consequences,
        "unjudged": [_unjudged(each) for each in of.unjudged],
        "reason": of.unanswered.kind if of.unanswered else None,
    }


def _unjudged(of: Unjudged) -> dict[str, Any]:
    return {
        "part": of.part,
        "quantity": of.quantity,
        "healthy": of.healthy,
        "stress": of.stress,
        "key": of.key,
    }


def _bench(review: Review, name: str) -> dict[str, Any] | None:
    of = review.bench.get(name)
    if of is None:
        return None
    return {
        "test_V": of.test_V,
        "leakage_max_A": of.leakage_max_A,
        "esr_max_ohm": of.esr_max_ohm,
        "esr_Hz": of.esr_Hz,
        "value_min_F": of.value_min_F,
        "value_max_F": of.value_max_F,
        "in_circuit": {
            "leakage": of.in_leakage,
            "esr": of.in_esr,
            "capacitance": of.in_capacitance,
        },
    }


def _part(review: Review, of: Part) -> dict[str, Any]:
    held = borne.part(review, of.name)
    return {
        "name": of.name,
        "kind": of.kind.value,
        "type": of.type,
        "stresses": {
            each.name: dict(held[each.name]) if each.name in held else None
            for each in borne.conditions(review)
        },
        "limits": {
            stress: {"value": limit.value, "source": limit.source, "rating": limit.rating.value}
            for stress, limit in of.limits.items()
        },
    }
