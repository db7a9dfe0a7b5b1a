"""A second opinion on an equipment: its netlist, given to the plain ngspice program.

Run as a script it writes `oracle.json`, the settled values of the equipments by a long
transient from rest (some minutes; delete `models.json` first to take the models of today):

    python tests/netlists/plain_program.py [NAME ...]

Nothing of the reader, the circuit layer or the engine is used: the text of the netlist goes to
the program line by line, with the built-in subcircuits appended; `models.json` keeps their text
as it was, so that a better fit of a tube needs no new oracle. Every capacitor gets an ESR of
1 mohm in series and 10 Gohm across both, which the tests state in the sheet likewise, and
signals are muted.
"""

from __future__ import annotations

import json
import re
import subprocess
import sys
import tempfile
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from stress.parts.models import subcircuit

NETLISTS = Path(__file__).parents[2] / "netlists"
ORACLE = Path(__file__).with_name("oracle.json")
MODELS = Path(__file__).with_name("models.json")
ESR_OHM, LEAKAGE_OHM = 1e-3, 1e10
SIGNALS = ("Vaf", "Vin", "Vmic")


@dataclass(frozen=True)
class Run:
    """How long an equipment takes to settle from rest, and with which largest step."""

    period_s: float
    stop_s: float
    points: int  # of the largest step, a period


RUNS = {
    "shore_receiver": Run(1 / 60, 9.0, 700),
    "harbour_midget": Run(1 / 60, 4.0, 1000),
    "hall_amplifier": Run(1 / 50, 14.0, 500),
    "beacon_transmitter": Run(1 / 50, 8.0, 1200),
    "charthouse_smps": Run(20e-6, 200e-3, 500),
}


def deck(stem: str, run: Run, *, factors: Mapping[str, float]) -> tuple[str, dict[str, list[str]]]:
    """Return the text for the program and the nodes of every capacitor by its name."""
    title, *lines = (NETLISTS / f"{stem}.cir").read_text(encoding="utf-8").splitlines()
    cards, capacitors, types = [title], {}, set()
    for line in lines:
        words = line.split()
        if not words or words[0].startswith("*") or words[0].lower() == ".end":
            continue
        name = words[0]
        if name[0] == "C":
            capacitors[name] = words[1:3]
            plus, minus, value = words[1:4]
            cards += [
                f"{name} {plus} {name}_in {value}",
                f"R{name}_esr {name}_in {minus} {ESR_OHM}",
                f"R{name}_leak {plus} {minus} {LEAKAGE_OHM}",
            ]
        elif name in SIGNALS:
            cards.append(f"{name} {words[1]} {words[2]} DC 0")
        elif name in factors:
            cards.append(_scaled(line, factors[name]))
        else:
            cards.append(line)
            if name[0] == "X":
                types.add(words[-1])
    bodies = [kept(name) for name in sorted(types)]
    currents = " ".join(f"@{name.lower()}[i]" for name in capacitors)
    step = run.period_s / run.points
    end = [
        ".options method=gear reltol=1e-4 abstol=1e-10",
        f".save all {currents}",
        f".tran {step} {run.stop_s} {run.stop_s - run.period_s * 1.01} {step} uic",
        ".end",
    ]
    return "\n".join([*cards, *bodies, *end]) + "\n", capacitors


def kept(name: str) -> str:
    """Return the built-in subcircuit of a type as the oracle was made with it."""
    held = json.loads(MODELS.read_text(encoding="utf-8")) if MODELS.exists() else {}
    if name not in held:
        held[name] = subcircuit(name)
        MODELS.write_text(json.dumps(held, indent=1, sort_keys=True) + "\n", encoding="utf-8")
    return str(held[name])


def settled(stem: str, run: Run, *, factors: Mapping[str, float] | None = None) -> dict[str, dict]:
    """Return mean, peak, ripple voltage (rms) and current (rms) of every capacitor."""
    text, capacitors = deck(stem, run, factors=factors or {})
    vectors = simulate(text)
    time = vectors["time"]
    last = time >= time[-1] - run.period_s * (1 + 1e-9)

    def mean(samples: NDArray[np.float64]) -> float:
        at = time[last]
        return float(np.trapezoid(samples, at) / (at[-1] - at[0]))

    def at(node: str) -> NDArray[np.float64]:
        return np.zeros(last.sum()) if node == "0" else vectors[f"v({node.lower()})"][last]

    found = {}
    for name, (plus, minus) in capacitors.items():
        volts = at(plus) - at(minus)
        amps = vectors[f"i(@{name.lower()}[i])"][last]
        found[name] = {
            "dc_V": mean(volts),
            "peak_V": float(np.abs(volts).max()),
            "ripple_V": mean((volts - mean(volts)) ** 2) ** 0.5,
            "ripple_A": mean(amps**2) ** 0.5,
        }
    return found


def simulate(text: str) -> dict[str, NDArray[np.float64]]:
    """Run the program on a deck and return its vectors by lower-case name."""
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "deck.cir").write_text(text, encoding="utf-8")
        done = subprocess.run(
            ["ngspice", "-b", "-r", "out.raw", "deck.cir"],
            cwd=folder,
            env={"PATH": "/usr/bin:/bin", "HOME": folder},
            capture_output=True,
            text=True,
            check=False,
        )
        raw = Path(folder) / "out.raw"
        if not raw.exists():
            raise RuntimeError(f"the ngspice program gave no result: {done.stderr[-500:]}")
        return _vectors(raw.read_bytes())


def _vectors(raw: bytes) -> dict[str, NDArray[np.float64]]:
    head, _, body = raw.partition(b"Binary:\n")
    text = head.decode("latin-1")
    count = int(re.search(r"No\. Variables:\s*(\d+)", text)[1])
    points = int(re.search(r"No\. Points:\s*(\d+)", text)[1])
    rows = text[text.index("\nVariables:") :].splitlines()[2 : 2 + count]
    values = np.frombuffer(body, dtype=np.float64, count=count * points).reshape(points, count).T
    return {row.split()[1].lower(): samples for row, samples in zip(rows, values, strict=True)}


def _scaled(line: str, factor: float) -> str:
    """Return the card of a SIN or DC source with its amplitude times a factor."""
    sine = re.match(r"(.*SIN\(\S+\s+)(\S+)(.*)", line)
    name, plus, minus, *rest = line.split()
    if sine is None:
        return f"{name} {plus} {minus} DC {float(rest[1]) * factor}"
    return f"{sine[1]}{float(sine[2]) * factor}{sine[3]}"


def main() -> None:
    stems = sys.argv[1:] or list(RUNS)
    held = json.loads(ORACLE.read_text(encoding="utf-8")) if ORACLE.exists() else {}
    for stem in stems:
        held[stem] = settled(stem, RUNS[stem])
        ORACLE.write_text(json.dumps(held, indent=1, sort_keys=True) + "\n", encoding="utf-8")
        print(stem, flush=True)


if __name__ == "__main__":
    main()
