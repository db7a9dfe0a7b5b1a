"""Pairs of faults as JSON values."""

from __future__ import annotations

from typing import Any

from stress.study.fault import Fault
from stress.study.pairs import Pair, Pairs


def pairs_document(of: Pairs) -> dict[str, Any]:
    """Return what was tried and what was found; `alone` is in the unit of `quantity`."""
    return {
        "asked": of.asked,
        "possible": of.possible,
        "tried": len(of.tried),
        "unsolved": len(of.unsolved),
        "faults": [_fault(each) for each in of.faults],
        "found": [_pair(each) for each in of.found],
        "unanswered": [
            {"case": why.case, "kind": why.kind, "text": why.text}
            for each in of.unsolved
            for why in each.unanswered
        ],
    }


def _fault(of: Fault) -> dict[str, Any]:
    return {"position": of.position, "fault": of.kind, "leak_ohm": of.ohm}


def _pair(of: Pair) -> dict[str, Any]:
    return {
        "faults": [_fault(each) for each in of.faults],
        "likelihood": of.likelihood,
        "condition": of.condition,
        "victims": [
            {
                "part": each.victim.part,
                "quantity": each.victim.quantity,
                "stress": each.victim.stress,
                "limit": each.victim.limit.value,
                "healthy": each.victim.healthy,
                "alone": each.alone,
            }
            for each in of.victims
        ],
    }
