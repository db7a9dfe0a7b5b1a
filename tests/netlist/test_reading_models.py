"""Model cards, where they are found, and what instances share."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from stress.netlist.flat import Netlist
from stress.netlist.write import write

Reading = Callable[..., Netlist]

CARDS = [
    (".model dx D(IS=1n RS=2)", {"is": 1e-9, "rs": 2.0}),
    (".model dx D IS=1n RS=2", {"is": 1e-9, "rs": 2.0}),
    (".model dx D(IS = 1n, RS = 2)", {"is": 1e-9, "rs": 2.0}),
    (".model dx D (IS 1n RS 2)", {"is": 1e-9, "rs": 2.0}),
    (".model dx D(IS={2*1n} RS='1+1')", {"is": 2e-9, "rs": 2.0}),
    (".model dx D(IS=1n\n+ RS=2\n* remark\n+ N=1.5)", {"is": 1e-9, "rs": 2.0, "n": 1.5}),
    (".model dx D(IS=1n mfg=Maker type=silicon Vpk=75)", {"is": 1e-9}),
    ('.model dx D(IS=1n desc="of two words")', {"is": 1e-9}),
    (".model dx D(IS=1n DEV=5% LOT 10% RS=2)", {"is": 1e-9, "rs": 2.0}),
    (".model dx D", {}),
    (".model dx D()", {}),
]


@pytest.mark.parametrize(("card", "parameters"), CARDS, ids=[card for card, _ in CARDS])
def test_model_card(card: str, parameters: dict[str, float], reading: Reading):
    netlist = reading(f"{card}\nD1 a 0 dx")

    assert netlist.models["dx"].kind == "d"
    assert netlist.models["dx"].parameters == pytest.approx(parameters)


def test_inner_model_hides_the_outer_and_equal_ones_are_shared(reading: Reading):
    netlist = reading(
        "D1 a 0 dx\nX1 a s\nX2 a s\nX3 a t i=2n\nX4 a t i=3n\n.model dx D(IS=1n)\n"
        ".subckt s p\n.model dx D(IS=9n)\nD1 p 0 dx\n.ends\n"
        ".subckt t p i=1n\n.model dx D(IS={i})\nD1 p 0 dx\n.ends"
    )

    used = {e.name: netlist.models[e.model].parameters["is"] for e in netlist.elements}
    assert used == pytest.approx(
        {"D1": 1e-9, "X1.D1": 9e-9, "X2.D1": 9e-9, "X3.D1": 2e-9, "X4.D1": 3e-9}
    )
    assert len(netlist.models) == 4


def test_first_model_of_a_name_counts(reading: Reading):
    """As in ngspice, which takes no notice of the second one."""
    netlist = reading("D1 a 0 dx\n.model dx D(IS=1n)\n.model dx D(IS=2n)")

    assert netlist.models["dx"].parameters == {"is": 1e-9}


def test_ako_takes_over_what_it_does_not_change(reading: Reading):
    netlist = reading(
        "Q1 c b e qy\n.model qx NPN(IS=1f BF=100 VAF=50)\n.model qy AKO: qx NPN(BF=200)"
    )

    assert netlist.models["qy"].parameters == {"is": 1e-15, "bf": 200.0, "vaf": 50.0}


def test_ako_that_is_like_itself_is_an_obstacle(reading: Reading):
    netlist = reading("Q1 c b e qx\n.model qx AKO:qy NPN\n.model qy AKO:qx NPN")

    assert "is missing" in netlist.obstacles[0].message


@pytest.mark.parametrize(("width", "model"), [("5u", "nch.1"), ("50u", "nch.2")])
def test_family_of_models_by_length_and_width(width: str, model: str, reading: Reading):
    netlist = reading(
        f"M1 d g s b nch l=1u w={width}\n"
        ".model nch.1 NMOS(LEVEL=1 LMIN=0.1u LMAX=20u WMIN=0.1u WMAX=10u)\n"
        ".model nch.2 NMOS(LEVEL=1 LMIN=0.1u LMAX=20u WMIN=10u WMAX=100u)"
    )

    assert netlist.elements[0].model == model


def test_device_on_a_mesh_goes_through_line_by_line(reading: Reading):
    netlist = reading("D1 a 0 dm\n.model dm numd level=1\n+ x.mesh l=0 n=1\n+ domain num=1")

    assert write(netlist).split("\n")[2:5] == [
        ".model dm numd level=1",
        "+ x.mesh l=0 n=1",
        "+ domain num=1",
    ]


def test_model_of_another_kind_is_an_error(errors_of: Callable[[str], str]):
    assert errors_of("Q1 c b e dx\n.model dx D").startswith(
        'set.cir:2:10: the model "dx" is of kind D, Q1 needs NPN or PNP\n'
    )


def test_reverse_and_rounded_corners_of_a_piecewise_linear_diode(reading: Reading):
    """VREV, EPSILON and ILIMIT change the law at their place only."""
    from stress.netlist.evaluate import evaluate

    law = (
        reading("D1 a 0 dx\n.model dx D(Ron=1 Roff=1G Vfwd=1 Vrev=10 Rrev=2 epsilon=0.2 ilimit=5)")
        .elements[0]
        .law
    )
    assert law is not None

    def current(volts: float) -> float:
        return evaluate(law.expression, voltages={"a": volts})

    assert current(0.5) == pytest.approx(0.5e-9)
    assert current(1.0) == pytest.approx(0.2 / 8, rel=1e-3)  # the parabola at its middle
    assert current(2.0) == pytest.approx(5 * 0.197375, rel=1e-3)  # 5 tanh(1/5)
    assert current(100.0) == pytest.approx(5.0, rel=1e-3)
    assert current(-9.0) == pytest.approx(-9e-9)
    assert current(-12.0) == pytest.approx(-1.0, rel=1e-6)
