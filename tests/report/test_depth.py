"""One position in depth, and the curve in characters."""

from io import StringIO

from rich.console import Console

from stress.report.depth import print_fail, print_leak
from stress.report.plot import plot


def printed(show, review, name):
    out = StringIO()
    show(review, name, Console(file=out, width=100))
    return out.getvalue()


def test_leak_shows_every_condition_and_its_curve(specimen):
    name = next(n for n, leak in specimen.leakage.items() if leak.by_condition)

    text = printed(print_leak, specimen, name)

    for found in specimen.leakage[name].by_condition:
        assert found.condition in text
    assert "damage below:" in text
    assert "leak current" in text


def test_fail_shows_every_failure_and_how_far_past_the_limit(specimen):
    name, failures = next((n, f) for n, f in specimen.failures.items() if any(x.victims for x in f))

    text = printed(print_fail, specimen, name)

    for failure in failures:
        assert failure.fault in text
    assert "times" in " ".join(text.split())


def test_plot_draws_the_limit_and_a_mark_past_it():
    lines = plot([("XU2 plate dissipation", [(1e9, 0.5), (1e6, 0.9), (1e3, 2.0)])], width=60)

    limit = next(i for i, line in enumerate(lines) if line.lstrip().startswith("limit"))
    assert any("o" in line.partition("|")[2] for line in lines[:limit])
    assert any("o" in line.partition("|")[2] for line in lines[limit + 1 : -3])
    assert lines[-2].split() == ["1", "GΩ", "1", "kΩ"]
    assert lines[-1].strip() == "o XU2 plate dissipation"


def test_plot_of_one_point_is_none():
    assert plot([("x", [(1e6, 0.5)])], width=60) == []
