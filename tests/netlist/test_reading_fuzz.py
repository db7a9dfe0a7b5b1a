"""Any text either reads or is refused by our own errors; what we write reads back the same.

20,000 examples a run, the same in every run. A hang is an example of more than 2 s of processor
time, told by the timer of the process, so that a busy machine does no harm.
"""

from __future__ import annotations

import signal
import tracemalloc
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from stress.netlist.flat import Element, Netlist
from stress.netlist.formula import parse
from stress.netlist.meaning import FormulaError
from stress.netlist.read import read_text
from stress.netlist.write import write
from stress.text.number import NumberError, read_number
from stress.text.span import SourceErrors

GOOD = """\
* a small receiver
V1 line 0 SIN(0 165 60)
D1 line raw DX
R1 raw b1 {rload*2}
C1 raw 0 40uF/450V
C2 b1 0 20u V=350 Rser=2 type="Al electrolytic"
XV1 p g 0 TRI mu=100 ex=1.4 kg1=1060
R2 b1 p 220k
R3 g 0 10meg
E1 e 0 VALUE={LIMIT(V(p,g)*2,0,100)}
G1 e 0 TABLE {V(p)} = (0,0) (1,1m)
F1 e 0 POLY(1) V1 0 2
B1 f 0 V=if(V(p)>1, table(V(g),0,0,1,2), pwr(V(p),1.5))
K1 L1 L2 L3 0.99
L1 a 0 1 Rser=5
L2 c 0 2
L3 d 0 3
S1 a c e 0 SX
Q1 c b e QX 2
.param rload=4k7
.func gain(x) {x*2+1}
.subckt TRI A G K mu=20 ex=1.3 kg1=1180
B1 7 0 V=V(A,K)/600*ln(1+exp(600*(1/mu+V(G,K)/sqrt(300+V(A,K)*V(A,K)))))
BG1 A K I=(max(V(7),1e-9)^{ex})/{kg1}
.if (mu > 50)
C1 G K 2.3p
.else
C1 G K 3p
.endif
.ends
.model DX D(IS=1n N={1+1}
+ RS=2 CJO=10p)
.model SX VSWITCH(RON=1 ROFF=1meg VON=2 VOFF=1)
.model QX AKO:QY NPN(BF=50)
.model QY NPN(IS=1f)
.ic V(raw)=200
.options reltol=1e-4
.tran 1m 1 startup
.end
"""
LINES = GOOD.split("\n")
PIECES = [
    "{", "}", "(", ")", "'", '"', "=", ",", ";", "$", "//", "\\\\", "+", "-", "*", "/", "^", "**",
    "?", ":", "<", "0", "1", "4k7", "1e-9", "1M", "10F", "1,5k", "\t", "\n", "\n+", "\n*", " ", "V(",
    "I(", ".param ", ".subckt ", ".ends", ".model ", ".if ", ".endif", ".include x", ".lib x y", "X",
    "R", "C", "POLY(2)", "TABLE", "VALUE", "SIN(", "PWL(", "if(", "µ", "μ", "§", "\xa0", "\x00",
    "\ufeff", "\u2028", "nan", "inf", "1e999", "AKO:", "m=", "K1", "[", "]", "%", "~", "|", "&", "mu",
]  # fmt: skip
FUZZ = settings(
    deadline=None,
    derandomize=True,
    database=None,
    suppress_health_check=list(HealthCheck),
)


@contextmanager
def within_bounds() -> Iterator[None]:
    """Refuse more than 2 s of processor time for one example."""

    def stop(signum: int, frame: FrameType | None) -> None:
        raise AssertionError("more than 2 s of processor time")

    held = signal.signal(signal.SIGVTALRM, stop)
    signal.setitimer(signal.ITIMER_VIRTUAL, 2.0)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_VIRTUAL, 0)
        signal.signal(signal.SIGVTALRM, held)


def reads_or_refuses(text: str) -> Netlist | None:
    with within_bounds():
        told = "read"
        try:
            return read_text(text)
        except SourceErrors as errors:
            told = str(errors)
        assert told
        return None


def meaning(netlist: Netlist) -> list[tuple[object, ...]]:
    return [_meaning(element) for element in netlist.elements]


def _meaning(e: Element) -> tuple[object, ...]:
    quantity = e.law.quantity if e.law is not None else None
    head = (e.name, e.letter, e.nodes, e.value, e.model, e.controls, e.wave, e.tags, quantity)
    return (*head, dict(e.parameters))


mutations = st.lists(
    st.tuples(
        st.integers(0, len(GOOD) - 1),
        st.integers(0, 12),
        st.sampled_from(PIECES) | st.text(max_size=3),
    ),
    min_size=1,
    max_size=4,
)


@given(mutations)
@settings(FUZZ, max_examples=4000)
def test_any_mutation_reads_or_is_refused(changes: list[tuple[int, int, str]]):
    text = GOOD
    for at, cut, piece in changes:
        text = text[:at] + piece + text[at + cut :]

    netlist = reads_or_refuses(text)

    if (
        netlist is not None
        and not netlist.obstacles
        and not any(
            element.value is None and element.letter == "C" and element.law is None
            for element in netlist.elements
        )
    ):
        again = read_text(write(netlist))
        assert meaning(again) == meaning(netlist)
        assert write(again) == write(netlist)


cards = st.lists(
    st.sampled_from(LINES) | st.lists(st.sampled_from(PIECES), max_size=8).map(" ".join),
    max_size=8,
)


@given(cards)
@settings(FUZZ, max_examples=3000)
def test_any_cards_read_or_are_refused(lines: list[str]):
    reads_or_refuses("title\n" + "\n".join(lines))


class Nothing:
    def value(self, name: str) -> float | str | None:
        return {"a": 2.0, "mac": "V(p,q)*2"}.get(name)

    def function(self, name: str) -> tuple[tuple[str, ...], str] | None:
        return (("x", "y"), "x+y*2") if name == "f" else None

    def node(self, name: str) -> str:
        return name.lower()

    def element(self, name: str) -> str:
        return name

    def similar(self, name: str, *, functions: bool = False) -> str:
        return ""


parts = st.sampled_from(
    [
        *"1a(){}+-*/^?:,<!~|%'",
        *[
            "2.5",
            "1k",
            "4k7",
            "mac",
            "f(",
            "V(p)",
            "V(p,q)",
            "I(v1)",
            "**",
            ">=",
            "==",
            "&&",
            "exp(",
            "ln(",
            "pwr(",
            "limit(",
        ],
        *["table(", "if(", "sqrt(", "max(", "time", "acosh(", "u("],
    ]
)


@given(st.lists(parts, max_size=14), st.sampled_from(["default", "ps", "lt", "hs"]), st.booleans())
@settings(FUZZ, max_examples=6000)
def test_any_expression_parses_or_is_refused(pieces: list[str], dialect: str, parametric: bool):
    text = "".join(pieces)
    with within_bounds():
        place = (0, 0)
        try:
            parse(text, Nothing(), dialect=dialect, parametric=parametric)
        except FormulaError as error:
            place = (error.start, error.end)
        assert 0 <= place[0] <= place[1]


@given(st.text(alphabet="0123456789.+-eEdkKmMuµμpnfgGtTrRxVFh,Ω %", max_size=10))
@settings(FUZZ, max_examples=4000)
def test_any_number_reads_or_is_refused(text: str):
    for quantity in ("R", "C", ""):
        value, at = 0.0, 0
        try:
            value = read_number(text, quantity=quantity).value
        except NumberError as error:
            at = error.start
        assert abs(value) < float("inf")
        assert 0 <= at <= len(text)


@given(st.floats(allow_nan=False, allow_infinity=False))
@settings(FUZZ, max_examples=3000)
def test_numbers_round_trip(value: float):
    assert read_number(repr(value)).value == value
    netlist = read_text(f"t\nV1 a 0 {value!r}\n")
    assert read_text(write(netlist)).elements[0].value == value


def test_memory_stays_small():
    tracemalloc.start()
    try:
        for _ in range(20):
            read_text(GOOD)
        held, peak = tracemalloc.get_traced_memory()
    finally:
        tracemalloc.stop()
    assert peak < 20e6
    assert held < 5e6
