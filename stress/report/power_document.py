"""The power-up plan and the discharge as JSON values, the unit in the end of each key."""

from __future__ import annotations

from typing import Any

from stress.study.discharge_result import Charge, Decay, Discharge
from stress.study.power_result import Lamp, LampReading, Peak, PowerUp, Step


def power_up_document(of: PowerUp) -> dict[str, Any]:
    """Return the plan; readings of a probe are in the `unit` of the probe."""
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
        "probes": [
            {
                "key": each.key,
                "kind": each.kind.value,
                "node": each.node or None,
                "text": each.text,
                "unit": each.unit,
                "effort": each.effort,
                "forbidden": each.forbidden or None,
            }
            for each in of.probes
        ],
        "steps": [_step(each) for each in of.steps],
        "lamp": _lamp(of.lamp) if of.lamp else None,
        "tell_tales": [
            {
                "position": each.position,
                "fault": each.fault,
                "step": each.step,
                "readings": [
                    {"probe": key, "healthy": healthy, "faulty": faulty}
                    for key, healthy, faulty in each.readings
                ],
                "text": each.text,
            }
            for each in of.tell_tales
        ],
        "switch_on": [_peak(each) for each in of.switch_on.peaks] if of.switch_on else None,
        "missing": of.missing,
        "cautions": of.cautions,
        "unanswered": [
            {"case": each.case, "kind": each.kind, "text": each.text} for each in of.unanswered
        ],
    }


def _step(of: Step) -> dict[str, Any]:
    return {
        "name": of.ramp.name,
        "share": of.ramp.share,
        "line_V": of.ramp.line_V,
        "text": of.text,
        "bands": [
            {
                "probe": each.probe,
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


def _peak(of: Peak) -> dict[str, Any]:
    return {
        "part": of.part,
        "quantity": of.quantity,
        "cold": of.cold,
        "hot": of.hot,
        "phase_deg": of.phase_deg,
    }


def discharge_document(of: Discharge) -> list[dict[str, Any]]:
    """Return what every position holds; times by threshold are in seconds, keyed by volts."""
    return [_charge(each) for each in of.charges]


def _charge(of: Charge) -> dict[str, Any]:
    resistor = of.resistor
    return {
        "name": of.position,
        "value_F": of.value_F,
        "start_V": of.start_V,
        "condition": of.condition,
        "energy_J": of.energy_J,
        "deadly": of.deadly,
        "holds": of.holds,
        "floating": of.floating,
        "bleed_ohm": of.bleed_ohm,
        "insulation_ohm": of.insulation_ohm,
        "formula_s": {f"{volts:g}": seconds for volts, seconds in of.formula_s.items()},
        "decays": [_decay(each) for each in of.decays],
        "returns_V": of.returns_V,
        "resistor": {
            "ohm": resistor.ohm,
            "rated_V": resistor.rated_V,
            "rated_W": resistor.rated_W,
            "energy_J": resistor.energy_J,
            "seconds_s": resistor.seconds,
            "pieces": resistor.pieces,
        }
        if resistor
        else None,
    }


def _decay(of: Decay) -> dict[str, Any]:
    return {
        "how": of.how,
        "start_V": of.start_V,
        "below_s": {f"{volts:g}": seconds for volts, seconds in of.below_s.items()},
        "extrapolated": [f"{volts:g}" for volts in of.extrapolated],
        "time_s": of.seconds,
        "voltage_V": of.volts,
    }
