"""Keys of the sheet by which further conditions are asked for, and the share that may be off."""

import pytest

from stress.parts import read_sheet
from stress.text.span import SourceErrors


def test_conditions_and_shares():
    sheet = read_sheet.read_text(
        """
[equipment]
conditions = ["silicon", "speaker-out"]
[conditions.tuner_off]
silicon = ["XV5"]
muted = ["Vaf"]
[bench]
detuned = "0.5 %"
""",
        path="s.toml",
    )
    assert sheet.equipment.conditions == ("silicon", "speaker-out")
    (own,) = sheet.conditions
    assert (own.silicon, own.muted, own.line) == (("XV5",), ("Vaf",), "high")
    assert sheet.detuned_share == pytest.approx(0.005)
    assert read_sheet.read_text("", path="s.toml").detuned_share == 0.01


@pytest.mark.parametrize(
    ("text", "line"),
    [("[equipment]\nconditions = 3\n", 2), ('[bench]\ndetuned = "2 V"\n', 2)],
)
def test_error_wrong_values_are_shown_with_their_line(text, line):
    with pytest.raises(SourceErrors) as caught:
        read_sheet.read_text(text, path="s.toml")
    assert f"s.toml:{line}:" in str(caught.value.errors[0])
