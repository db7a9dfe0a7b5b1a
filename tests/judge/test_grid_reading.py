"""What a meter shows of a voltage behind a resistance."""

import pytest

from stress.circuit.circuit import Circuit, Line
from stress.judge.grid_reading import meter_ohm, shown
from stress.netlist.flat import Netlist
from stress.parts.sheet import Sheet


def test_a_meter_loads_a_grid():
    # -6 V behind 2.2 MΩ on 10 MΩ: divider, -6 · 10 / 12.2 = -4.92 V.
    assert shown(-6.0, source_ohm=2.2e6, load_ohm=10e6) == pytest.approx(-4.92, abs=0.005)


@pytest.mark.parametrize(
    ("sheet", "volts", "ohm"),
    [
        (Sheet(), 6.0, 10e6),
        (Sheet(meter_ohm_per_V=20e3), 6.0, 200e3),  # on its 10 V range
        (Sheet(meter_ohm_per_V=1e3), -200.0, 250e3),  # on its 250 V range
    ],
)
def test_the_meter_of_the_sheet(sheet, volts, ohm):
    circuit = Circuit(
        netlist=Netlist(path="", title="", elements=()),
        sheet=sheet,
        name="",
        positions=(),
        parts=(),
        line=Line(),
    )

    assert meter_ohm(circuit, volts) == ohm
