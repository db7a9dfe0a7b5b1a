"""Roles in networks: tone controls, oscillators, transistor radios, deflection."""

from dataclasses import dataclass

import pytest

from stress.circuit.circuit import Role


@dataclass(frozen=True)
class Network:
    name: str
    text: str
    roles: dict[str, tuple[Role, str]]
    sheet: str = ""


NETWORKS = [
    Network(
        "tone controls between two stages",
        """
        V1 b0 0 400
        X1 p1 g1 k1 TRI
        Rp1 b0 p1 100k
        Rk1 k1 0 1.5k
        Rg1 g1 0 1meg
        C1 p1 t1 250p
        R1 p1 sl 100k
        C2 sl t2 0.1u
        R2 t1 to 125k
        R3 to t2 125k
        R4 t2 0 250k
        R5 to w 500k
        R6 w 0 500k
        C3 to w 120p
        X2 p2 w k1 TRI
        Rp2 b0 p2 100k
        """,
        {
            "C1": (Role.COUPLING, "plate of X1 to grid of X2"),  # keeps B+ from the controls
            "C2": (Role.COUPLING, "plate of X1 to grid of X2"),
            "C3": (Role.TONE, "across R5"),  # both ends belong to the same grid
        },
    ),
    Network(
        "phase-shift oscillator",
        """
        V1 b0 0 300
        X3 p3 g3 0 TRI
        Rp3 b0 p3 220k
        C1 p3 n1 0.02u
        R1 n1 0 1meg
        C2 n1 n2 0.01u
        R2 n2 0 1meg
        C3 n2 g3 0.01u
        R3 g3 0 1meg
        """,
        dict.fromkeys(("C1", "C2", "C3"), (Role.FEEDBACK, "plate of X3 to its grid")),
    ),
    Network(
        "neutralised push-pull stage",
        """
        V1 b 0 500
        X1 p1 g1 0 TRI
        X2 p2 g2 0 TRI
        La b p1 10u
        Lb b p2 10u
        C1 p1 g2 5p
        C2 p2 g1 5p
        R1 g1 0 10k
        R2 g2 0 10k
        """,
        # from each plate to the other grid: the loop closes over both
        {"C1": (Role.FEEDBACK, ""), "C2": (Role.FEEDBACK, "")},
    ),
    Network(
        "transistor radio",
        """
        Vb cc 0 9
        R1 cc s 220
        C1 s 0 100u
        Q1 c1 b1 e1 NPN
        L1 s c1 0.5m
        C2 c1 s 200p
        L2 d 0 0.05m
        K1 L1 L2 0.5
        D1 d v DM
        C3 v 0 10n
        Rv v 0 5k
        Ragc v agc 8.2k
        C4 agc 0 10u
        Rb1 s b1 100k
        L3 agc b1 0.05m
        Re1 e1 0 680
        C5 e1 0 0.1u
        C6 v b2 4.7u
        Q2 c2 b2 e2 NPN
        Rb2 s b2 47k
        Rb3 b2 0 10k
        Rc2 s c2 2.2k
        Re2 e2 0 470
        C7 c2 b3 10u
        Q3 c3 b3 0 NPN
        Rb4 cc b3 100k
        L4 cc c3 0.5
        L5 sp 0 0.01
        K2 L4 L5 0.99
        R8 sp 0 8
        C8 c3 cc 22n
        """,
        {
            "C1": (Role.SMOOTHING, "s"),
            "C2": (Role.TUNING, "L1"),
            "C3": (Role.DETECTOR, "D1"),
            "C4": (Role.AVC, ""),  # from the detector to the base of the stage before
            "C5": (Role.CATHODE_BYPASS, "emitter bypass"),
            "C6": (Role.COUPLING, "base of Q2"),
            "C7": (Role.COUPLING, "collector of Q2 to base of Q3"),
            "C8": (Role.PLATE_BYPASS, "across the winding L4"),
        },
    ),
    Network(
        "picture-tube supply from the retrace",
        """
        V1 b 0 250
        X1 p s g 0 PEN
        Rs b s 2.2k
        C1 s 0 0.1u
        Rg g 0 470k
        La b2 p 10m
        Lb b2 y 5m
        Le eh p 60m
        Ka La Lb 0.9
        Kb La Le 0.9
        Kc Lb Le 0.9
        D1 b y DM
        C2 b2 b 0.1u
        D2 eh e DM
        C3 e 0 500p
        R1 e 0 100meg
        """,
        {
            "C1": (Role.SCREEN_BYPASS, "X1"),
            "C3": (Role.OUTPUT_FILTER, "D2"),  # small, and still the reservoir there
        },
    ),
]


@pytest.mark.parametrize("network", NETWORKS, ids=lambda network: network.name)
def test_roles(network, circuit):
    found = circuit(network.text, network.sheet)

    for name, (role, words) in network.roles.items():
        position = found.position(name)
        assert (name, position.role) == (name, role), position.role_text
        assert words in position.role_text


def test_an_amplifier_as_one_device(circuit):
    # its inputs are what its model looks at, its output what it drives
    found = circuit(
        """
        V1 p 0 15
        V2 m 0 -15
        X1 in fb o p m OPA
        R1 o fb 10k
        R2 fb 0 1k
        C1 o fb 100p
        C2 s in 1u
        Rin in 0 100k
        Vs s 0 SIN(0 0.1 1k)
        C3 o out 10u
        Ro out 0 10k
        C4 p 0 100n
        .subckt OPA 1 2 3 4 5
        E1 6 0 1 2 1e5
        R1 6 3 100
        R2 4 5 10k
        .ends
        """
    )

    assert found.position("C1").role is Role.FEEDBACK
    assert found.position("C2").role_text.startswith("coupling, the signal source Vs to input")
    assert found.position("C3").role is Role.COUPLING
    assert found.position("C4").role is Role.DECOUPLING
    assert "X1" not in [part.name for part in found.parts]  # no limits, so no victim
