"""The table of capacitor styles, its names, its laws and what is assumed."""

import tomllib
from importlib.resources import files
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from stress.parts import styles
from stress.parts.citation import MARKS, Citation
from stress.parts.style_keys import FAULTS
from stress.text.span import SourceErrors
from stress.text.unit import units_of

WANTED = (
    "paper", "paper-oil", "film", "film-pp", "film-ac", "snubber", "mica", "mica-transmitting",
    "polystyrene", "ceramic-1", "ceramic-2", "aluminium", "aluminium-nonpolar", "aluminium-wet",
    "tantalum", "tantalum-wet", "line-X", "line-Y",
)  # fmt: skip
CONTENT = files("stress.parts").joinpath("styles.toml").read_text(encoding="utf-8")
every_style = pytest.mark.parametrize("style", styles.styles().values(), ids=lambda s: s.name)


def test_every_style_is_there():
    assert set(styles.styles()) == set(WANTED)


NAMES = [
    ("electrolytic", "aluminium"),
    ("Electrolytic", "aluminium"),
    ("aluminum", "aluminium"),
    ("Mylar", "film"),
    ("silver mica", "mica"),
    ("motor run", "film-ac"),
    ("LINE-X", "line-X"),
    ("Y2", "line-Y"),
    ("X7R", "ceramic-2"),
    ("np0", "ceramic-1"),
    ("wax_paper", "paper"),
]


@pytest.mark.parametrize(("name", "style"), NAMES)
def test_styles_go_by_other_names(name, style):
    assert styles.find(name).name == style


def test_names_are_not_shared():
    names = [n for s in styles.styles().values() for n in (s.name.lower(), *s.aliases)]
    assert len(names) == len(set(names)) > 60
    assert all(name == name.lower().replace(" ", "-") for name in names)


def test_error_unknown_name_gets_a_near_one():
    assert styles.find("papper") is None
    assert styles.near("papper") == 'did you mean "paper"?'
    assert styles.near("zzz").startswith("accepted: paper, paper-oil, film")


def numbers(value):
    """Yield every table below a value that holds a number or a quantity."""
    if isinstance(value, dict):
        inner = [one for one in value.values() if not isinstance(one, dict)]
        if any(isinstance(one, int | float | list) or one[:1] in "-0123456789" for one in inner):
            yield value
        for one in value.values():
            yield from numbers(one)
    elif isinstance(value, list):
        for one in value:
            yield from numbers(one)


def test_no_number_lacks_a_source():
    values = tomllib.loads(CONTENT)
    found = list(numbers(values["styles"])) + list(numbers(values["assumed"]))
    bare = [table for table in found if "source" not in table and "aliases" not in table]
    # A table of likelihoods hangs in one that names the source of them all.
    bare = [table for table in bare if not set(table) <= set(FAULTS)]
    assert len(found) > 150
    assert bare == []


def test_every_source_is_marked_and_used():
    sources = tomllib.loads(CONTENT)["sources"]
    assert {one["mark"] for one in sources.values()} <= set(MARKS)
    assert [name for name in sources if f'"{name}"' not in CONTENT] == []


def test_citation_says_how_sure_it_is():
    assert str(Citation("MIL-C-25", "memory low")) == (
        "MIL-C-25 (from memory and unsure, to be confirmed)"
    )
    assert str(Citation("common practice", "common practice")) == "common practice"
    assert str(Citation("a sheet", "read")) == "a sheet"


def test_error_number_without_unit_or_source():
    broken = CONTENT.replace('product = "2000 s"', "product = 2000").replace(
        'hot = { doubling = "18 K", source = "as-film" }', 'hot = { doubling = "18 V" }', 1
    )
    with pytest.raises(SourceErrors) as caught:
        styles.read(broken, file="styles.toml")
    messages = "\n".join(error.message for error in caught.value.errors)
    assert "[styles.paper.insulation] product: a quantity needs its unit" in messages
    assert '[styles.polystyrene.hot] doubling: "18 V" is a voltage' in messages


def test_every_float_of_a_style_has_a_unit():
    assert units_of(type(styles.find("paper").loss))["at_Hz"] == "Hz"
    assert units_of(type(styles.find("paper")))["highest_degC"] == "degC"


@every_style
def test_laws_are_sane_everywhere(style):
    typical = 10e-6 if style.electrolytic else 0.01e-6
    rated = style.steps.rated_V[-1]
    steps = [style.esr_ohm(typical, rated_V=rated, frequency_Hz=f) for f in (10, 50, 100, 1e3, 1e5)]
    assert all(later <= earlier * (1 + 1e-9) for earlier, later in pairwise(steps))
    assert 0 < steps[-1] <= steps[0] < 1e5
    assert 1e5 <= style.insulation_ohm(typical, rated_V=rated) <= 1e11
    assert style.insulation_ohm(1e-12, rated_V=rated) <= 1e11
    assert rated <= style.surge_V(rated) <= 1.3 * rated
    assert style.hot_factor(from_degC=20, to_degC=20) == 1.0
    assert style.hot_factor(from_degC=20, to_degC=60) > 1.0
    assert (style.reverse_V(rated) is None) is not style.polar
    assert style.tolerance.low < 0 < style.tolerance.high
    assert all(low < high for low, high in pairwise(style.steps.rated_V))
    assert 0 <= style.absorption.low <= style.absorption.high <= 0.15
    assert style.fault_share(style.fate.usual) >= 0.5 * max(style.fate.share.values())
    assert style.replacement in styles.styles()
    assert style.tan(typical, rated_V=rated, frequency_Hz=120.0) < 0.3


@given(st.floats(1e-12, 1e-3), st.floats(1.0, 1000.0), st.floats(0.1, 1e7))
def test_electrolytic_stays_finite(value_F, rated_V, frequency_Hz):
    style = styles.find("aluminium")
    esr = style.esr_ohm(value_F, rated_V=rated_V, frequency_Hz=frequency_Hz)
    assert esr > 0
    assert esr >= style.esr_ohm(value_F, rated_V=rated_V, frequency_Hz=frequency_Hz * 2)
    assert 0 < style.insulation_ohm(value_F, rated_V=rated_V) <= 1e11


def test_electrolyte_remains_at_high_frequency():
    """The floor: 1/1.40² of the resistance at 100 Hz from 10 kHz on, for high voltages."""
    style = styles.find("aluminium")
    low, high, higher = (
        style.esr_ohm(20e-6, rated_V=450.0, frequency_Hz=f) for f in (100.0, 1e4, 1e6)
    )
    assert high == pytest.approx(low / 1.40**2, rel=1e-9)
    assert higher == high


def test_rating_unknown_is_allowed():
    for name in ("aluminium", "tantalum", "paper"):
        style = styles.find(name)
        assert style.esr_ohm(10e-6, rated_V=None, frequency_Hz=100.0) > 0
        assert style.insulation_ohm(10e-6, rated_V=None) > 0
    assert styles.find("aluminium").reverse_V(None) == 1.0


@pytest.mark.parametrize(("value", "frequency"), [(0.0, 100.0), (1e-6, 0.0), (-1e-6, 50.0)])
def test_error_no_resistance_without_capacitance_or_frequency(value, frequency):
    with pytest.raises(ValueError, match="above zero"):
        styles.find("film").esr_ohm(value, rated_V=None, frequency_Hz=frequency)


def test_error_no_leakage_above_the_rating():
    style = styles.find("aluminium")
    assert style.voltage_factor(1.0) == 1.0
    assert styles.find("paper").voltage_factor(0.5) == 0.5
    with pytest.raises(ValueError, match="up to the rated voltage"):
        style.voltage_factor(1.1)


def test_age_counts():
    paper = styles.find("paper")
    assert paper.fault_share("leaky", years=0) == 0.0
    assert paper.fault_share("leaky", years=25) == pytest.approx(0.45)
    assert paper.fault_share("leaky", years=90) == paper.fault_share("leaky") == 0.9
    assert paper.fault_share("dried") == 0.0


# The table of assumptions (common practice): value, role, polarised symbol, rating, style.
ASSUMED = [
    (20e-6, "reservoir", None, 450.0, "aluminium"),
    (8e-6, "smoothing", True, None, "aluminium"),
    (0.47e-6, "coupling", True, None, "aluminium"),
    (16e-6, "coupling", False, None, "aluminium-nonpolar"),
    (2e-6, "tone", False, None, "film"),
    (0.02e-6, "coupling", None, 400.0, "paper"),
    (0.02e-6, "coupling", None, None, "paper"),
    (0.05e-6, "across the line", None, None, "paper"),
    (0.1e-6, "decoupling", None, 50.0, "film"),
    (0.1e-6, "output filter", None, None, "film"),
    (5e-9, "tuning", None, None, "mica"),
    (100e-12, "grid-leak", None, None, "mica"),
    (1e-6, "coupling", None, None, "aluminium"),
]


@pytest.mark.parametrize(("value", "role", "polar", "rated", "style"), ASSUMED)
def test_unknown_style_is_assumed_by_value_and_role(value, role, polar, rated, style):
    found, why = styles.assumed(value, role=role, polar_hint=polar, rated_V=rated)
    assert found.name == style
    assert why.startswith(f"assumed: {style}, ")


@given(
    st.floats(1e-13, 1.0),
    st.sampled_from(["reservoir", "tuning", "snubber", "?"]),
    st.sampled_from([None, True, False]),
    st.one_of(st.none(), st.floats(1, 5000)),
)
def test_something_is_always_assumed(value, role, polar, rated):
    assert styles.assumed(value, role=role, polar_hint=polar, rated_V=rated)[1]
