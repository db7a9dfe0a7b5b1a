"""Roles in line supplies, multipliers, transformerless sets, converters, transistor equipment."""

from dataclasses import dataclass

import pytest

from stress.circuit.circuit import Role


@dataclass(frozen=True)
class Supply:
    name: str
    text: str
    roles: dict[str, tuple[Role, str]]
    sheet: str = ""


SUPPLIES = [
    Supply(
        "transformerless set, ground is one side of the line",
        """
        Vl a 0 SIN(0 165 60)
        Ca a 0 0.05u
        R0 a a1 33
        D1 a1 b0 DM
        C1 b0 0 40u
        R1 b0 b1 1k
        C2 b1 0 20u
        C3 0 chassis 0.2u
        Rc 0 chassis 220k
        C4 ant g1 1n
        C5 a1 b0 10n
        Rg g1 0 1meg
        X1 p1 b1 g1 k1 PEN
        Lp b1 p1 5
        Rk k1 0 150
        """,
        {
            "Ca": (Role.LINE_ACROSS, "across the line"),
            "C1": (Role.RESERVOIR, "D1"),
            "C2": (Role.SMOOTHING, "b1"),
            "C3": (Role.LINE_CHASSIS, "chassis"),  # B- is line-connected, the chassis is not
            "C4": (Role.COUPLING, "ant"),  # but it bridges line and antenna: class Y as well
            "C5": (Role.SNUBBER, "D1"),
        },
    ),
    Supply(
        "B- apart from the chassis, which is ground",
        """
        Vl l bm SIN(0 325 50)
        D1 l b0 DM
        C1 b0 bm 50u
        R1 b0 b1 1k
        C2 b1 bm 50u
        C3 bm 0 0.1u
        Rc bm 0 470k
        X1 p1 b1 g1 k1 PEN
        Lp b1 p1 5
        Rk k1 bm 150
        C4 k1 bm 25u
        Rg g1 bm 470k
        C5 p1 bm 5n
        C6 p1 0 5n
        """,
        {
            "C1": (Role.RESERVOIR, "D1"),
            "C2": (Role.SMOOTHING, "b1"),
            "C3": (Role.LINE_CHASSIS, "line to chassis"),
            "C4": (Role.CATHODE_BYPASS, "X1"),
            "C5": (Role.PLATE_BYPASS, "X1"),
            "C6": (Role.LINE_CHASSIS, "plate of X1"),  # a plate bypass to the wrong ground
        },
    ),
    Supply(
        "line filter with a common-mode choke, bridge rectifier",
        """
        Vl l n SIN(0 325 50)
        Rpe n 0 1
        Rf l l1 0.1
        Cx1 l1 n 0.1u
        Lf1 l1 l2 5m
        Lf2 n n2 5m
        Kf Lf1 Lf2 0.99
        Cx2 l2 n2 0.1u
        Cy1 l2 pe 2.2n
        Cy2 n2 pe 2.2n
        Re pe 0 10k
        D1 l2 bus DM
        D2 n2 bus DM
        D3 neg l2 DM
        D4 neg n2 DM
        C1 bus neg 220u
        Rl bus neg 1k
        """,
        {
            "Cx1": (Role.LINE_ACROSS, ""),
            "Cx2": (Role.LINE_ACROSS, ""),  # behind the choke it is still the line
            "Cy1": (Role.LINE_CHASSIS, "pe"),
            "Cy2": (Role.LINE_CHASSIS, "pe"),
            "C1": (Role.RESERVOIR, ""),
        },
        '[equipment]\ntouchable = ["pe"]\n',
    ),
    Supply(
        "half-wave doubler",
        """
        Vl l 0 SIN(0 165 60)
        C1 l m 50u
        D1 0 m DM
        D2 m out DM
        C2 out 0 50u
        R1 out 0 5k
        """,
        {"C1": (Role.FLYING, "doubler"), "C2": (Role.RESERVOIR, "D2")},
    ),
    Supply(
        "full-wave doubler on a winding",
        """
        Vl l n SIN(0 165 60)
        Rn n 0 5
        Lp l n 5
        Ls x y 5
        K1 Lp Ls 0.999
        D1 x p DM
        D2 0 x DM
        C1 p y 47u
        C2 y 0 47u
        R1 p 0 10k
        """,
        {"C1": (Role.FLYING, "doubler"), "C2": (Role.FLYING, "doubler")},
    ),
    Supply(
        "bias from the high-voltage winding through a capacitor",
        """
        Vl l n SIN(0 325 50)
        Rn n 0 5
        Lp l n 18
        Ls a 0 30
        K1 Lp Ls 0.999
        D1 a b0 DM
        C1 b0 0 32u
        C2 a m 0.1u
        D2 m 0 DM
        R1 m nb 10k
        C3 nb 0 10u
        R2 nb g 220k
        X1 p b0 g 0 PEN
        Lo b0 p 10
        C4 a 0 10n
        """,
        {
            "C1": (Role.RESERVOIR, "D1"),
            "C2": (Role.FLYING, ""),  # its loss takes the bias away
            "C4": (Role.BUFFER, ""),
        },
    ),
    Supply(
        "choke input, series electrolytics with equalising resistors",
        """
        Vl l n SIN(0 325 50)
        Rn n 0 5
        Lp l n 18
        Ls a 0 30
        Lt 0 b 30
        K1 Lp Ls 0.999
        K2 Lp Lt 0.999
        K3 Ls Lt 0.999
        D1 a r DM
        D2 b r DM
        L1 r b1 10
        C1 b1 mid 47u
        C2 mid 0 47u
        R1 b1 mid 100k
        R2 mid 0 100k
        R3 b1 0 10k
        """,
        {
            "C1": (Role.SMOOTHING, "choke-input"),
            "C2": (Role.SMOOTHING, "choke-input"),  # the pair is one capacitor in its place
        },
    ),
    Supply(
        "buck converter",
        """
        V1 in 0 24
        C1 in 0 220u
        S1 in sw g 0 SM
        Vg g 0 PULSE(0 5 0 50n 50n 4u 10u)
        D1 0 sw DM
        L1 sw o 47u
        C2 o 0 1000u
        Rl o 0 3
        R1 sw sn 10
        C3 sn 0 1n
        C4 sw 0 470p
        """,
        {
            "C1": (Role.RESERVOIR, "converter"),
            "C2": (Role.OUTPUT_FILTER, "L1"),
            "C3": (Role.SNUBBER, "D1"),  # with R1 across the diode
            "C4": (Role.SNUBBER, ""),
        },
    ),
    Supply(
        "vibrator supply, the vibrator drawn as a square wave",
        """
        V1 a 0 PULSE(-6 6 0 1u 1u 5m 10m)
        R1 a p 0.2
        L1 p 0 1m
        L2 b 0 1
        K1 L1 L2 0.99
        C1 b 0 8n
        D1 b c DM
        C2 c 0 10u
        R2 c 0 10k
        """,
        {"C1": (Role.SNUBBER, "L2"), "C2": (Role.OUTPUT_FILTER, "D1")},
    ),
    Supply(
        "flyback converter off the line",
        """
        Vl l n SIN(0 325 50)
        Rn n pe 1
        Rpe pe 0 10meg
        D1 l bus DM
        D2 n bus DM
        D3 0 l DM
        D4 0 n DM
        C1 bus 0 100u
        Lp bus d 1m
        Ls s gs 10u
        Lx x 0 20u
        K1 Lp Ls 0.99
        K2 Lp Lx 0.99
        K3 Ls Lx 0.99
        M1 d g 0 0 NM
        Vg g 0 PULSE(0 10 0 50n 50n 4u 10u)
        D5 d cl DM
        C2 cl bus 10n
        R1 cl bus 47k
        D6 s o DM
        C3 o gs 1000u
        Rl o gs 5
        Rgs gs pe 1meg
        D7 x vcc DM
        C4 vcc 0 47u
        Rst bus vcc 220k
        C5 0 gs 2.2n
        """,
        {
            "C1": (Role.RESERVOIR, ""),
            "C2": (Role.SNUBBER, "clamp"),
            "C3": (Role.OUTPUT_FILTER, "D6"),
            "C4": (Role.RESERVOIR, "start-up"),
            "C5": (Role.LINE_CHASSIS, "gs"),  # primary to secondary: class Y
        },
        '[equipment]\ntouchable = ["gs", "pe"]\n',
    ),
    Supply(
        "transistor amplifier without output transformer",
        """
        V1 cc 0 18
        Vin in 0 SIN(0 0.1 400)
        C1 in b1 4.7u
        R1 cc b1 100k
        R2 b1 0 22k
        Q1 c1 b1 e1 NPN
        R3 e1 0 100
        C2 e1 0 100u
        R4 cc c1 1k
        Q2 cc c1 out NPN
        Q3 0 c1 out PNP
        C3 out spk 1000u
        Rspk spk 0 8
        R5 cc d 1k
        C4 d 0 100u
        R6 d b1 100k
        C5 c1 b1 100p
        """,
        {
            "C1": (Role.COUPLING, "base of Q1"),
            "C2": (Role.CATHODE_BYPASS, "emitter bypass"),
            "C3": (Role.COUPLING, "loudspeaker Rspk"),
            "C4": (Role.DECOUPLING, "d"),
            "C5": (Role.FEEDBACK, "collector of Q1 to its base"),
        },
        "[loudspeakers.Rspk]\n",
    ),
    Supply(
        "series regulator",
        """
        Vl l n SIN(0 325 50)
        Rn n 0 5
        Lp l n 18
        Ls a 0 0.1
        K1 Lp Ls 0.999
        D1 a raw DM
        C1 raw 0 2200u
        R1 raw z 470
        D2 0 z DM
        C2 z 0 100u
        Q1 raw z reg NPN
        C3 reg 0 470u
        R2 reg c2 1k
        Q2 c2 b2 0 NPN
        R3 reg b2 100k
        """,
        {"C1": (Role.RESERVOIR, "D1"), "C3": (Role.SMOOTHING, "reg")},
    ),
]


@pytest.mark.parametrize("supply", SUPPLIES, ids=lambda supply: supply.name)
def test_roles(supply, circuit):
    found = circuit(supply.text, supply.sheet)

    for name, (role, words) in supply.roles.items():
        position = found.position(name)
        assert (name, position.role) == (name, role), position.role_text
        assert words in position.role_text
