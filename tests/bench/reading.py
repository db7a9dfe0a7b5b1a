"""How long reading takes, as ratios within one run: `python tests/bench/reading.py`.

A library of 20,000 lines with one used model is compared with a plain loop that splits the same
lines; ten times the lines should take at most eleven times as long; unused subcircuits are not
expanded. Prints each ratio with its limit and ends with status 1 where one is passed.
"""

from __future__ import annotations

import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from stress.netlist.read import read

TUBE = """\
* type {k}
.subckt TR{k} A G K params: mu=20 ex=1.3
B1 7 0 V=V(A,K)/600*ln(1+exp(600*(1/mu+V(G,K)/sqrt(300+V(A,K)*V(A,K)))))
BG1 A K I=(max(V(7),1e-9)^ex)/1060
RE 7 0 1G
C1 G K 2.3p
C2 A G 2.4p
R1 G 5 2k
D3 5 K DX
.model DX D(IS=1N RS=1 CJO=10PF TT=1N)
.ends

.model D{k} D(IS={k}e-12 N=1.7 RS=0.1
+ BV=100 IBV=1u CJO=10p)
"""
LINES = TUBE.count("\n")
PARTS = "R{k} n{k} n{m} {m}k\nC{k} n{k} 0 10u\nD{k} n{k} 0 DX\nQ{k} n{k} b{k} 0 QX\n"
MODELS = ".model DX D(IS=1n)\n.model QX NPN(BF=100)\n"


def best_of(times: int, work: Callable[[], object]) -> float:
    """Return the shortest processor time of several runs, in seconds."""
    found = []
    for _ in range(times):
        start = time.process_time()
        work()
        found.append(time.process_time() - start)
    return min(found)


def library(folder: Path, lines: int) -> tuple[Path, str]:
    """Write a netlist that uses one type of a library of so many lines."""
    text = "".join(TUBE.format(k=k) for k in range(1, lines // LINES + 1))
    (folder / f"tubes{lines}.lib").write_text(text, encoding="utf-8")
    netlist = folder / f"lib{lines}.cir"
    netlist.write_text(
        f"title\nV1 a 0 100\nR1 a b 1k\nX1 b 0 0 TR7\n.include tubes{lines}.lib\n",
        encoding="utf-8",
    )
    return netlist, text


def flat(folder: Path, lines: int) -> Path:
    """Write a netlist of so many element cards."""
    netlist = folder / f"flat{lines}.cir"
    cards = "".join(PARTS.format(k=k, m=k + 1) for k in range(lines // 4))
    netlist.write_text(f"title\n{cards}{MODELS}", encoding="utf-8")
    return netlist


def main() -> int:
    """Measure, print, and return the exit status."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        netlist, text = library(folder, 20_000)
        larger, _ = library(folder, 200_000)
        used = read(netlist)
        plain = best_of(7, lambda: [line.split() for line in text.split("\n")])
        small = best_of(5, lambda: read(netlist))
        large = best_of(3, lambda: read(larger))
        few, many = flat(folder, 4_000), flat(folder, 40_000)
        cards = best_of(3, lambda: read(few))
        more = best_of(1, lambda: read(many))
        rows = [
            ("library of 20,000 lines / plain loop", small / plain, 12.0),
            ("library of ten times the lines", large / small, 11.0),
            ("ten times the element cards", more / cards, 11.0),
            ("seconds for 5,000 element cards", cards * 1.25, 1.0),
            ("elements expanded of an unused library", float(len(used.elements)), 10.0),
        ]
    for what, value, limit in rows:
        print(f"{what:42} {value:8.2f}   at most {limit:g}")
    return int(any(value > limit for _, value, limit in rows))


if __name__ == "__main__":
    sys.exit(main())
