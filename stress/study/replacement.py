"""Which part to fit in a position: style, value, voltage, ripple, how, and for how long."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from stress.circuit.circuit import Circuit, Position, Role
from stress.parts import styles
from stress.parts.policy import DEFAULT, Policy, Rule, policies
from stress.parts.series import next_down, standard_value
from stress.parts.style import Style
from stress.study import life
from stress.study import replacement_arrangement as arrange
from stress.study.bench import part_degC
from stress.study.replacement_line import line_part, loss_note
from stress.study.replacement_notes import mounting_notes, pulse_note, reservoir_limit, ripple_note
from stress.study.replacement_style import PULSES, StyleChoice, style_for
from stress.study.replacement_voltage import FILMS, Need, VoltageChoice, choose, needs, sine_V
from stress.study.result import PositionStress, Replacement, Working, Worst
from stress.study.touch import safety_class
from stress.study.worst import most_reversed
from stress.text.figure import figure
from stress.text.unit import unit

EXACT = frozenset({Role.TUNING})
HIGHEST_FILM = "snubber"
HEAT_SLACK_K = 1.0  # less is within what is known of the ambient
LEAST_RIPPLE_A = 1e-3  # less needs no ripple rating


@dataclass(frozen=True, slots=True, kw_only=True)
class Ripple:
    """The ripple a position carries where it heats most and that lasts.

    Attributes:
        rms_A, frequency_Hz: As simulated, at its strongest frequency.
        needed_A: The 100 Hz rating to ask for, by the policy.
        rule: Its line.
    """

    rms_A: float = field(metadata=unit("A"))
    frequency_Hz: float | None = field(metadata=unit("Hz"))
    needed_A: float = field(metadata=unit("A"))
    rule: str = ""


def replacement(
    position: Position, *, working: Working, worst: Worst, policy: Policy, circuit: Circuit
) -> Replacement:
    """Return the part to fit in a position, with the line that each choice rests on.

    Args:
        position: With a known value.
        working: What it bears, by condition.
        worst: The largest lasting and brief voltage.
        policy: The derating policy; what it does not cover goes by common practice.
        circuit: Line, touchable nodes, neighbours, cans, ambient.

    Raises:
        ValueError: Where its capacitance is not known.
    """
    if not position.value_F:
        raise ValueError(f"{position.name}: its capacitance is not known")
    lasting = _lasting(position, working)
    kind = safety_class(position, circuit=circuit, working=working)
    own = policy.rule(position.style)
    reverse_V, turned = most_reversed(lasting)
    chosen = style_for(
        position,
        safety_class=kind,
        reverse_V=reverse_V,
        reverse_condition=turned,
        slope_V_per_s=max((s.slope_V_per_s for s in lasting.values()), default=0.0),
        reverse_share=own.reverse.share if own is not None and own.reverse is not None else None,
    )
    if kind is not None:
        return _at_the_line(position, kind, chosen, circuit=circuit)
    ac_V = max((sine_V(stress) for stress in lasting.values()), default=0.0)
    volts, aside = _voltage(
        position, chosen.style, worst=worst, policy=policy, ac_V=ac_V, circuit=circuit
    )
    if volts.count > 1 and chosen.style.name in FILMS:
        # Before two in series, the film that is made for the highest voltages.
        pulse = styles.styles()[HIGHEST_FILM]
        single, single_aside = _voltage(
            position, pulse, worst=worst, policy=policy, ac_V=ac_V, circuit=circuit
        )
        if single.count < volts.count:
            chosen = replace(chosen, style=pulse, why=f"{pulse.text} for its voltage")
            volts, aside = single, single_aside
    ripple = _ripple(lasting, style=chosen.style, rated_V=volts.rated_V, policy=policy)
    limit_F, limit_note = reservoir_limit(position, circuit=circuit)
    value_F, value_why = _value(position, chosen.style, circuit=circuit, most_F=limit_F)
    parts = _arranged(position, value_F, chosen, volts, ripple=ripple, worst=worst, most_F=limit_F)
    notes = [
        *(
            note
            for note in (chosen.note, aside, volts.below, volts.short, parts.short, limit_note)
            if note
        ),
        *parts.notes,
        ripple_note(ripple.rms_A, ripple.frequency_Hz, needed_A=ripple.needed_A)
        if chosen.style.electrolytic and ripple.needed_A > LEAST_RIPPLE_A
        else "",
        pulse_note(position, lasting, ac_V=ac_V),
    ]
    hours, life_note = _life(chosen.style, volts, parts, ripple, circuit=circuit, policy=policy)
    mounting, mounting_rules = mounting_notes(
        position, circuit=circuit, style=chosen.style, working=working
    )
    return Replacement(
        position=position.name,
        value_F=parts.value_F,
        rated_V=volts.rated_V,
        style=chosen.style.name,
        ripple_rms_A=ripple.rms_A if ripple.rms_A > LEAST_RIPPLE_A else None,
        ripple_Hz=ripple.frequency_Hz,
        reason=f"{chosen.why}; {value_why}; {_volts_why(volts)}",
        rules=tuple(
            dict.fromkeys(
                rule
                for rule in (
                    chosen.rule,
                    "preferred values: IEC 60063",
                    volts.governing.rule,
                    ripple.rule if ripple.needed_A > LEAST_RIPPLE_A else "",
                    *parts.rules,
                    life.RULE if hours is not None else "",
                    *mounting_rules,
                )
                if rule
            )
        ),
        notes=tuple(note for note in (*notes, life_note, *mounting) if note),
        quantity=len(parts.parts_F),
        arrangement=parts.text,
        parts_F=parts.parts_F if len(parts.parts_F) > 1 else (),
        balance_ohm=parts.balance_ohm,
        life_h=hours,
        value_max_F=limit_F,
        ac_V=ac_V if position.role in PULSES else None,
    )


def _lasting(position: Position, working: Working) -> Mapping[str, PositionStress]:
    names = {condition.name for condition in working.conditions if condition.lasts}
    return {
        name: stress
        for name, stress in working.positions.get(position.name, {}).items()
        if name in names
    }


def _at_the_line(
    position: Position, kind: str, chosen: StyleChoice, *, circuit: Circuit
) -> Replacement:
    """Return the part of a line position: class, alternating rating, touch current."""
    part = line_part(position, safety_class=kind, style=chosen.style, circuit=circuit)
    wanted = position.value_F or 0.0
    value_F, why = standard_value(wanted, chosen.style)
    if part.value_max_F and value_F > part.value_max_F:
        value_F = next_down(part.value_max_F, "E6")
        why = f"next of E6 below the {figure(part.value_max_F, 'F')} that the touch current allows"
    mounting, rules = mounting_notes(position, circuit=circuit, style=chosen.style, working=None)
    notes = (*part.notes, loss_note(position, fitted_F=value_F), *mounting)
    return Replacement(
        position=position.name,
        value_F=value_F,
        rated_V=part.ac_V,
        style=chosen.style.name,
        ripple_rms_A=None,
        reason=f"{chosen.why}; {why}; {figure(part.ac_V, 'V')} ac covers the highest line voltage",
        rules=(chosen.rule, *part.rules, "preferred values: IEC 60063", *rules),
        notes=tuple(note for note in notes if note),
        value_max_F=part.value_max_F,
        ac_V=part.ac_V,
        safety_class=kind,
    )


def _lasting_need(policy: Policy, style: Style, *, worst: Worst, degC: float) -> tuple[Need, str]:
    """Return what a policy asks for, and a note where common practice stands in for it."""
    why = f"{figure(worst.worst_V, 'V')} lasts ({worst.condition})"
    found = policy.choose(style, worst.worst_V, temperature_degC=degC)
    note = ""
    if found is None:
        note = f"{policy.name} does not cover {style.text} at {degC:.0f} °C: by common practice"
        found = policies()[DEFAULT].choose(style, worst.worst_V, temperature_degC=degC)
    if found is None:
        return Need(worst.worst_V, why, "within the rating (common practice)"), note
    # A step on sale where there is one: clauses may change from one step to the next.
    return Need(found.rated_V or found.needed_V, why, found.reason), note


def _voltage(
    position: Position,
    style: Style,
    *,
    worst: Worst,
    policy: Policy,
    ac_V: float,
    circuit: Circuit,
) -> tuple[VoltageChoice, str]:
    lasting, note = _lasting_need(policy, style, worst=worst, degC=part_degC(circuit))
    rule = _rule(policy, style)
    share = rule.surge.share if rule is not None and rule.surge is not None else 1.0
    asked = needs(position, style=style, worst=worst, lasting=lasting, surge_share=share, ac_V=ac_V)
    return choose(asked, position=position, style=style), note


def _rule(policy: Policy, style: Style) -> Rule | None:
    return policy.rule(style) or policies()[DEFAULT].rule(style)


def _volts_why(volts: VoltageChoice) -> str:
    need = volts.governing
    each = " each" if volts.count > 1 else ""
    return f"{figure(volts.rated_V, 'V')}{each} because {need.why} ({need.rule})"


def _value(
    position: Position, style: Style, *, circuit: Circuit, most_F: float | None
) -> tuple[float, str]:
    entry = circuit.sheet.capacitors.get(position.name.lower())
    tolerance = entry.tolerance if entry is not None else None
    low, high = tolerance or (
        1.0 + position.style.tolerance.low,
        1.0 + position.style.tolerance.high,
    )
    chosen, why = standard_value(position.value_F or 0.0, style, tolerance=tolerance, most_F=most_F)
    share = chosen / (position.value_F or chosen)
    inside = "within" if low <= share <= high else "outside"
    if share != 1.0:
        why += f", {inside} the original's {low - 1:+.0%} {high - 1:+.0%}"
    return chosen, why


def _ripple(
    lasting: Mapping[str, PositionStress], *, style: Style, rated_V: float, policy: Policy
) -> Ripple:
    if not lasting:
        return Ripple(rms_A=0.0, frequency_Hz=None, needed_A=0.0)
    rule = _rule(policy, style)
    clause = rule.ripple if rule is not None else None
    equivalents = [
        (life.equivalent_A(stress, style=style, rated_V=rated_V), name)
        for name, stress in lasting.items()
    ]
    most_A, name = max(equivalents)
    return Ripple(
        rms_A=lasting[name].ripple_rms_A,
        frequency_Hz=lasting[name].ripple_Hz,
        needed_A=most_A / clause.share if clause is not None else most_A,
        rule=f"ripple: {clause}" if clause is not None else "",
    )


def _arranged(
    position: Position,
    value_F: float,
    chosen: StyleChoice,
    volts: VoltageChoice,
    *,
    ripple: Ripple,
    worst: Worst,
    most_F: float | None,
) -> arrange.Arrangement:
    if chosen.back_to_back:
        return arrange.back_to_back(value_F, style=chosen.style)
    if volts.count > 1:
        return arrange.in_series(value_F, style=chosen.style, volts=volts, worst=worst)
    if position.role in EXACT:
        return arrange.exact(position, chosen_F=value_F)
    if not chosen.style.electrolytic:
        return arrange.single(value_F)
    parts = arrange.in_parallel(
        value_F, style=chosen.style, rated_V=volts.rated_V, ripple_A=ripple.needed_A
    )
    # Rounding up each part must not carry the whole past what the rectifier bears.
    return parts if most_F is None or parts.value_F <= most_F else arrange.single(value_F)


def _life(
    style: Style,
    volts: VoltageChoice,
    parts: arrange.Arrangement,
    ripple: Ripple,
    *,
    circuit: Circuit,
    policy: Policy,
) -> tuple[float | None, str]:
    """Return the expected life in hours and its note; None for what does not dry out."""
    if style.wear is None:
        return None, ""
    carried = life.ordinary_ripple_A(parts.parts_F[0], rated_V=volts.rated_V)
    share = len(parts.parts_F) if volts.count == 1 else 1
    rule = _rule(policy, style)
    used = rule.ripple.share if rule is not None and rule.ripple is not None else 1.0
    # The part bought is rated for what is needed at least, and an ordinary one for `carried`.
    rated = max(carried, ripple.needed_A / share)
    found = life.expected(
        ambient_degC=part_degC(circuit),
        ripple_A=ripple.needed_A * used / share,
        rated_ripple_A=rated,
    )
    note = (
        f"life about {found.hours:,.0f} h at {found.ambient_degC:.0f} °C with a hot spot of "
        f"{found.core_degC:.0f} °C ({life.ORDINARY.source}; rated {figure(rated, 'A')} at 100 Hz)"
    )
    heat = rule.temperature if rule is not None else None
    if heat is not None and found.core_degC > heat.limit_degC(style) + HEAT_SLACK_K:
        note += (
            f"; hotter than the {heat.limit_degC(style):.0f} °C that {policy.name} allows for an "
            f"{style.highest_degC.value:.0f} °C part: take a 105 °C series ({heat.source})"
        )
    return found.hours, note
