from math import inf

import pytest

from stress.judge.abort import aborts, shown, steps
from stress.study.fault import Fault
from stress.study.power_result import Band, Danger, Kind, Probe, Ramp, RampStep, Seen
from stress.study.tell_tale import tell_tales


def probe(key, kind=Kind.DC_V, effort=1):
    return Probe(key=key, kind=kind, node=key, text=key, effort=effort)


LINE = probe("line", Kind.LINE_A, 0)
SUPPLY = probe("b1")
GRID = probe("g4", effort=3)
PROBES = (LINE, SUPPLY, GRID)
BANDS = (
    Band(probe="line", value=0.5, low=0.4, high=0.6, shown=0.5),
    Band(probe="b1", value=250.0, low=220.0, high=280.0, shown=250.0),
    Band(probe="g4", value=0.0, low=-0.1, high=0.1, shown=0.0),
)
SHORT = Danger(fault=Fault(position="C18", kind="short"), victim=None, condition="high")
COUPLING = Danger(fault=Fault(position="C13", kind="leaky", ohm=5e6), victim=None, condition="high")
HIDDEN = Danger(fault=Fault(position="C14", kind="leaky", ohm=300.0), victim=None, condition="high")
HEALTHY = {"line": 0.5, "b1": 250.0, "g4": 0.0}


def step(name, *seen, share=1.0):
    return RampStep(name=name, share=share, line_V=117.0 * share, bands=BANDS, seen=seen)


def seen(danger, **values):
    return Seen(danger=danger, values={**HEALTHY, **values})


def test_fewest_readings_that_catch_every_fault():
    """The short shows at the line and at B+, the coupling leak at the grid alone."""
    at = step("nominal", seen(SHORT, line=0.9, b1=40.0), seen(COUPLING, g4=12.0))
    found = {stop.probe: stop for stop in aborts(at, PROBES)}
    assert set(found) == {"line", "g4"}
    assert found["line"].above
    assert found["line"].limit == 0.6
    assert found["line"].tells == ("C18 short",)
    assert found["g4"].tells == ("C13 leaky 5 MΩ",)


def test_reading_in_its_band_is_no_abort():
    assert shown(seen(SHORT, line=0.59, b1=221.0), step("nominal"), PROBES) == []


def test_reading_below_the_band_stops_below():
    at = step("nominal", seen(SHORT, b1=100.0))
    (stop,) = aborts(at, PROBES)
    assert (stop.probe, stop.above, stop.limit) == ("b1", False, 220.0)


def test_limit_is_what_the_meter_shows():
    """A meter that reads 40 V where 50 V are there moves the ends of the band alike."""
    loaded = Band(probe="b1", value=50.0, low=45.0, high=55.0, shown=40.0)
    at = RampStep(
        name="nominal", share=1.0, line_V=117.0, bands=(loaded,), seen=(seen(SHORT, b1=20.0),)
    )
    (stop,) = aborts(at, (SUPPLY,))
    assert stop.limit == pytest.approx(36.0)


def test_step_says_what_nothing_tells_and_what_is_late():
    plan = steps(
        Ramp(
            probes=PROBES,
            steps=(
                step("60 %", seen(SHORT, line=0.9), seen(COUPLING), seen(HIDDEN), share=0.6),
                step("nominal", seen(SHORT, line=0.9), seen(COUPLING, g4=3.0), seen(HIDDEN)),
                step("high", share=1.08),
            ),
            dangers=(SHORT, COUPLING, HIDDEN),
        )
    )
    assert plan[0].cannot_tell == ("C13 leaky 5 MΩ", "C14 leaky 300 Ω")
    assert plan[1].cannot_tell == ("C14 leaky 300 Ω",)
    # the highest line has no faults of its own: the readings of the step before it stop it
    assert [stop.probe for stop in plan[2].aborts] == [stop.probe for stop in plan[1].aborts]
    assert plan[2].cannot_tell == ("C14 leaky 300 Ω",)


def test_tell_tale_is_the_easiest_clear_reading_of_the_earliest_step():
    ramp = Ramp(
        probes=PROBES,
        steps=(
            step("60 %", seen(SHORT), seen(HIDDEN), share=0.6),
            step("nominal", seen(SHORT, line=0.9, b1=90.0), seen(HIDDEN)),
        ),
        dangers=(SHORT, HIDDEN),
    )
    first, second = tell_tales(ramp)
    assert first.step == "nominal"
    assert [key for key, _, _ in first.readings] == ["line", "b1"]
    assert second.readings == ()
    assert "bench" in second.text


def test_ohmmeter_stops_below_its_limit_only():
    ohms = probe("b1 ohms", Kind.OHM)
    dead = RampStep(
        name="plug out",
        share=0.0,
        line_V=0.0,
        bands=(Band(probe="b1 ohms", value=inf, low=10e3, high=inf, shown=inf),),
        seen=(Seen(danger=SHORT, values={"b1 ohms": 0.1}),),
    )
    (stop,) = aborts(dead, (ohms,))
    assert not stop.above
    assert stop.limit == 10e3
    found = tell_tales(Ramp(probes=(ohms,), steps=(dead,), dangers=(SHORT,)))
    assert found[0].readings == ()
