"""A capacitor style in words and numbers, each with its source, for people."""

from __future__ import annotations

from collections.abc import Iterator
from math import inf

from stress.parts.citation import Citation
from stress.parts.law import Leakage, Loss, Ripple, Share
from stress.parts.style import Style
from stress.text.figure import figure

# How the figures are printed, by the end of their names; shares in percent.
_UNITS = {"_V_per_s": (1e-6, "V/µs")}
_WIDTH = 21


def description(style: Style) -> str:
    """Return everything that is known of a style: a line a law, then the sources by number."""
    aliases = f" (also: {', '.join(style.aliases)})" if style.aliases else ""
    polar = "polar" if style.polar else "not polar"
    lines = [f"{style.name}: {style.text}, {polar}{aliases}"]
    sources: dict[Citation, int] = {}
    for name, said, source in _laws(style):
        number = sources.setdefault(source, len(sources) + 1)
        lines.append(f"  {name:<{_WIDTH}} {said}  [{number}]")
    lines.append(f"  {'fit instead':<{_WIDTH}} {style.replacement}")
    lines += [f"  [{number}] {source}" for source, number in sources.items()]
    return "\n".join(lines)


def _laws(style: Style) -> Iterator[tuple[str, str, Citation]]:
    """Yield the name of each law, its numbers, and its source."""
    yield "loss factor", _loss(style.loss), style.loss.source
    insulation = style.insulation
    if not style.electrolytic:
        yield (
            "insulation, new",
            _insulation(insulation.product_s, insulation.most_ohm),
            (insulation.source),
        )
    for leakage in style.leakages:
        yield "leakage, at most", _leakage(leakage), leakage.source
    hot = style.hot
    yield "leakage when warm", f"doubles every {hot.doubling_K:g} K", hot.source
    if hot.voltage_source is not None:
        yield "leakage and voltage", f"goes with U^{hot.voltage_power:g}", hot.voltage_source
    if hot.time_source is not None:
        yield "leakage and time", f"goes with t^{hot.time_power:g}", hot.time_source
    if style.surge is not None:
        yield "surge", _surge(style), style.surge.source
    if style.reverse is not None:
        share = style.reverse.share
        part = f"{100 * share:g} % of the rating, " if share < inf else ""
        most = figure(style.reverse.most_V, "V")
        yield "reverse, at most", f"{part}{most}", style.reverse.source
    for ripple in style.ripples:
        yield "ripple against 100 Hz", _ripple(ripple), ripple.source
    if style.wear is not None:
        wear = style.wear
        worn = f"C -{100 * wear.fall:g} %, ESR times {wear.esr_factor:g}"
        yield "worn", worn, wear.source
        life = f"{wear.life_s / 3600:g} h at {wear.life_degC:g} °C"
        yield "usual life", life, wear.life_source
    if style.bias is not None:
        yield "left at rated voltage", _share(style.bias), style.bias.source
    yield "comes back", _share(style.absorption), style.absorption.source
    yield "tolerance, old", _share(style.tolerance), style.tolerance.source
    yield "tolerance, new", _share(style.new_tolerance), style.new_tolerance.source
    yield "on sale", _volts(style.steps.rated_V), style.steps.source
    highest = style.highest_degC
    yield "highest temperature", figure(highest.value, "degC"), highest.source
    for one in style.classes:
        peak = f", peak {figure(one.peak_V, 'V')}" if one.peak_V else ""
        rated = f", up to {figure(one.rated_V, 'V')}" if one.rated_V else ""
        impulse = f", impulse {figure(one.impulse_V, 'V')}" if one.impulse_V else ""
        yield "class", f"{one.name}{rated}{peak}{impulse}", one.source
    for name, quoted in style.figures.items():
        ending = next((end for end in _UNITS if name.endswith(end)), "")
        label = name.removesuffix(ending).replace("_", " ")
        scale, symbol = _UNITS.get(ending, (100.0, "%"))
        said = f"{scale * quoted.value:g} {symbol}"
        yield label, said, quoted.source
    faults = ", ".join(f"{fault} {100 * share:g} %" for fault, share in style.fate.share.items())
    fate = style.fate
    yield f"found at {fate.years:g} years", faults, fate.source
    yield "age", fate.ageing, fate.source
    yield "failure", fate.failure, fate.source


def _loss(loss: Loss) -> str:
    if loss.rated_V:
        rows = zip(loss.rated_V, loss.tan, strict=True)
        said = ", ".join(f"{figure(rated, 'V')} {100 * tan:g} %" for rated, tan in rows)
        return f"at {figure(loss.at_Hz[0], 'Hz')} by rating: {said}"
    rows = zip(loss.at_Hz, loss.tan, strict=True)
    return ", ".join(f"{100 * tan:g} % at {figure(hertz, 'Hz')}" for hertz, tan in rows)


def _insulation(product_s: float, most_ohm: float) -> str:
    asked = f"no more than {figure(most_ohm, 'ohm')} asked" if most_ohm < inf else ""
    product = f"{product_s:g} MΩ·µF" if product_s < inf else ""
    return ", ".join(one for one in (product, asked) if one)


def _leakage(leakage: Leakage) -> str:
    """Return the rule as a formula in µF, V and µA."""
    factors = [_power("C", leakage.c_power), _power("U", leakage.u_power)]
    scale = "/".join(f"{one:g}" for one in leakage.scale)
    said = "·".join([scale, *(one for one in factors if one)])
    if leakage.plus_A:
        said += f" + {leakage.plus_A * 1e6:g}"
    said += " µA"
    if leakage.rated_V:
        said += f" to {'/'.join(f'{one:g}' for one in leakage.rated_V)} V"
    if leakage.at_least_A:
        said += f", at least {figure(leakage.at_least_A, 'A')}"
    if leakage.at_most_A < inf:
        said += f", at most {figure(leakage.at_most_A, 'A')}"
    return f"{said}, after {leakage.after_s / 60:g} min"


def _power(letter: str, power: float) -> str:
    if power == 0:
        return ""
    return letter if power == 1 else f"{letter}^{power:g}"


def _surge(style: Style) -> str:
    assert style.surge is not None
    ratios = style.surge.ratio
    if not style.surge.rated_V:
        return f"{ratios[0]:g} times the rating"
    steps = [f"{ratio:g} times" for ratio in ratios]
    return f"{steps[0]} to {figure(style.surge.rated_V[0], 'V')}, {steps[-1]} above"


def _ripple(ripple: Ripple) -> str:
    to = f"to {figure(ripple.up_to_V, 'V')}: " if ripple.up_to_V < inf else "above: "
    rows = zip(ripple.at_Hz, ripple.factor, strict=True)
    return to + ", ".join(f"{factor:g} at {figure(hertz, 'Hz')}" for hertz, factor in rows)


def _share(share: Share) -> str:
    if share.low == share.high:
        return f"{100 * share.low:g} %"
    if share.low == -share.high:
        return f"±{100 * share.high:g} %"
    return f"{100 * share.low:g} to {100 * share.high:g} %"


def _volts(steps: tuple[float, ...]) -> str:
    return " ".join(f"{step:g}" for step in steps) + " V"
