"""A polar part whose polarity turns: from the simulation to what is printed and to be bought."""

from io import StringIO
from pathlib import Path

import pytest
from rich.console import Console

from stress import pipeline
from stress.finding import Severity
from stress.parts import styles
from stress.report.card import cards
from stress.report.document import document
from stress.report.terminal import print_review

NETLIST = Path(__file__).parents[2] / "netlists" / "charthouse_smps.cir"

pytestmark = pytest.mark.ngspice


@pytest.fixture(scope="module")
def reviewed():
    return pipeline.review(NETLIST, only=["C18"], jobs=1)


def test_it_is_found_with_the_condition_that_makes_it(reviewed):
    stresses = reviewed.working.positions["C18"]
    worst = reviewed.worst["C18"]

    assert stresses["nominal"].reverse_V == pytest.approx(0.0, abs=1e-3)
    assert worst.reverse_condition == "high"
    assert worst.reverse_V == pytest.approx(-stresses["high"].dc_V, rel=0.01)
    # 12 V against 28.8 V / 2.1 (closed form of the divider), drops of some 0.2 V left out
    assert worst.reverse_V == pytest.approx(28.8 / 2.1 - 12.0, abs=0.25)


def test_it_is_judged_by_the_published_limit_of_its_style(reviewed):
    """Vishay 198 PHR-SI, document 28339, p. 53: at most 1 V."""
    law = styles.find("aluminium").reverse
    (found,) = (f for f in reviewed.findings if f.where == "C18" and f.rule == "risk-order")

    assert (law.most_V, law.source.mark) == (1.0, "read")
    assert found.severity is Severity.TEST
    assert "the wrong way round (high), it stands 1 V" in found.text
    assert str(law.source) in found.text


def test_a_part_without_polarity_is_advised(reviewed):
    part = reviewed.replacements["C18"]

    assert part.style == "aluminium-nonpolar"
    assert part.value_F == pytest.approx(22e-6)
    assert part.rated_V == 16.0  # never below the original rating
    assert "the wrong way round (high), a polar part 1 V at most" in part.reason
    assert any(str(styles.find("aluminium").reverse.source) in rule for rule in part.rules)
    # Two equal parts in series halve the value: 2 x 22 uF, next of E6 47 uF.
    (pair,) = (note for note in part.notes if "minus to minus" in note)
    assert "two polar parts of 47 µF" in pair


def test_it_is_printed(reviewed):
    printed = StringIO()
    print_review(reviewed, Console(file=printed, width=120))
    text = " ".join(printed.getvalue().split())
    card = next(card for card in cards(reviewed) if card.position.name == "C18")
    entry = next(each for each in document(reviewed)["positions"] if each["name"] == "C18")

    assert "C18 it is driven 1.82 V the wrong way round (high), it stands 1 V (Vishay" in text
    assert "fit 22 µF aluminium-nonpolar, 16 V, which goes in either way round" in text
    assert [fact.name for fact in card.replacement if "minus to minus" in fact.text] == ["note"]
    assert entry["working"]["high"]["reverse_V"] == reviewed.worst["C18"].reverse_V
    assert entry["risk"]["severity"] == "test-before-power"
