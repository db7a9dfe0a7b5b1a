import pytest

from stress.judge.cautions import cautions
from stress.judge.power_caution import power_cautions
from stress.pipeline import load
from stress.study.result import PositionStress, Working

NOTHING = Working(conditions=(), positions={}, parts={})
LINE = """
Vline lh 0 SIN(0 325 50)
Rp lh lq 10
Lp lq 0 10
La ha 0 12
Ra ha pa 80
K1 Lp La 0.999
C1 b0 0 16u
Rl b0 0 10k
"""


@pytest.fixture
def circuit(tmp_path):
    def make(text, sheet=""):
        path = tmp_path / "set.cir"
        path.write_text(f"test set\n{LINE}{text}\n.end\n")
        path.with_suffix(".toml").write_text(sheet)
        return load(path)

    return make


@pytest.mark.parametrize(
    ("text", "sheet", "word"),
    [
        ("XV1 pa b0 866A", "", "mercury"),
        ("D1 pa b0 SELENIUM\n.model SELENIUM D(IS=1u N=10)", "", "selenium"),
        ("XV1 pa b0 0 5Y3GT", '[equipment]\nkind = "television"\n', "picture tube"),
        ("XV1 pa b0 0 5Y3GT", '[capacitors.C1]\nstyle = "paper-oil"\n', "pcb"),
        ("XV1 pa b0 0 5Y3GT", "", "residual-current device"),
    ],
)
def test_caution_by_what_the_circuit_is(circuit, text, sheet, word):
    found = power_cautions(circuit(text, sheet), working=NOTHING)
    assert any(word in caution.lower() for caution in found)
    assert len(found) == len(set(found))


@pytest.mark.parametrize(
    "word", ["mercury", "selenium", "picture tube", "pcb", "high-voltage supply"]
)
def test_no_caution_of_what_is_not_there(circuit, word):
    plain = circuit("XV1 pa b0 0 5Y3GT")
    assert not any(word in text.lower() for text in power_cautions(plain, working=NOTHING))


FEEDS = [
    (
        "Vline lh 0 SIN(0 325 50)\nRp lh lq 10\nLp lq 0 10\nLa ha 0 1\nK1 Lp La 0.999\nC1 ha 0 1u",
        True,
    ),
    # only the secondary is drawn: its primary hangs on the line
    ("Vline ha 0 SIN(0 17 50)\nD1 ha b0 D\nC1 b0 0 16u\nRl b0 0 10k\n.model D D", True),
    # direct current of the mains
    ("Vline lh 0 DC 220\nD1 lh b0 D\nC1 b0 0 16u\nRl b0 0 10k\n.model D D", True),
    ("Vline bat 0 DC 24\nRb bat b0 1\nC1 b0 0 16u\nRl b0 0 10k", False),
]


@pytest.mark.parametrize(("text", "live"), FEEDS)
def test_the_line_side_is_live_only_where_there_is_one(tmp_path, text, live):
    path = tmp_path / "set.cir"
    path.write_text(f"test set\n{text}\n.end\n")
    path.with_suffix(".toml").write_text('[line]\nsource = "Vline"\n')
    found = cautions(load(path), working=NOTHING)
    # "joined to the line" where the common negative itself is
    assert any("line side is live" in t or "joined to the line" in t for t in found) is live


def test_high_voltage_supply_is_told_with_its_voltage(circuit):
    stress = PositionStress(
        case="high", dc_V=1400.0, peak_V=1450.0, reverse_V=None, ripple_pp_V=1.0,
        ripple_rms_A=0.0, esr_loss_W=0.0, error_V=0.0,
    )  # fmt: skip
    working = Working(conditions=(), positions={"C1": {"high": stress}}, parts={})
    found = power_cautions(circuit("XV1 pa b0 0 5Y3GT"), working=working)
    assert any("1450 V" in text and "divider" in text for text in found)
