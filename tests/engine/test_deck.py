"""Decks: names, numbers, what is added and said of it. Nothing is simulated here."""

import pytest

from stress.engine.draft import TIE_OHM, Draft

RECTIFIER = """
Vac  A.in 0 SIN(0 100 50 5m)
D#1  A.in out DM
C1   out 0 47u
Rload out 0 1k
.model DM D(IS=1n N=1.8)
"""


def deck_of(twin, values=(), removed=(), **more):
    return Draft(twin, frozenset(removed), forever=True).deck(dict(values), **more)


def card_of(deck, letter):
    return [c for c in deck.cards if c.startswith(letter)]


def test_a_deck_holds_plain_numbers_and_names_of_its_own(twin_of):
    deck = deck_of(twin_of(RECTIFIER, period_s=0.02))

    assert card_of(deck, "v") == ["v1 n1 0 dc 0.0 sin(0.0 100.0 50.0 0.0 0.0 -90.0)"]
    assert card_of(deck, "d") == ["d2 n1 n2 m1"]
    assert card_of(deck, "c") == ["c3 n2 0 4.7e-05"]
    assert card_of(deck, ".model") == [".model m1 d(is=1e-09 n=1.8)"]
    assert deck.notices == ("Vac: its delay is taken as a shift of phase",)
    assert [probe.name for probe in deck.probes] == [
        "v(a.in)",
        "v(out)",
        "i(vac)",
        "i(d#1)",
        "i(c1)",
    ]
    assert all(ord(sign) < 128 for line in deck.text({}, options="x") for sign in line)


def test_a_case_changes_values_and_scales_sources(twin_of):
    twin = twin_of(RECTIFIER, period_s=0.02)
    deck = deck_of(twin, {"rload": 500.0, "VAC": 1.1, "nobody": 3.0})

    assert card_of(deck, "r") == ["r4 n2 0 500.0"]
    assert "sin(0.0 110.0" in card_of(deck, "v")[0].replace("110.00000000000001", "110.0")
    assert deck_of(twin, {"Vac": 0.0}).period_s is None
    assert deck.period_s == 0.02


def test_what_is_removed_takes_its_couplings_along_and_leaves_ties(twin_of):
    cards = "V1 a 0 SIN(0 1 50)\nR1 a b 1k\nL1 b 0 1\nL2 c 0 1\nK1 L1 L2 0.9\nC1 c d 1u\nR2 d 0 1"
    deck = deck_of(twin_of(cards, period_s=0.02), removed=["l2", "R2"])

    assert card_of(deck, "k") == []
    assert card_of(deck, "rx") == [f"rxn3 n3 0 {TIE_OHM!r}", f"rxn4 n4 0 {TIE_OHM!r}"]
    assert deck.notices == ("no path for direct current, tied to ground by 1e+11 ohm: c, d",)


def test_a_winding_across_a_source_gets_resistance(twin_of):
    """A thousandth of its reactance: 10 H at 50 Hz have 3,142 ohm."""
    deck = deck_of(twin_of("V1 a 0 SIN(0 1 50)\nL1 a 0 10", period_s=0.02))

    assert card_of(deck, "l") == ["l2 n1 0xl2 10.0"]
    assert card_of(deck, "rx")[0].startswith("rxl2 0xl2 0 3.14159")
    assert deck.notices == ("L1: no resistance in its loop; 3.14 ohm in series assumed",)


def test_a_current_that_is_sensed_gets_a_meter(twin_of):
    deck = deck_of(twin_of("V1 a 0 5\nR1 a b 1k\nR2 b 0 1k\nB1 c 0 V=2*I(R2)\nR3 c 0 1"))

    assert "v3 n2 n3 dc 0.0" in deck.cards
    assert card_of(deck, "b") == ["b5 n4 0 v=(2.0 * i(v3))"]
    assert "v(r2#sense)" not in [probe.name for probe in deck.probes]


def test_long_laws_are_split_without_losing_the_circuit(twin_of):
    law = "V(a)*sqrt(V(a)*V(a)+1)/(1+sqrt(V(a)*V(a)+1)*V(a)*V(a)*V(a))"
    twin = twin_of(f"R2 a 0 5\nB1 b 0 V=1+({law})\nB2 c 0 V=2*({law})\nR1 b c 1")
    easy = Draft(twin, frozenset(), forever=True).deck({})
    plain = Draft(twin, frozenset(), forever=True, easy=False).deck({})

    assert len(card_of(plain, "b")) == 2
    assert len(card_of(easy, "b")) == 4  # the root and the quotient, each once
    assert [probe.name for probe in easy.probes] == [probe.name for probe in plain.probes]


def test_what_a_source_holds_is_a_number_in_the_laws(twin_of):
    twin = twin_of("V1 a 0 2\nV2 s 0 SIN(0 1 50)\nB1 b 0 V=3*V(a)*abs(exp(V(s)))\nR1 b 0 1")
    held = Draft(twin, frozenset(), forever=True)
    free = Draft(twin, frozenset(), forever=True, changed=frozenset({"v1"}))

    assert card_of(held.deck({}), "b") == ["b3 n3 0 v=(6.0 * exp(v(n2)))"]
    assert card_of(free.deck({"V1": 2.0}), "b") == ["b3 n3 0 v=(3.0 * (v(n1) * exp(v(n2))))"]
    with pytest.raises(ValueError, match="v1"):
        held.deck({"V1": 2.0})


def test_only_what_is_kept_is_saved(twin_of):
    deck = deck_of(twin_of(RECTIFIER, period_s=0.02), keep=("V(out)", "i(C1)"))

    assert [probe.name for probe in deck.probes] == ["v(out)", "i(c1)"]
    assert card_of(deck, ".save") == [".save n2 @c3[i]"]


@pytest.mark.parametrize(
    ("cards", "why"),
    [
        ("V1 a 0 SIN(0 1 50)\nT1 a 0 b 0 Z0=50 TD=1n\nR1 b 0 50", "transmission line"),
        ("V1 a 0 SIN(0 1 50)\nR1 a b 1\nC1 b 0 C={1u*V(b)}", "behavioural C"),
        ("V1 a 0 SIN(0 1 50)\nR1 a b 1\nC1 b 0 1u", ""),
    ],
)
def test_what_cannot_be_restarted_is_said(twin_of, cards, why):
    assert why in deck_of(twin_of(cards, period_s=0.02)).plain
    assert bool(why) == bool(deck_of(twin_of(cards, period_s=0.02)).plain)
