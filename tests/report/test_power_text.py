from io import StringIO

import pytest
from rich.console import Console

from stress.circuit.circuit import Circuit, Line
from stress.finding import Severity
from stress.netlist.flat import Netlist
from stress.parts.sheet import Sheet
from stress.report.power_text import print_power_up
from stress.study.fault import Fault
from stress.study.power_result import (
    Abort,
    Band,
    Danger,
    Kind,
    Lamp,
    LampReading,
    Method,
    Peak,
    PowerUp,
    Probe,
    RampStep,
    Seen,
    Step,
    SwitchOn,
    TellTale,
    Way,
    Work,
)

PROBES = (
    Probe(key="line current", kind=Kind.LINE_A, node="", text="line current", effort=0),
    Probe(key="nb DC volts", kind=Kind.DC_V, node="nb", text="at C7 (nb)", effort=1),
    Probe(
        key="sw DC volts", kind=Kind.DC_V, node="sw", text="collector of Q1 (sw)", effort=3,
        forbidden="fast pulses of 600 V",
    ),
)  # fmt: skip
BANDS = (
    Band(probe="line current", value=0.5, low=0.4, high=0.6, shown=0.5),
    Band(probe="nb DC volts", value=-50.0, low=-56.0, high=-44.0, shown=-40.0),
)
DANGER = Danger(fault=Fault(position="C7", kind="open"), victim=None, condition="nominal")


@pytest.fixture
def printed():
    ramp = RampStep(
        name="line at 80 %", share=0.8, line_V=176.0, bands=BANDS, seen=(Seen(danger=DANGER),)
    )
    step = Step(
        ramp=ramp,
        text="XV4 begins to conduct",
        aborts=(
            Abort(probe="nb DC volts", above=True, limit=-35.2, tells=("C7 open", "C7 short")),
            Abort(probe="line current", above=True, limit=0.6, tells=("C1 short",)),
        ),
        cannot_tell=("C13 leaky 117 Ω",),
        late=("C7 open",),
    )
    lost = LampReading(
        fault="C1 short", lamp_V=0.0, equipment_V=0.0, current_A=0.0, glow=0.0, tells=False
    )
    plan = PowerUp(
        method=Method(
            way=Way.RAMP, text="Slowly.", reasons=("a dry rectifier",), before=("Look.",),
            refused=("Never at once.",),
        ),
        work=(
            Work(severity=Severity.REPLACE, where="C13", text="it leaks"),
            Work(severity=Severity.WATCH, where="C3", text="not printed"),
        ),
        probes=PROBES,
        steps=(step,),
        lamp=Lamp(rated_W=60.0, rated_V=220.0, healthy=None, faulty=(lost,), text="No leaks."),
        tell_tales=(
            TellTale(
                position="C7", fault="C7 open", readings=(("nb DC volts", -40.0, -12.0),),
                step="line at 80 %",
            ),
        ),
        switch_on=SwitchOn(
            peaks=(Peak(part="C7", quantity="voltage_V", cold=74.0, hot=70.0, phase_deg=90.0),),
            seconds=0.1,
        ),
        cautions=("High voltage kills.",),
        missing=("Iron loss.",),
    )  # fmt: skip
    netlist = Netlist(path="set.cir", title="set", elements=())
    circuit = Circuit(
        netlist=netlist, sheet=Sheet(), name="Set", positions=(), parts=(), line=Line()
    )
    out = StringIO()
    print_power_up(plan, circuit, Console(file=out, width=100))
    return " ".join(out.getvalue().split())


@pytest.mark.parametrize(
    "words",
    [
        "Method: slow ramp",
        "! Never at once.",
        "C13 replace before power: it leaks",
        "watch: C3",
        "1. Look.",
        "at C7 (nb) -40 V",
        "nb -50 V without it, -40 V with it",
        "80 %: 176 V; XV4 begins to conduct",
        "stop DC volts at C7 (nb) less negative than -35.2 V: C7 open, short",
        "stop line current above 600 mA: C1 short",
        "past a limit already here, so read first and quickly: C7 open",
        "nothing up to here tells: C13 leaky",
        "Do not measure here - collector of Q1 (sw): fast pulses of 600 V",
        "filament lamp of 60 W, 220 V",
        "C7 open, step line at 80 %: DC volts at C7 (nb) -40 V when healthy, -12 V",
        "C7 voltage 74 V 70 V 90°",
        "Iron loss.",
        "High voltage kills.",
    ],
)
def test_plan_says(printed, words):
    assert words in printed


def test_forbidden_places_have_no_reading(printed):
    assert "sw) -" not in printed.split("Do not measure here")[0]
