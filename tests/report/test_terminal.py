"""What stands on the terminal, word for word where it matters."""

import io
import re
from dataclasses import replace

import pytest
from rich.console import Console

from stress.finding import Finding, Severity
from stress.report.terminal import print_review


def printed(review, *, width=80, verbose=False, **console):
    out = io.StringIO()
    print_review(review, Console(file=out, width=width, **console), verbose=verbose)
    return out.getvalue()


@pytest.fixture(scope="module")
def narrow(specimen):
    return printed(specimen)


@pytest.fixture(scope="module")
def wide(specimen):
    return printed(specimen, width=200)


def test_it_begins_with_what_must_be_done_before_power(narrow):
    assert narrow.startswith(
        """\
Lantern room monitor
lantern.cir, sheet lantern.toml; 6 positions
Charged capacitors and live parts kill: the cautions stand at the end.

Replace before any power
   -  equipment The chassis may be live. Use an isolation transformer.
  1.  C5        Below 3.91 MΩ XU2 passes its plate limit. Fit 0.022 µF film, 630
                V.
                it may be the first to go; look at its wax
  2.  X3.C9     it stands across the line

Test before power
  3.  C1 a short burns XV1

Watch
   -  R9 R9 bears 1.1 W of its 1 W when healthy.

Notes
   -  pulled XU2 Motorboats at 3 Hz.

Positions, in the order of work
"""
    )


def test_the_explanation_of_a_position(narrow):
    assert (
        """
C5   coupling, plate of XU1 to grid of XU2                  paper 0.02 µF, 400 V
     bears 98.8 V, but 420 V with the tubes cold at high line: fit 0.022 µF
     film, 630 V
     replace before any power: below 3.91 MΩ of leakage XU2 passes its plate
     limit; its bias moves by a tenth from 24.3 MΩ on
"""
        in narrow
    )


def test_it_ends_with_assumptions_cautions_and_the_run(narrow):
    end = narrow[narrow.index("Assumed") :]
    assert (
        end
        == """\
Assumed, because neither netlist nor sheet tells
  - high line 1.10 times nominal

Held, tied down or quieted in the simulation
  - node x3.m was tied to ground by 100 GΩ

Cautions
  - Capacitors hold their charge: discharge, then measure.
  - The chassis may be live on either way of the plug.

123 cases (1 unsolved), 4567 periods simulated in 12.3 s; ngspice 39, PySpice
1.5; ratings chosen by common practice
"""
    )


def test_conditions_name_what_has_no_answer(narrow):
    assert (
        """
Conditions
  nominal    line 230 V; tubes warm, signals muted
  high       line 253 V; as nominal, line high
  cold       line 253 V; tubes without emission
  pulled XU2 line 253 V; XU2 pulled; does not settle
  inrush     line 253 V; switched on from rest with the tubes cold, in the worst
             phase
  pulled XU2: does not settle; motorboats at 3 Hz
"""
        in narrow
    )


def test_parts_past_their_limit_and_parts_without_one(narrow):
    assert re.search(r"^R9 +resistor +power +1\.1 W +high +1 W +PAST ITS LIMIT *$", narrow, re.M)
    assert "no limit is known of XU1: nothing is judged there" in narrow
    # XU2 bears 12.5 W at high line; its design-centre limit of 12 W is judged at nominal.
    assert not re.search(r"^XU2 .*PAST", narrow, re.M)


@pytest.mark.parametrize("width", [40, 80, 131, 132, 250])
def test_no_line_is_wider_than_the_terminal(specimen, width):
    assert max(map(len, printed(specimen, width=width).splitlines())) <= width


def test_the_wide_table_holds_more(wide, narrow):
    for title in ("may leak", "works above", "brief"):
        assert title in wide
        assert title not in narrow


def test_numbers_are_right_aligned(wide):
    header = next(line for line in wide.splitlines() if "ripple" in line and "#" in line)
    end = header.index("ripple") + len("ripple")
    for value in ("1.2 µA", "720 µA", "81.2 mA"):
        row = next(line for line in wide.splitlines() if value in line)
        assert row.index(value) + len(value) == end


def test_no_blank_stands_for_a_missing_number(wide):
    lines = wide.splitlines()
    head = next(line for line in lines if line.split()[:2] == ["#", "part"])
    row = next(line for line in lines if line.startswith("none"))
    for title, word in {"bears": "not run", "worst": "unsolved", "brief": "none"}.items():
        end = head.index(title) + len(title)
        assert row[:end].endswith(word), title


def test_only_verbose_tells_the_method(specimen, narrow):
    assert "Method" not in narrow
    text = printed(specimen, width=200, verbose=True)
    assert re.search(r"^nominal +cycle map +17 +9 +179 +3\.0e-06 +4\.0e-07 +0\.9731 *$", text, re.M)
    assert re.search(r"^pulled XU2 +does not settle +none", text, re.M)


def test_an_old_terminal_gets_letters_that_it_has(specimen):
    raw = io.BytesIO()
    out = io.TextIOWrapper(raw, encoding="ascii", write_through=True)
    print_review(specimen, Console(file=out, width=80))
    text = raw.getvalue().decode("ascii")
    assert "Below 3.91 Mohm XU2 passes" in text
    assert "paper 0.02 uF, 400 V" in text
    assert "?" not in text


def test_a_pipe_gets_no_control_codes(narrow):
    assert "\x1b" not in narrow


def test_no_colour_is_used_that_NO_COLOR_would_have_to_take_away(specimen):
    text = printed(specimen, force_terminal=True, color_system="truecolor", _environ={})
    assert "\x1b[1m" in text  # bold headings on a terminal
    assert set(re.findall(r"\x1b\[([\d;]*)m", text)) <= {"1", "0", ""}


def test_a_name_cannot_send_control_codes(specimen):
    evil = Finding(severity=Severity.NOTE, where="C\x1b[2J", text="a\x1b]0;b\x07 [bold]c[/bold]")
    text = printed(replace(specimen, findings=(evil,)), force_terminal=True, color_system=None)
    assert "\x1b" not in text
    assert "\x07" not in text
    assert "[bold]c[/bold]" in text
