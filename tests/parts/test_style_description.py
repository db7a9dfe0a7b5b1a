"""A style as text for people."""

import re

import pytest

from stress.parts import styles
from stress.parts.describe_style import description


@pytest.mark.parametrize("style", styles.styles().values(), ids=lambda s: s.name)
def test_every_line_has_its_source(style):
    first, *lines = description(style).split("\n")
    assert first.startswith(f"{style.name}: {style.text}")
    said = [line for line in lines if not re.match(r"  \[\d+\] |  fit instead", line)]
    numbers = [re.search(r"  \[(\d+)\]$", line) for line in said]
    assert len(said) > 8
    assert all(numbers)
    listed = {line.split("]")[0].strip(" [") for line in lines if line.startswith("  [")}
    assert {found[1] for found in numbers if found} == listed


LINES = [
    ("aluminium", "leakage, at most      0.01·C·U + 3 µA, after 2 min"),
    ("aluminium", "leakage, at most      0.3·C^0.7·U^0.7 + 4 µA, after 5 min"),
    (
        "aluminium",
        "leakage, at most      10/20/25/40·C + 300 µA to 100/250/350/450 V, at most 10 mA, after"
        " 5 min",
    ),
    ("aluminium-nonpolar", "leakage, at most      0.05·C·U µA, at least 10 µA, after 2 min"),
    ("aluminium", "surge                 1.15 times to 315 V, 1.1 times above"),
    ("tantalum", "surge                 1.3 times the rating"),
    ("tantalum", "reverse, at most      5 % of the rating, 1 V"),
    ("film", "loss factor           0.8 % at 1 kHz, 1.5 % at 10 kHz, 1.7 % at 100 kHz"),
    ("film", "insulation, new       10000 MΩ·µF"),
    ("snubber", "slope                 225 V/µs"),
    ("snubber", "ac share              35 %"),
    ("mica", "insulation, new       no more than 7.5 GΩ asked"),
    ("ceramic-2", "left at rated voltage 30 to 80 %"),
    ("line-Y", "class                 Y2, up to 300 V, impulse 5000 V"),
    ("paper", "found at 50 years     leaky 90 %, short 5 %, open 3 %"),
]


@pytest.mark.parametrize(("name", "line"), LINES)
def test_numbers_are_printed(name, line):
    assert f"  {line}  [" in description(styles.find(name))


def test_sources_say_how_sure_they_are():
    printed = description(styles.find("aluminium"))
    assert "Vishay 198 PHR-SI, document 28339 of 2008-08-08, p. 53" in printed
    assert (
        "MIL-C-62 and RETMA dry electrolytic acceptance (from memory, to be confirmed)" in printed
    )
