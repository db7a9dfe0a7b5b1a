"""Cases without a number: one finding a position and kind, however many cases there are."""

from types import SimpleNamespace

from stress.finding import Severity
from stress.judge.findings import without_number
from stress.study.result import Unanswered


def results(*whys):
    return SimpleNamespace(
        working=SimpleNamespace(unanswered=whys), leakage={}, failures={}, pairs=None
    )


def test_cases_alike_are_told_once_and_counted():
    names = [f"nominal / C14 leaky {ohm} Ω" for ohm in (1000, 100, 50, 20, 10, 1)]
    text = "leaves its steady state by itself (it motorboats) within 187 periods"
    whys = [Unanswered(case=name, kind="unstable", text=text) for name in names]
    whys.append(Unanswered(case="standby", kind="unsolved", text="no convergence"))
    whys.append(Unanswered(case="high / C1 short", kind="not limited by the netlist", text=""))
    unstable, unsolved = without_number(results(*whys))

    assert (unstable.where, unstable.severity) == ("C14", Severity.WATCH)
    assert unstable.text == (
        f"{names[0]}: the equipment {text}; likewise {names[1]}, {names[2]}, {names[3]} and 2 more"
    )
    assert (unsolved.where, unsolved.severity) == ("equipment", Severity.NOTE)
    assert unsolved.text == "standby: unsolved; no convergence"
