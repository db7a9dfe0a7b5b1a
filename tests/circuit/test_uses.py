"""Which other uses are on offer: those that the graph shows to apply, and no others."""

import pytest

from stress.text.span import SourceErrors

RECEIVER = """
Vline l 0 SIN(0 165 60)
Lp l 0 5
La ha 0 30
Lb 0 hb 30
K1 Lp La 0.99
K2 Lp Lb 0.99
K3 La Lb 0.99
XR ha hb b0 5Y3GT
C1 b0 0 16u
{switch}
Lf bx fx 14
Rf fx b1 {field}
C2 b1 0 16u
Lop b1 ox 10
Rop ox p4 280
Los os 0 6m
K9 Lop Los 0.99
Rspk os 0 3.2
X4 p4 b1 g4 k4 6V6GT
Rk k4 0 270
Rg g4 0 470k
C3 in g4 20n
Vin in 0 SIN(0 1 400)
Rin in 0 1k
"""
SPEAKER = '[loudspeakers.Rspk]\npower = "4 W"\n'
TRANSMITTER = """
Vline l 0 SIN(0 165 60)
Lp l 0 5
La ha 0 30
K1 Lp La 0.99
D1 ha b0 DM
C1 b0 0 8u
Lbw bw 0 1
K2 Lp Lbw 0.99
K3 La Lbw 0.99
D2 nb bw DM
C2 nb 0 10u
Rb nb n1 10k
Rb2 n1 0 47k
C5 n1 0 10u
Lt b0 pf 1m
X1 pf b0 {grid} {cathode} PEN
{grid_circuit}
X2 pd gd kd TRI
Rkd kd 0 1k
Rpd b0 pd 10k
Rgd gd 0 100k
Vx x 0 SIN(0 5 1meg)
Cx x gd 100p
"""
BIASED = "Rg gf n1 100k\nCd pd gf 100p"
LEAK = "Rg gf 0 22k\nCd pd gf 100p"
SELF = "Rg gf 0 22k\nCd pd gf 100p\nRk kf 0 300"
HIGH_OHM = "Rg gf 0 4.7meg\nCd pd gf 100p"


def names(circuit):
    return {use.name: use for use in circuit.uses}


def receiver(switch="Rsw b0 bx 0.05", field="900"):
    return RECEIVER.format(switch=switch, field=field)


def test_a_receiver_is_offered_what_its_graph_shows(circuit):
    found = names(circuit(receiver(), SPEAKER))

    assert set(found) == {"standby", "speaker-out", "primary-out", "field-out", "silicon"}
    assert found["standby"].open == ("Rsw",)
    assert found["speaker-out"].open == ("Rspk",)
    assert found["primary-out"].open == ("Rop",)
    assert "screen of X4" in found["primary-out"].tests
    assert found["field-out"].open == ("Lf",)
    assert found["silicon"].silicon == ("XR",)


@pytest.mark.parametrize(
    ("text", "sheet", "missing"),
    [
        # a filter resistor is no contact; a contact in the line stops everything, no standby
        (receiver(switch="Rsw b0 bx 10"), SPEAKER, "standby"),
        (receiver(switch="Rsw b0 bx 10").replace("Lp l 0", "Rs l l2 0.05\nLp l2 0"), SPEAKER,
         "standby"),
        # a fuse in the B+ lead is no switch
        (receiver(), SPEAKER + '[fuses.Rsw]\ncurrent = "0.25 A"\n', "standby"),
        # a choke of 100 ohm is no field coil
        (receiver(field="100"), SPEAKER, "field-out"),
        # nobody said what the loudspeaker is, and the resistor is not named like one
        (receiver().replace("Rspk", "Rload"), "", "speaker-out"),
        (receiver().replace("Rspk", "Rload"), "", "primary-out"),
        # it has silicon already
        (receiver().replace("XR ha hb b0 5Y3GT", "D1 ha b0 DM\nD2 hb b0 DM"), SPEAKER, "silicon"),
        # 117 V is within what 120 V brings
        (receiver(), '[line]\nnominal = "117 V"\nhigh = "126 V"\n', "todays-line"),
        # the sheet has the same as its own
        (receiver(), SPEAKER + '[conditions.waiting]\nopen = ["Rsw"]\n', "standby"),
    ],
    ids=["resistor", "line-switch", "fuse", "choke", "no-speaker", "no-primary", "silicon", "117-V",
         "own"],
)  # fmt: skip
def test_what_does_not_apply_is_not_offered(circuit, text, sheet, missing):
    assert missing not in names(circuit(text, sheet))


def test_standby_between_the_winding_and_ground(circuit):
    text = receiver(switch="Rsw b0 bx 10").replace("La ha 0 30\nLb 0 hb", "La ha ct 30\nLb ct hb")
    found = names(circuit(text + "Rct ct 0 0.05\n", SPEAKER))
    assert found["standby"].open == ("Rct",)


@pytest.mark.parametrize(
    ("nominal", "high", "today"),
    [
        ("110 V", "121 V", (120.0, 126.0)),
        ("220 V", "242 V", (230.0, 253.0)),
        ("230 V", "253 V", None),
        ("117 V", "121 V", (120.0, 126.0)),  # its own high line is too low for today
        ("24 V", "28 V", None),
    ],
)
def test_an_old_line_is_offered_todays(circuit, nominal, high, today):
    sheet = f'[line]\nsource = "Vline"\nnominal = "{nominal}"\nhigh = "{high}"\n'
    use = names(circuit(receiver(), sheet)).get("todays-line")
    assert (use and (use.nominal_V, use.high_V)) == today


def test_a_bias_supply_with_a_rectifier_of_its_own_can_be_lost(circuit):
    text = TRANSMITTER.format(grid="gf", cathode="0", grid_circuit=BIASED)
    found = names(circuit(text))
    assert found["bias-lost"].open == ("D2",)
    assert "X1" in found["bias-lost"].tests
    assert "drive-lost" not in found


def test_a_stage_that_only_its_drive_biases_can_lose_it(circuit):
    text = TRANSMITTER.format(grid="gf", cathode="0", grid_circuit=LEAK)
    found = names(circuit(text))
    assert found["drive-lost"].pulled == ("X2",)
    assert "bias-lost" not in found  # nothing hangs on that supply


def test_a_silent_drive_is_said(circuit):
    text = TRANSMITTER.format(grid="gf", cathode="0", grid_circuit=LEAK)
    (said,) = [each for each in circuit(text).assumed if "silent" in each]
    assert "only its drive biases X1" in said
    driven = circuit(text, "[equipment]\ndriven = true\n")
    assert not [each for each in driven.assumed if "silent" in each]


def test_nobody_is_asked_to_pull_a_tube_of_a_series_string(circuit):
    text = TRANSMITTER.format(grid="gf", cathode="0", grid_circuit=LEAK)
    assert "drive-lost" not in names(circuit(text, '[equipment]\nheaters = "series"\n'))


@pytest.mark.parametrize("grid_circuit", [SELF, HIGH_OHM], ids=["cathode-bias", "contact-bias"])
def test_a_stage_with_another_bias_does_not_need_its_drive(circuit, grid_circuit):
    cathode = "kf" if "Rk" in grid_circuit else "0"
    text = TRANSMITTER.format(grid="gf", cathode=cathode, grid_circuit=grid_circuit)
    assert "drive-lost" not in names(circuit(text))


def test_error_the_sheet_asks_for_what_does_not_apply(circuit):
    with pytest.raises(SourceErrors) as caught:
        circuit(receiver(), '[equipment]\nconditions = ["bias-lost"]\n')
    (error,) = caught.value.errors
    assert "bias-lost" in str(error)
    assert "silicon" in str(error)
    assert "test.toml:2" in str(error)
