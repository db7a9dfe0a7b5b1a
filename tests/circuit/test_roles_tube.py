"""Roles in tube equipment; the reason stands beside every expectation.

All are common practice of the time unless another source is named.
"""

from dataclasses import dataclass

import pytest

from stress.circuit.circuit import Role


@dataclass(frozen=True)
class Stage:
    name: str
    text: str
    roles: dict[str, tuple[Role, str]]  # position to role and words that its text must hold
    sheet: str = ""


# A transformer-fed supply that the stages below hang on: full wave, so that the centre tap is
# the return.
SUPPLY = """
Vline lp ln SIN(0 165 60)
Re ln 0 10
Lpri lp ln 5
Lsa a 0 40
Lsb 0 b 40
K1 Lpri Lsa 0.999
K2 Lpri Lsb 0.999
K3 Lsa Lsb 0.999
XR1 a b0 DIO
XR2 b b0 DIO
C1 b0 0 16u
Lch b0 b1 10
C2 b1 0 16u
"""
COMMON = {
    "C1": (Role.RESERVOIR, "XR1, XR2"),  # first capacitor after the rectifier
    "C2": (Role.SMOOTHING, "choke"),  # after the choke
}

STAGES = [
    Stage(
        "resistance-coupled output stage",
        """
        X1 p1 g1 0 TRI
        Rp1 b1 p1 220k
        Rg1 g1 0 10meg
        C3 p1 g2 0.02u
        Rg2 g2 0 470k
        X2 p2 b1 g2 k2 PEN
        Rk2 k2 0 270
        C4 k2 0 25u
        Lop b1 p2 10
        Los s 0 6m
        K4 Lop Los 0.99
        Rs s 0 3.2
        C5 p2 0 5n
        C6 p2 b1 10n
        C7 p2 tc 0.05u
        Rtone tc 0 25k
        C8 b1 0 0.1u
        """,
        {
            "C3": (Role.COUPLING, "plate of X1 to grid of X2"),
            "C4": (Role.CATHODE_BYPASS, "cathode of X2"),
            "C5": (Role.PLATE_BYPASS, "plate of X2 to ground"),
            # across the primary is a plate bypass too: its short mutes and burns nothing
            "C6": (Role.PLATE_BYPASS, "across the winding Lop"),
            "C7": (Role.TONE, "plate of X2"),  # in series with the tone control
            "C8": (Role.DECOUPLING, "beside C2"),  # 160 times smaller than the can beside it
        },
    ),
    Stage(
        "decoupled first stage, screen fed by a dropper",
        """
        Rd b1 b2 47k
        C3 b2 0 8u
        X1 p1 s1 g1 k1 PEN
        Rp b2 p1 220k
        Rs b2 s1 1meg
        C4 s1 0 0.1u
        Rk k1 0 1.5k
        C5 k1 0 25u
        Vin in 0 SIN(0 0.1 400)
        C6 in g1 0.01u
        Rg g1 0 1meg
        """,
        {
            "C3": (Role.DECOUPLING, "b2"),  # 47 kohm: one stage's own filter
            "C4": (Role.SCREEN_BYPASS, "screen of X1"),  # feeds the screen and nothing else
            "C5": (Role.CATHODE_BYPASS, "cathode of X1"),
            "C6": (Role.COUPLING, "Vin to grid of X1"),
        },
    ),
    Stage(
        "screens of two tubes on a divider",
        """
        Rs1 b1 sc 15k
        Rs2 sc 0 22k
        C3 sc 0 0.1u
        X1 p1 sc g1 k1 PEN
        X2 p2 sc g2 k2 PEN
        L1 b1 p1 1m
        L2 b1 p2 1m
        Rg1 g1 0 1meg
        Rg2 g2 0 1meg
        Rk1 k1 0 180
        Rk2 k2 0 180
        C4 k1 0 0.05u
        C5 p1 b1 100p
        """,
        {
            "C3": (Role.SCREEN_BYPASS, "screen of X1"),
            "C4": (Role.CATHODE_BYPASS, "cathode of X1"),
            "C5": (Role.TUNING, "L1"),  # 100 pF across 1 mH: a tuned circuit
        },
    ),
    Stage(
        "detector and AVC",
        """
        Lif1 b1 pif 1m
        Lif2 dp cold 1m
        K4 Lif1 Lif2 0.02
        X1 pif b1 gif kif PEN
        Rkif kif 0 180
        XD dp 0 DIO
        C3 cold 0 100p
        Rf cold vt 47k
        C4 vt 0 100p
        Rvol vt 0 500k
        Ravc vt avc 2.2meg
        C5 avc 0 0.05u
        Lin avc gif 1m
        C6 vt gaf 0.01u
        Rgaf gaf 0 10meg
        X2 paf gaf 0 TRI
        Rpaf b1 paf 220k
        C7 paf 0 250p
        """,
        {
            "C3": (Role.DETECTOR, "XD"),  # at the cold end of the diode's winding
            "C4": (Role.DETECTOR, ""),  # behind the filter resistor of the load
            "C5": (Role.AVC, "X1"),  # megohms from the detector, a grid's return behind it
            "C6": (Role.COUPLING, "grid of X2"),
            "C7": (Role.PLATE_BYPASS, "plate of X2"),
        },
    ),
    Stage(
        "phase splitter, push-pull output, feedback from the secondary",
        """
        Vin in 0 SIN(0 0.5 400)
        C3 in g1 0.1u
        Rg1 g1 0 1meg
        X1 p1 g1 k1 TRI
        Rp1 b1 p1 220k
        Rk1 k1 fb 1.5k
        C4 k1 fb 25u
        Rfb2 fb 0 100
        X2 p2 p1 k2 TRI
        Rp2 b1 p2 82k
        Rk2 k2 0 82k
        C5 p2 ga 0.1u
        C6 k2 gb 0.1u
        Rga ga 0 220k
        Rgb gb 0 220k
        X3 pa b1 ga kk PEN
        X4 pb b1 gb kk PEN
        Rkk kk 0 130
        C7 kk 0 50u
        La b1 pa 20
        Lb b1 pb 20
        Ls s 0 0.17
        K4 La Lb 0.999
        K5 La Ls 0.999
        K6 Lb Ls 0.999
        Rspk s 0 8
        Rfb s fb 10k
        C8 s fb 220p
        C9 pa pb 2n
        """,
        {
            "C4": (Role.CATHODE_BYPASS, "cathode of X1"),  # across the bias resistor, not to ground
            "C5": (Role.COUPLING, "plate of X2 to grid of X3"),
            "C6": (Role.COUPLING, "cathode of X2 to grid of X4"),
            "C7": (Role.CATHODE_BYPASS, ""),
            "C8": (Role.FEEDBACK, "cathode of X1"),  # the secondary comes after X1
            "C9": (Role.PLATE_BYPASS, ""),
        },
        "[loudspeakers.Rspk]\n",
    ),
    Stage(
        "grid-leak detector and its plate filter",
        """
        L1 tank 0 0.2m
        C3 tank 0 365p
        C4 tank g1 250p
        R1 g1 0 2meg
        X1 p1 g1 0 TRI
        C5 p1 0 500p
        Rp b1 p1 100k
        C6 p1 g2 0.01u
        Rg g2 0 500k
        X2 p2 g2 k2 TRI
        Rp2 b1 p2 50k
        Rk2 k2 0 2k
        """,
        {
            "C3": (Role.TUNING, "L1"),
            "C4": (Role.GRID_LEAK, "R1"),  # from the tuned circuit, the grid returns by R1 alone
            "C5": (Role.PLATE_BYPASS, "plate of X1"),
            "C6": (Role.COUPLING, "plate of X1 to grid of X2"),
        },
    ),
    Stage(
        "plate-to-grid feedback and a cathode follower",
        """
        Vin in 0 SIN(0 0.5 400)
        C3 in g1 0.1u
        Rg1 g1 0 1meg
        X1 p1 g1 k1 TRI
        Rp1 b1 p1 100k
        Rk1 k1 0 1k
        C4 p1 g1 47p
        X2 b1 p1 k2 TRI
        Rk2 k2 0 47k
        C5 k2 out 1u
        Rout out 0 100k
        """,
        {
            "C4": (Role.FEEDBACK, "plate of X1 to its grid"),
            "C5": (Role.COUPLING, "cathode of X2"),
        },
    ),
    Stage(
        "back bias from the centre tap of the field",
        """
        X1 p1 b1 g1 0 PEN
        Lo b1 p1 8
        Rg g1 bias 470k
        Rb1 nb bias 100k
        C3 bias 0 8u
        Vneg nb 0 -20
        """,
        {"C3": (Role.BIAS_FILTER, "bias")},  # feeds a grid and is negative
    ),
]


@pytest.mark.parametrize("stage", STAGES, ids=lambda stage: stage.name)
def test_roles(stage, circuit):
    found = circuit(SUPPLY + stage.text, stage.sheet)

    for name, (role, words) in (COMMON | stage.roles).items():
        position = found.position(name)
        assert (name, position.role) == (name, role), position.role_text
        assert words in position.role_text
