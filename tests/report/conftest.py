"""A review written by hand, with everything that a renderer can meet: victims, unknown values,
unsolved and wandering cases, a position without any answer, and names that mean mischief."""

from dataclasses import dataclass

import numpy as np
import pytest

from stress.circuit.circuit import Circuit, Kind, Line, Part, Position, Role
from stress.engine.case import Proof
from stress.engine.solver import Versions
from stress.finding import Finding, Severity
from stress.netlist.flat import Element, Netlist
from stress.parts.limit import Limit, Rating
from stress.parts.sheet import Sheet
from stress.study.result import (
    Bench,
    Condition,
    CurvePoint,
    Failure,
    Leakage,
    LeakageIn,
    PositionStress,
    Replacement,
    Review,
    Risk,
    Run,
    Surge,
    Trace,
    Unanswered,
    Victim,
    Working,
    Worst,
)
from stress.text.span import Span

SPAN = Span("lantern.cir", 3, 1, 2, "C5 p1 g2 0.02u")
MISCHIEF = "C\"'<script>alert(1)</script>"
PERIOD_s = 0.02
TIME_s = np.linspace(0.0, PERIOD_s, 121)


@dataclass(frozen=True)
class Stuff:
    """What the renderers ask of a style."""

    name: str
    text: str
    polar: bool
    surge: float = 1.0

    def surge_V(self, rated_V):
        return self.surge * rated_V


PAPER = Stuff("paper", "waxed paper", False)
ALUMINIUM = Stuff("aluminium", "aluminium electrolytic", True, 1.1)


def position(name, nodes, role, text, style=PAPER, **more):
    more.setdefault("value_F", 0.02e-6)
    more.setdefault("rated_V", 400.0)
    return Position(
        name=name,
        nodes=nodes,
        role=role,
        role_text=text,
        style=style,
        style_source="sheet",
        span=SPAN,
        **more,
    )


POSITIONS = (
    position("C1", ("bplus", "0"), Role.RESERVOIR, "reservoir at the cathode of XV1", ALUMINIUM,
             value_F=8e-6, rated_V=450.0, plus=0),
    position("C2", ("avc", "0"), Role.AVC, "AVC filter at the grid of XU1", value_F=0.05e-6,
             rated_V=200.0),
    position("C5", ("p1", "g2"), Role.COUPLING, "coupling, plate of XU1 to grid of XU2"),
    position("C7", ("k2", "0"), Role.CATHODE_BYPASS, "cathode bypass of XU2", ALUMINIUM,
             value_F=25e-6, rated_V=None, plus=0),
    position("X3.C9", ("line", "neutral"), Role.LINE_ACROSS, "across the line", value_F=0.01e-6),
    position(MISCHIEF, ("x", "y"), Role.UNKNOWN, "role not recognised", value_F=None,
             rated_V=None),
)  # fmt: skip

RESISTORS = (("Rp", "bplus", "p1"), ("Rg2", "g2", "0"), ("Rk2", "k2", "0"), ("R9", "bplus", "0"))
ELEMENTS = (
    *(
        Element(name=p.name, letter="C", nodes=p.nodes, value=p.value_F, span=SPAN)
        for p in POSITIONS
    ),
    *(Element(name=n, letter="R", nodes=(a, b), value=1e5, span=SPAN) for n, a, b in RESISTORS),
)

LIMIT_PLATE = Limit(value=12.0, source="RCA Receiving Tube Manual RC-19 (specimen of a source)")
PARTS = (
    Part(name="XU1", kind=Kind.TUBE, type="", span=SPAN,
         pins={"plate": "p1", "grid": "avc", "cathode": "0"}),
    Part(name="XU2", kind=Kind.TUBE, type="6V6GT", span=SPAN,
         pins={"plate": "bplus", "grid": "g2", "cathode": "k2"},
         limits={"plate_W": LIMIT_PLATE,
                 "cathode_A": Limit(value=0.1, source="sheet", rating=Rating.ABSOLUTE)}),
    Part(name="Rk2", kind=Kind.RESISTOR, value=270.0, span=SPAN,
         limits={"power_W": Limit(value=1.0, source="size of the body", assumed=True)}),
    Part(name="R9", kind=Kind.RESISTOR, value=10e3, span=SPAN,
         limits={"power_W": Limit(value=1.0, source="sheet", rating=Rating.ABSOLUTE)}),
)  # fmt: skip

CONDITIONS = (
    Condition(name="nominal", line_V=230.0, text="tubes warm, signals muted"),
    Condition(name="high", line_V=253.0, factor=1.1, text="as nominal, line high"),
    Condition(name="cold", line_V=253.0, factor=1.1, cold=True, lasts=False,
              text="tubes without emission"),
    Condition(name="pulled XU2", line_V=253.0, factor=1.1, pulled=("XU2",), text="XU2 pulled"),
)  # fmt: skip


def bears(case, dc, peak, *, reverse=None, ripple_pp=0.0, ripple_A=0.0, spectrum=()):
    return PositionStress(
        case=case,
        dc_V=dc,
        peak_V=peak,
        reverse_V=reverse,
        ripple_pp_V=ripple_pp,
        ripple_rms_A=ripple_A,
        esr_loss_W=ripple_A**2 * 4.0,
        error_V=dc * 2e-5,
        ripple_Hz=spectrum[0][0] if spectrum else None,
        spectrum=spectrum,
    )


LINES_C1 = tuple((100.0 * n, 0.071 / n) for n in range(1, 9))
BORNE = {
    "C1": {
        "nominal": bears("nominal", 262.4567, 271.2, reverse=0.0, ripple_pp=17.6,
                         ripple_A=0.08123456, spectrum=LINES_C1),
        "high": bears("high", 288.9, 299.0, reverse=0.0, ripple_pp=19.1, ripple_A=0.0889),
        "cold": bears("cold", 419.7, 420.1, reverse=0.0),
    },
    "C2": {"nominal": bears("nominal", -1.4, 1.41), "high": bears("high", -1.6, 1.61)},
    "C5": {
        "nominal": bears("nominal", 98.76543, 99.1, ripple_pp=0.4, ripple_A=1.2e-6),
        "high": bears("high", 108.6, 109.0),
        "cold": bears("cold", 420.04, 420.1),
    },
    "C7": {"nominal": bears("nominal", 12.5, 12.6, reverse=0.0)},
    "X3.C9": {"nominal": bears("nominal", 0.0, 325.3, ripple_A=0.72e-3)},
}  # fmt: skip


def proof(**more):
    stated = {"distance": 3e-6, "residual": 4e-7, "cycles": 17, "jacobian_cycles": 9,
              "multiplier": 0.9731, "points": 179, "method": "cycle map"}  # fmt: skip
    return Proof(**stated | more)


UNSETTLED = Unanswered(case="pulled XU2", kind="does not settle", text="motorboats at 3 Hz")
WORKING = Working(
    conditions=CONDITIONS,
    positions=BORNE,
    parts={
        "XU2": {
            "nominal": {"plate_W": 9.87654, "cathode_A": 0.0462},
            "high": {"plate_W": 12.5, "cathode_A": 0.0523},
        },
        "Rk2": {"nominal": {"power_W": 0.576}, "high": {"power_W": 0.7385}},
        "R9": {"nominal": {"power_W": 0.91}, "high": {"power_W": 1.10}},
    },
    nodes={"bplus": {"nominal": 262.4567}},
    traces={
        "C1": (
            Trace(
                condition="nominal",
                time_s=TIME_s,
                voltage_V=262.4567 + 8.8 * np.cos(4 * np.pi * TIME_s / PERIOD_s),
                current_A=-0.115 * np.sin(4 * np.pi * TIME_s / PERIOD_s),
            ),
        )
    },
    proofs={"nominal": proof(), "high": proof(cycles=4, jacobian_cycles=0),
            "cold": proof(method="plain transient", multiplier=None, cycles=900)},
    inrush={"C1": Surge(case="inrush at 90°, 0.2 s", peak_V=431.5, reverse_V=0.0, phase_deg=90.0)},
    unanswered=(UNSETTLED,),
    notices=("node x3.m was tied to ground by 100 GΩ",),
)  # fmt: skip


def point(ohm, plate_W, cathode_A, grid_V):
    return CurvePoint(
        ohm=ohm,
        leak_A=grid_V / 470e3,
        stresses={"XU2": {"plate_W": plate_W, "cathode_A": cathode_A},
                  "Rk2": {"power_W": cathode_A**2 * 270.0}},
        nodes={"g2": grid_V, "k2": cathode_A * 270.0},
    )  # fmt: skip


LOST = Unanswered(case="high / C5 leaky 10 kohm", kind="unsolved", text="timestep too small")
CURVE = (
    point(1e10, 9.87654, 0.0462, 0.0046),
    point(24.3e6, 10.4, 0.0508, 1.83),
    point(3.9123e6, 12.0, 0.0601, 9.4),
    point(1e6, 16.2, 0.0874, 24.6),
    point(1e5, 19.9, 0.1162, 41.0),
    CurvePoint(ohm=1e4, leak_A=0.0, stresses={}, unanswered=LOST),
)
BURNT = Victim(part="XU2", quantity="plate_W", stress=12.0, limit=LIMIT_PLATE, healthy=9.87654)
LEAK_NOMINAL = LeakageIn(
    condition="nominal",
    critical_ohm=3.9123e6,
    critical_A=2.4e-5,
    victim=BURNT,
    functional_ohm=24.3e6,
    functional_reason="the bias of XU2 moves by 10 %",
    governs=True,
    curve=CURVE,
    unanswered=(LOST,),
)
LEAK_HIGH = LeakageIn(condition="high", critical_ohm=None, critical_A=None, victim=None,
                      unanswered=(LOST,))  # fmt: skip
NO_DAMAGE = LeakageIn(
    condition="nominal",
    critical_ohm=None,
    critical_A=None,
    victim=None,
    functional_ohm=1.2e9,
    functional_reason="the AVC line loses 10 %",
    governs=True,
)
LEAKAGE = {
    "C7": Leakage(position="C7", governing=None, by_condition=(), text="nothing settled"),
    "C2": Leakage(position="C2", governing=NO_DAMAGE, by_condition=(NO_DAMAGE,)),
    "C5": Leakage(position="C5", governing=LEAK_NOMINAL, by_condition=(LEAK_NOMINAL, LEAK_HIGH)),
    "X3.C9": Leakage(position="X3.C9", governing=None, by_condition=(), limited=False),
}


def failure(name, fault, text, *, victims=(), dangerous=False, **more):
    return Failure(position=name, fault=fault, condition="nominal", victims=victims, text=text,
                   dangerous=dangerous, **more)  # fmt: skip


FAILURES = {
    "C5": (
        failure("C5", "short", "the grid of XU2 rises 61 V.", dangerous=True, victims=(
            Victim(part="XU2", quantity="cathode_A", stress=0.1314, limit=PARTS[1].limits["cathode_A"],
                   after_s=60.0, after_text="a minute or so"),)),
        failure("C5", "open", "no signal passes.", consequences=("silence",)),
    ),
    "X3.C9": (failure("X3.C9", "short", "the fuse or the wiring decides.", dangerous=True,
                      unanswered=Unanswered(case="x", kind="not limited by the netlist", text="")),),
}  # fmt: skip
REPLACEMENTS = {
    "C1": Replacement(position="C1", value_F=10e-6, rated_V=450.0, style="aluminium",
                      ripple_rms_A=0.12, reason="next value above 8 µF; cold tubes at high line"),
    "C5": Replacement(position="C5", value_F=0.022e-6, rated_V=630.0, style="film",
                      ripple_rms_A=None, reason="420 V at 70 % of the rating",
                      rules=("default policy: film at 70 %",), notes=("outer foil to the plate",)),
    "X3.C9": Replacement(position="X3.C9", value_F=0.01e-6, rated_V=None, style="line-X",
                         ripple_rms_A=None, reason="across the line", ac_V=275.0,
                         safety_class="X2"),
}  # fmt: skip
BENCH = {
    "C5": Bench(position="C5", test_V=400.0, leakage_max_A=4.8e-7, leakage_reason="critical",
                esr_max_ohm=None, esr_Hz=None, esr_reason="no ripple to speak of",
                value_min_F=0.018e-6, value_max_F=0.027e-6, hot_factor=16.0,
                in_leakage="lift one lead", in_esr=None, in_capacitance="lift one lead"),
    "C1": Bench(position="C1", test_V=420.0, leakage_max_A=None, leakage_reason="not judged",
                esr_max_ohm=12.3, esr_Hz=100.0, esr_reason="ripple", value_min_F=6.4e-6,
                value_max_F=16e-6, in_esr="in place", in_capacitance="in place",
                in_leakage="lift one lead"),
}  # fmt: skip
RISKS = (
    Risk(position="C5", rank=1, severity=Severity.REPLACE, reason="its leak burns XU2",
         consequence=9.0, likelihood=8.0),
    Risk(position="X3.C9", rank=2, severity=Severity.REPLACE, reason="it stands across the line"),
    Risk(position="C1", rank=3, severity=Severity.TEST, reason="a short burns XV1"),
    Risk(position="C2", rank=4, severity=Severity.WATCH, reason="its leak only costs AVC"),
    Risk(position="C7", rank=5, severity=Severity.NOTE, reason="nothing burns"),
)  # fmt: skip
FINDINGS = (
    Finding(severity=Severity.REPLACE, where="C5", text="Below 3.91 MΩ XU2 passes its plate limit.",
            action="Fit 0.022 µF film, 630 V.", condition="nominal", rule="critical-leakage"),
    Finding(severity=Severity.REPLACE, where="C5", text="it may be the first to go",
            action="look at its wax"),
    Finding(severity=Severity.REPLACE, where="equipment", text="The chassis may be live.",
            action="Use an isolation transformer."),
    Finding(severity=Severity.WATCH, where="R9", text="R9 bears 1.1 W of its 1 W when healthy.",
            condition="high", rule="absolute-limit", span=SPAN),
    Finding(severity=Severity.NOTE, where="pulled XU2", text="Motorboats at 3 Hz.",
            condition="pulled XU2"),
)  # fmt: skip
EXPLANATIONS = {
    "C5": ("bears 98.8 V, but 420 V with the tubes cold at high line: fit 0.022 µF film, 630 V",
           "replace before any power: below 3.91 MΩ of leakage XU2 passes its plate limit; its "
           "bias moves by a tenth from 24.3 MΩ on"),
    "C1": ("bears 262 V",),
}  # fmt: skip


def written_by_hand():
    return Review(
        circuit=Circuit(
            netlist=Netlist(path="lantern.cir", title="lantern", elements=ELEMENTS),
            sheet=Sheet(path="lantern.toml"),
            name="Lantern room monitor",
            positions=POSITIONS,
            parts=PARTS,
            line=Line(sources=("Vline",), nominal_V=230.0, high_V=253.0),
            period_s=PERIOD_s,
            assumed=("high line 1.10 times nominal",),
        ),
        working=WORKING,
        worst={
            "C1": Worst(position="C1", worst_V=299.0, condition="high", brief_V=420.1,
                        brief_condition="cold"),
            "C2": Worst(position="C2", worst_V=1.61, condition="high"),
            "C5": Worst(position="C5", worst_V=420.04, condition="cold"),
            "C7": Worst(position="C7", worst_V=12.6, condition="nominal"),
            "X3.C9": Worst(position="X3.C9", worst_V=357.8, condition="high"),
        },
        leakage=LEAKAGE,
        failures=FAILURES,
        replacements=REPLACEMENTS,
        bench=BENCH,
        risks=RISKS,
        findings=FINDINGS,
        explanations=EXPLANATIONS,
        cautions=("Capacitors hold their charge: discharge, then measure.",
                  "The chassis may be live on either way of the plug."),
        run=Run(cases=123, unsolved=1, cycles=4567, wall_s=12.345),
        versions=Versions(ngspice="39", pyspice="1.5"),
        policy="common practice",
    )  # fmt: skip


@pytest.fixture(scope="session")
def specimen():
    return written_by_hand()
