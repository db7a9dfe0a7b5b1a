"""The SPICE text of the built-in models: published laws, one smooth form each.

Every model is one `.subckt` of behavioural sources and a few capacitors, in plain ngspice
terms, with the parameter `emission` (0 to 1) that scales all its currents through the source
`Vemission`, so that a cold tube needs no other model. Parts of a law stand in inner nodes:
that halves the time, for a solver differentiates every law by every voltage in it.

Laws, v against the cathode, softplus(x) = ln(1 + e^x):

* Triode (N. Koren, "Improved vacuum tube models for SPICE simulations", Glass Audio 8(5),
  1996): Ip = 2 E^EX / KG1, E = vp/KP softplus(KP (1/MU + vg/sqrt(KVB + vp^2))).
* Pentode, beam tube: the space current after Koren, 2 E^EX / KG1, E = w softplus(u/w),
  u = vg + vs/MU + vp/MUA, w = sqrt(vs^2 + 100)/KP. The plate takes of it
  2/pi atan(vp/(KVS vs)) (1 - S0 (2 vs^2/(vs^2 + vp^2))^H), the screen what the plate leaves, so
  that the cathode current is conserved and a screen without plate voltage burns as it does.
  Ours are: the knee in proportion to the screen voltage (Koren's KVB is a constant); the share
  S0 that the screen takes above the knee, with its fall by the ratio of the voltages, because
  lines published at several voltages show both; and MUA, the control by the plate (gm rp).
* Converter: the same with the oscillator grid in the place of grid 1, times a logistic law of
  the signal grid in the plate's share. It stands for the mean currents of a tube that
  oscillates as its sheet says; the oscillation itself is not simulated.
* Grid: GG (s softplus((vg + VC)/s))^XI, the smooth law of K. Dempwolf and U. Zölzer, "A
  physically-motivated triode model for circuit simulations", DAFx-11, 2011 (law and exponent
  from memory, to be confirmed), displaced by the contact potential VC, so that a leak of
  10 megohm sits at about -0.85 V (common practice: -0.7 to -1 V).
* Rectifier: Child's law, K v^1.5; mercury vapour: a steady drop with a small resistance.
* Signal diode: Child's law, smooth as the grid, displaced by its contact potential.
* Semiconductor and selenium rectifiers: the junction of SPICE (Shockley with series resistance)
  through the drop of the type table; ideality and resistance by class, common practice.
"""

from __future__ import annotations

from collections.abc import Sequence

from stress.parts.model import Unit

GRID_EXPONENT = 1.314  # Dempwolf and Zölzer 2011, from memory, to be confirmed
GRID_WIDTH_V = 0.12  # gives e-fold per 0.091 V below, kT/q at 1060 K
GRID_CONTACT_V = 0.36  # 85 nA at -0.85 V for GG = 0.3 mA: 10 megohm there (common practice)


def subcircuit_text(name: str, *, pins: Sequence[str], units: Sequence[Unit]) -> str:
    """Return the `.subckt` of a type made of one or more units that share emission.

    Args:
        name: Name of the subcircuit.
        pins: Roles in the order of the X card.
        units: What it is made of; each names its own pins.
    """
    if units[0].form == "junction":
        card = junction_card("junction", units[0])
        return f".subckt {name} {' '.join(pins)}\nD1 anode cathode junction\n{card}.ends {name}\n"
    lines = [f".subckt {name} {' '.join(pins)} emission=1", "Vemission em 0 {emission}"]
    for index, unit in enumerate(units):
        lines += _LAWS[unit.form](unit, "" if index == 0 else str(index + 1))
    lines.append(f".ends {name}")
    return "\n".join(lines) + "\n"


def junction_card(name: str, unit: Unit) -> str:
    """Return the `.model` card of a semiconductor or selenium rectifier."""
    told = " ".join(f"{key.lower()}={_number(unit[key])}" for key in ("IS", "N", "RS"))
    return f".model {name} d({told})\n"


def _number(value: float) -> str:
    return f"{value:.6g}"


def _softplus(x: str) -> str:
    """ln(1 + exp(x)) without overflow."""
    return f"(max({x},0)+ln(1+exp(-abs({x}))))"


def _grid(unit: Unit, tag: str, grid: str, cathode: str) -> list[str]:
    scale = _number(unit["GG"] * GRID_WIDTH_V**GRID_EXPONENT)
    return [
        f"By{tag} y{tag} 0 V=(V({grid},{cathode})+{_number(GRID_CONTACT_V)})/{_number(GRID_WIDTH_V)}",
        f"Bgrid{tag} {grid} {cathode} I=V(em)*{scale}"
        f"*pow({_softplus(f'V(y{tag})')},{_number(GRID_EXPONENT)})",
    ]


def _capacitances(unit: Unit, tag: str, plate: str, grid: str, cathode: str) -> list[str]:
    places = (("gk", grid, cathode), ("gp", grid, plate), ("pk", plate, cathode))
    return [
        f"C{name}{tag} {one} {other} {_number(unit['C' + name.upper()])}"
        for name, one, other in places
    ]


def _triode(unit: Unit, tag: str) -> list[str]:
    plate, grid, cathode = unit.pins
    vp, x = f"V({plate},{cathode})", f"V(x{tag})"
    return [
        f"Bx{tag} x{tag} 0 V={_number(unit['KP'])}*({_number(1 / unit['MU'])}"
        f"+V({grid},{cathode})/sqrt({_number(unit['KVB'])}+{vp}*{vp}))",
        f"Bplate{tag} {plate} {cathode} I=V(em)*{_number(2 / unit['KG1'])}"
        f"*pow({_number(1 / unit['KP'])}*max({vp},0)*{_softplus(x)},{_number(unit['EX'])})",
        *_grid(unit, tag, grid, cathode),
        *_capacitances(unit, tag, plate, grid, cathode),
    ]


def _pentode(unit: Unit, tag: str) -> list[str]:
    plate, screen, grid, cathode = unit.pins[:4]
    control = unit.pins[4] if unit.form == "converter" else grid
    vp, vs = f"V({plate},{cathode})", f"V({screen},{cathode})"
    names = ("space", "share", "fall", "width", "x")
    space, share, fall, width, x = (f"{name}{tag}" for name in names)
    drive = f"V({control},{cathode})+{_number(1 / unit['MU'])}*{vs}+{_number(1 / unit['MUA'])}*{vp}"
    positive = f"V(high{tag})"
    scale = _number(1 / (unit["KVS"] * unit["KP"]))
    knee = f"0.6366198*atan({scale}*{positive}*{positive}/(({positive}+1)*V({width})))"
    square = f"V({width})*V({width})+1e-6"
    # The logarithm in a node of its own: a power of a node that starts at 0 V has no slope there.
    ratio = f"2*({square})/({square}+{_number(unit['KP'] ** -2)}*{positive}*{positive})"
    part = f"{knee}*(1-{_number(unit['S0'])}*exp({_number(unit['H'])}*V({fall})))"
    if unit.form == "converter":
        signal = f"min(V({grid},{cathode})-{_number(unit['V3'])},99)"
        part += f"/(1+exp(-({_number(1 / unit['S3'])})*{signal}))"
    lines = [
        f"Bwidth{tag} {width} 0 V={_number(1 / unit['KP'])}*sqrt({vs}*{vs}+100)",
        f"Bx{tag} {x} 0 V=({drive})/V({width})",
        # In milliamperes, so that the solver's tolerance for voltages fits it.
        f"Bspace{tag} {space} 0 V=V(em)*{_number(2000 / unit['KG1'])}"
        f"*pow(V({width})*{_softplus(f'V({x})')},{_number(unit['EX'])})",
        f"Bhigh{tag} high{tag} 0 V=max({vp},0)",
        f"Bfall{tag} {fall} 0 V=ln({ratio})",
        f"Bshare{tag} {share} 0 V={part}",
        f"Bplate{tag} {plate} {cathode} I=0.001*V({space})*V({share})",
        # No current into a screen that is not positive; 2 V are the width of the step.
        f"Bopen{tag} open{tag} 0 V=max({vs},0)",
        f"Bscreen{tag} {screen} {cathode} I=0.001*V({space})*(1-V({share}))"
        f"*V(open{tag})*V(open{tag})/(V(open{tag})*V(open{tag})+4)",
        *_grid(unit, tag, control, cathode),
    ]
    if control != grid:
        lines += _grid(unit, f"{tag}s", grid, cathode)
    return [*lines, *_capacitances(unit, tag, plate, grid, cathode)]


def _rectifier(unit: Unit, tag: str) -> list[str]:
    plate, cathode = unit.pins
    current = f"{_number(unit['K'])}*pow(max(V({plate},{cathode}),0),1.5)"
    return [f"Bplate{tag} {plate} {cathode} I=V(em)*{current}"]


def _arc(unit: Unit, tag: str) -> list[str]:
    plate, cathode = unit.pins
    x = f"(V({plate},{cathode})-{_number(unit['VARC'])})/{_number(unit['WARC'])}"
    conductance = _number(unit["WARC"] / unit["RARC"])
    return [f"Bplate{tag} {plate} {cathode} I=V(em)*{conductance}*{_softplus(x)}"]


def _diode(unit: Unit, tag: str) -> list[str]:
    plate, cathode = unit.pins
    x = f"(V({plate},{cathode})+{_number(GRID_CONTACT_V)})/{_number(GRID_WIDTH_V)}"
    return [
        f"Bdiode{tag} {plate} {cathode} I=V(em)*{_number(unit['K'])}"
        f"*pow({_number(GRID_WIDTH_V)}*{_softplus(x)},1.5)",
        f"Cd{tag} {plate} {cathode} {_number(unit['CD'])}",
    ]


_LAWS = {
    "triode": _triode,
    "pentode": _pentode,
    "converter": _pentode,
    "rectifier": _rectifier,
    "arc": _arc,
    "diode": _diode,
}
