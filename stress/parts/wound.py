"""Transformers and chokes stated by what people know, as coupled inductors.

Two ways. In a netlist, the built-in subcircuits of `SUBCIRCUITS` with their parameters:

    XT1 line 0 a ct b power_transformer_ct vp=117 vs=350 rp=5 rs=60
    XT2 b plate spk 0 output_transformer zp=5000 zs=8 rp=250 rs=0.6
    XL1 in out choke l=10 r=250

In Python, `power_transformer`, `output_transformer` and `choke`, which take any number of
windings and give the cards as text.

Common practice, to be replaced by measured values where there are any:

* A power transformer draws about a tenth of its rated primary current unloaded, nearly all of it
  magnetising; its leakage reactance is about 2 % of the rated impedance.
* An output transformer has some 10 H (single-ended, gapped) and leaks 0.5 % of that.
* Iron is linear here: neither saturation nor hum of the gap is modelled, and a choke's inductance
  is that at its rated direct current.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import combinations, pairwise
from math import pi, sqrt

from stress.text.unit import unit

MAGNETISING_SHARE = 0.1  # of the rated primary current; common practice
LEAKAGE_SHARE = 0.02  # leakage reactance over rated impedance; common practice
OUTPUT_LEAKAGE_SHARE = 0.005  # leakage inductance over primary inductance; common practice
OUTPUT_PRIMARY_H = 10.0  # common practice

_POWER = """\
.param n={vs/vp} lp={vp/(6.283185307*f*im)} ls={n*n*lp}
Rp p1 p {rp}
Lp p p2 {lp}
"""
_OUTPUT = """\
.param n={sqrt(zs/zp)} ls={n*n*l} k={1-leak/2}
"""
# Name -> pins, parameters with their defaults, cards.
SUBCIRCUITS = {
    "choke": ("in out", "l=10 r=200", "Lc in inner {l}\nRc inner out {r}\n"),
    "power_transformer": (
        "p1 p2 s1 s2",
        "vp=117 vs=117 rp=5 rs=5 im=0.1 f=60 k=0.999",
        _POWER + "Rs s1 s {rs}\nLs s s2 {ls}\nKps Lp Ls {k}\n",
    ),
    "power_transformer_ct": (
        "p1 p2 s1 ct s2",
        "vp=117 vs=350 rp=5 rs=60 im=0.1 f=60 k=0.999",
        _POWER
        + "Rs1 s1 a {rs}\nLs1 a ct {ls}\nRs2 s2 b {rs}\nLs2 ct b {ls}\n"
        + "Kp1 Lp Ls1 {k}\nKp2 Lp Ls2 {k}\nK12 Ls1 Ls2 {k}\n",
    ),
    "output_transformer": (
        "p1 p2 s1 s2",
        "zp=5000 zs=4 rp=200 rs=0.4 l=10 leak=0.005",
        _OUTPUT + "Rp p1 p {rp}\nLp p p2 {l}\nRs s1 s {rs}\nLs s s2 {ls}\nKps Lp Ls {k}\n",
    ),
    "output_transformer_ct": (
        "p1 ct p2 s1 s2",
        "zp=8000 zs=8 rp=200 rs=0.5 l=40 leak=0.005",
        _OUTPUT
        + "Rp1 p1 a {rp/2}\nLp1 a ct {l/4}\nRp2 p2 b {rp/2}\nLp2 ct b {l/4}\n"
        + "Rs s1 s {rs}\nLs s s2 {ls}\n"
        + "K12 Lp1 Lp2 {k}\nK1s Lp1 Ls {k}\nK2s Lp2 Ls {k}\n",
    ),
}

MEANINGS = {
    "vp": "primary voltage, rms",
    "vs": "secondary voltage, rms, unloaded; of each half with a centre tap",
    "zp": "matched primary impedance, ohm; from plate to plate with a centre tap",
    "zs": "matched load, ohm",
    "rp": "resistance of the primary, ohm; end to end",
    "rs": "resistance of the secondary, ohm; of each half with a centre tap",
    "im": "magnetising current at vp and f, A; about a tenth of the rated one (common practice)",
    "f": "frequency for im, Hz",
    "k": "coupling",
    "l": "inductance, H; of the whole primary of an output transformer, 10 H is usual",
    "leak": "leakage inductance over l; 0.005 is usual (common practice)",
    "r": "resistance, ohm",
}


def subcircuit(name: str) -> str | None:
    """Return the `.subckt` of a built-in wound part, or None; `MEANINGS` tells its parameters."""
    found = SUBCIRCUITS.get(name.lower())
    if found is None:
        return None
    pins, parameters, cards = found
    return f".subckt {name} {pins} {parameters}\n{cards}.ends {name}\n"


@dataclass(frozen=True, slots=True, kw_only=True)
class Winding:
    """A winding of a transformer.

    Attributes:
        nodes: Start and end; the starts of all windings are in phase.
        voltage_V: rms: of a secondary at `rated_A`; unloaded where `rated_A` is 0.
        resistance_ohm: Of the wire at direct current.
        rated_A: rms load current of a secondary.
    """

    nodes: tuple[str, str]
    voltage_V: float = field(metadata=unit("V"))
    resistance_ohm: float = field(metadata=unit("ohm"))
    rated_A: float = field(default=0.0, metadata=unit("A"))


def power_transformer(
    name: str, *, primary: Winding, secondaries: Sequence[Winding], frequency_Hz: float = 60.0
) -> str:
    """Return the cards of a power transformer.

    The turns are chosen so that each secondary gives its voltage with every secondary at its
    rated resistive current; the primary's rated current is that of all of them together.

    Args:
        name: Designator such as "T1"; the cards are LT1_1, RT1_1, KT1_12 …
        primary: `rated_A` is not read.
        secondaries: At least one.
        frequency_Hz: Of the line.

    Raises:
        ValueError: No secondary, or a voltage or resistance that is not positive.
    """
    if not secondaries:
        raise ValueError(f"{name}: a power transformer needs a secondary")
    for winding in (primary, *secondaries):
        if winding.voltage_V <= 0 or winding.resistance_ohm <= 0:
            raise ValueError(f"{name}: voltages and resistances must be positive")
    load_VA = sum(w.voltage_V * w.rated_A for w in secondaries)
    primary_A = load_VA / primary.voltage_V
    inner_V = primary.voltage_V - primary_A * primary.resistance_ohm
    if inner_V <= 0:
        raise ValueError(f"{name}: the primary's resistance leaves nothing at that load")
    rated_A = primary_A or 0.1  # with no load stated, that of a small transformer
    primary_H = primary.voltage_V / (2 * pi * frequency_Hz * MAGNETISING_SHARE * rated_A)
    ratios = [1.0]
    ratios += [(w.voltage_V + w.rated_A * w.resistance_ohm) / inner_V for w in secondaries]
    leakage = LEAKAGE_SHARE * MAGNETISING_SHARE
    inductances = [primary_H * ratio**2 for ratio in ratios]
    return _coupled(name, (primary, *secondaries), inductances, coupling=1 - leakage / 2)


def output_transformer(
    name: str,
    *,
    primary: tuple[str, ...],
    secondary: tuple[str, str],
    primary_impedance_ohm: float,
    load_ohm: float,
    primary_ohm: float,
    secondary_ohm: float,
    primary_H: float = OUTPUT_PRIMARY_H,
) -> str:
    """Return the cards of an output transformer.

    Args:
        name: Designator.
        primary: Two nodes, or three with the centre tap in the middle.
        secondary: Two nodes.
        primary_impedance_ohm: That the tubes see (plate to plate) with `load_ohm`.
        load_ohm: The loudspeaker's.
        primary_ohm, secondary_ohm: Of the wire; the primary's end to end.
        primary_H: End to end.

    Raises:
        ValueError: A value that is not positive, or another number of nodes.
    """
    values = (primary_impedance_ohm, load_ohm, primary_ohm, secondary_ohm, primary_H)
    if min(values) <= 0 or len(primary) not in (2, 3):
        raise ValueError(f"{name}: values must be positive and the primary has 2 or 3 nodes")
    halves = len(primary) - 1
    windings = [
        Winding(nodes=pair, voltage_V=1.0, resistance_ohm=primary_ohm / halves)
        for pair in pairwise(primary)
    ]
    windings.append(Winding(nodes=secondary, voltage_V=1.0, resistance_ohm=secondary_ohm))
    ratio = sqrt(load_ohm / primary_impedance_ohm)
    inductances = [primary_H / halves**2] * halves + [primary_H * ratio**2]
    return _coupled(name, windings, inductances, coupling=1 - OUTPUT_LEAKAGE_SHARE / 2)


def choke(name: str, *, nodes: tuple[str, str], inductance_H: float, resistance_ohm: float) -> str:
    """Return the cards of a choke.

    Raises:
        ValueError: A value that is not positive.
    """
    if inductance_H <= 0 or resistance_ohm <= 0:
        raise ValueError(f"{name}: inductance and resistance must be positive")
    winding = Winding(nodes=nodes, voltage_V=1.0, resistance_ohm=resistance_ohm)
    return _coupled(name, [winding], [inductance_H], coupling=0.0)


def _coupled(
    name: str, windings: Sequence[Winding], inductances: Sequence[float], *, coupling: float
) -> str:
    """Return R and L of every winding, and K for every pair; one coupling for all is physical."""
    lines = []
    for number, (winding, henry) in enumerate(zip(windings, inductances, strict=True), 1):
        start, end = winding.nodes
        inner = f"{name}_{number}"
        lines.append(f"R{name}_{number} {start} {inner} {winding.resistance_ohm:.6g}")
        lines.append(f"L{name}_{number} {inner} {end} {henry:.6g}")
    for one, other in combinations(range(1, len(windings) + 1), 2):
        lines.append(f"K{name}_{one}{other} L{name}_{one} L{name}_{other} {coupling:.6g}")
    return "\n".join(lines) + "\n"
