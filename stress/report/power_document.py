"""The power-up plan and the discharge as JSON values.

The unit of a number stands in the end of its key, or of the key of the mapping it is in; where it
differs from record to record, in `unit` beside it. `share_of_nominal` is a plain ratio.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from stress.report.words import unit_of
from stress.study.discharge_result import Charge, Decay, Discharge, Resistor
from stress.study.power_result import (
    Lamp,
    LampReading,
    Peak,
    PowerUp,
    Probe,
    Step,
    SwitchOn,
    TellTale,
)
from stress.study.result import Unanswered


def power_up_document(of: PowerUp) -> dict[str, Any]:
    """Return the plan; every reading has the unit of its probe beside it."""
    units = {probe.key: probe.unit for probe in of.probes}
    return {
        "method": {
            "way": of.method.way.value,
            "text": of.method.text,
            "reasons": of.method.reasons,
            "before": of.method.before,
            "refused": of.method.refused,
        },
        "work": [
            {"severity": each.severity.value, "where": each.where, "text": each.text}
            for each in of.work
        ],
        "probes": [_probe(each) for each in of.probes],
        "steps": [_step(each, units) for each in of.steps],
        "lamp": _lamp(of.lamp) if of.lamp else None,
        "tell_tales": [_tell_tale(each, units) for each in of.tell_tales],
        "switch_on": _switch_on(of.switch_on) if of.switch_on else None,
        "missing": of.missing,
        "cautions": of.cautions,
        "unanswered": [unanswered(each) for each in of.unanswered],
    }


def unanswered(of: Unanswered) -> dict[str, Any]:
    """Return a case without a number, and why."""
    return {"case": of.case, "kind": of.kind, "text": of.text}


def _probe(of: Probe) -> dict[str, Any]:
    return {
        "key": of.key,
        "kind": of.kind.value,
        "node": of.node or None,
        "against": of.against if of.node else None,
        "text": of.text,
        "unit": of.unit,
        "effort": of.effort,
        "forbidden": of.forbidden or None,
    }


def _tell_tale(of: TellTale, units: Mapping[str, str]) -> dict[str, Any]:
    return {
        "position": of.position,
        "fault": of.fault,
        "step": of.step,
        "readings": [
            {"probe": key, "unit": units[key], "healthy": healthy, "faulty": faulty}
            for key, healthy, faulty in of.readings
        ],
        "text": of.text,
    }


def _step(of: Step, units: Mapping[str, str]) -> dict[str, Any]:
    return {
        "name": of.ramp.name,
        "share_of_nominal": of.ramp.share,
        "line_V": of.ramp.line_V,
        "text": of.text,
        "bands": [
            {
                "probe": each.probe,
                "unit": units[each.probe],
                "value": each.value,
                "low": each.low,
                "high": each.high,
                "shown": each.shown,
            }
            for each in of.ramp.bands
        ],
        "aborts": [
            {
                "probe": each.probe,
                "unit": units[each.probe],
                "above": each.above,
                "limit": each.limit,
                "tells": each.tells,
            }
            for each in of.aborts
        ],
        "late": of.late,
        "cannot_tell": of.cannot_tell,
    }


def _lamp(of: Lamp) -> dict[str, Any]:
    return {
        "rated_W": of.rated_W,
        "rated_V": of.rated_V,
        "healthy": _lamp_reading(of.healthy) if of.healthy else None,
        "faulty": [_lamp_reading(each) for each in of.faulty],
        "text": of.text,
    }


def _lamp_reading(of: LampReading) -> dict[str, Any]:
    lost = of.unanswered is not None
    return {
        "fault": of.fault or None,
        "lamp_V": None if lost else of.lamp_V,
        "equipment_V": None if lost else of.equipment_V,
        "current_A": None if lost else of.current_A,
        "supply_V": dict(of.supply_V),
        "tells": of.tells,
        "unanswered": of.unanswered.kind if of.unanswered else None,
    }


def _switch_on(of: SwitchOn) -> dict[str, Any]:
    return {
        "watched_s": of.seconds,
        "peaks": [_peak(each) for each in of.peaks],
        "unanswered": [unanswered(each) for each in of.unanswered],
    }


def _peak(of: Peak) -> dict[str, Any]:
    return {
        "part": of.part,
        "quantity": of.quantity,
        "unit": unit_of(of.quantity),
        "cold": of.cold,
        "hot": of.hot,
        "phase_deg": of.phase_deg,
    }


def discharge_document(of: Discharge) -> list[dict[str, Any]]:
    """Return what every position holds, and how long until it stays below each threshold."""
    return [_charge(each) for each in of.charges]


def _charge(of: Charge) -> dict[str, Any]:
    es1_V, es2_V = of.class_V
    return {
        "name": of.position,
        "value_F": of.value_F,
        "start_V": of.start_V,
        "condition": of.condition,
        "energy_J": of.energy_J,
        "deadly": of.deadly,
        "class_V": {"ES1": es1_V, "ES2": es2_V},
        "holds": of.holds,
        "floating": of.floating,
        "bleed_ohm": of.bleed_ohm,
        "insulation_ohm": of.insulation_ohm,
        "formula": [
            {"threshold_V": volts, "time_s": seconds} for volts, seconds in of.formula_s.items()
        ],
        "decays": [_decay(each) for each in of.decays],
        "returns_V": of.returns_V,
        "resistor": _resistor(of.resistor) if of.resistor else None,
    }


def _resistor(of: Resistor) -> dict[str, Any]:
    return {
        "value_ohm": of.ohm,
        "rated_V": of.rated_V,
        "rated_W": of.rated_W,
        "peak_A": of.peak_A,
        "energy_J": of.energy_J,
        "until_V": of.until_V,
        "time_s": of.seconds,
        "pieces": of.pieces,
    }


def _decay(of: Decay) -> dict[str, Any]:
    return {
        "how": of.how,
        "start_V": of.start_V,
        "below": [
            {"threshold_V": volts, "time_s": seconds, "extrapolated": volts in of.extrapolated}
            for volts, seconds in of.below_s.items()
        ],
        "time_s": of.seconds,
        "voltage_V": of.volts,
    }
