"""The engine's numbers: one run, one table, printed and kept beside this file.

    python tests/bench/engine.py [--quick]

With --quick fewer cases are compared. Times are ratios taken in this one run.
"""

import platform
import shutil
import subprocess
import sys
import tempfile
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from statistics import median
from time import monotonic

import numpy as np
import psutil

sys.path.insert(0, str(Path(__file__).parent))
from plainly import averaged_plainly, ngspice, settled_plainly
from record import MIDGET, RECEIVER, Log, cpu_s, leaks, reviewed

from stress.engine.case import Case, Settled, Twin
from stress.engine.cycle import Grid
from stress.engine.deck import Deck
from stress.engine.draft import Draft
from stress.engine.pool import Pool
from stress.engine.seek import Seeker
from stress.netlist.read import read

FINER = 3
RESULTS = Path(__file__).with_name("RESULTS.md")


@dataclass(frozen=True)
class Line:
    """One line of the table."""

    what: str
    target: str
    found: str
    met: bool


def cycles(log: Log, name: str) -> Line:
    counts = [answer.proof.cycles for _, answer in leaks(log)]
    middle, high = float(np.median(counts)), float(np.percentile(counts, 95))
    return Line(
        f"cycles per warm-started leak case, {name} ({len(counts)} cases)",
        "median ≤ 4, 95 % ≤ 12",
        f"{middle:g}, {high:.0f}",
        middle <= 4 and high <= 12,
    )


def condition(log: Log, name: str) -> Case:
    """The case of a healthy condition, as if it had no relative."""
    case = next(case for case, _ in log.asked if case.name == name)
    return Case(name=f"{name} from rest", twin=case.twin, values=case.values, removed=case.removed)


def from_rest_cycles(deck: Deck) -> int:
    search = Seeker(ngspice(), deck, spare=lambda: deck)
    search.from_rest(Grid())
    return search.cycles


def from_rest(log: Log, name: str) -> Line:
    counts = []
    for which in ("nominal", "high"):
        case = condition(log, which)
        deck = Draft(case.twin, case.removed, forever=True).deck(case.values)
        counts.append(from_rest_cycles(deck))
    return Line(f"cycles from rest, loaded, {name}", "≤ 25", str(counts), max(counts) <= 25)


def against_plain(log: Log, name: str, *, target: float, samples: int) -> Line:
    """Ratio of plain transients from rest to what the review's cases took in ngspice."""
    cases = [case for case, _ in log.steady if "pulled" not in case.name]
    chosen = cases[:: max(len(cases) // samples, 1)][:samples]
    grid = log.steady[0][1].proof.points
    times, periods = [], []
    for case in chosen:
        spent, count = settled_plainly(
            case, grid=Grid(points=round(grid / 10) * 10), within=2e-4, most=3000
        )
        times.append(spent)
        periods.append(count)
    per_case = log.totals.inside_s / log.totals.cases
    ratio = float(np.mean(times)) / per_case
    return Line(
        f"plain transients from rest against the review's cases, {name}"
        f" ({len(chosen)} sampled, {median(periods):.0f} periods in the median)",
        f"≥ {target:g}",
        f"{ratio:.0f}",
        ratio >= target,
    )


def against_program(log: Log, periods: int) -> Line:
    """Ratio of one default run of the program a case, one after the other, to the command.

    By the clock the command has both cores; by processor time the ratio is what the method gives.
    """
    case = condition(log, "nominal")
    deck = Draft(case.twin, case.removed, forever=True, easy=False).deck(case.values)
    period_s = deck.period_s or 1.0
    lines = deck.text({}, options="reltol=1e-3")
    lines.insert(-1, f".tran {period_s / 170!r} {periods * period_s!r} 0 {period_s / 170!r} uic")
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "case.cir").write_text("\n".join(lines), encoding="ascii")
        program = shutil.which("ngspice") or "ngspice"
        one = spent([program, "-b", "-r", "out.raw", "case.cir"], folder)
        command = Path(sys.executable).with_name("capstress")
        whole = spent([str(command), "review", str(RECEIVER), "--jobs", "2"], folder)
    clock, processor = (log.totals.cases * a / b for a, b in zip(one, whole, strict=True))
    return Line(
        f"one default run of the program a case ({periods} periods, {one[0]:.1f} s, one after "
        f"the other) against `capstress review` on 2 cores ({log.totals.cases} cases, "
        f"{whole[0]:.0f} s): by the clock, by processor time",
        "≥ 100",
        f"{clock:.0f}, {processor:.0f}",
        clock >= 100,
    )


def spent(command: list[str], folder: str) -> tuple[float, float]:
    """Seconds by the clock and of processor time that a command takes."""
    began, before = monotonic(), cpu_s()
    subprocess.run(command, cwd=folder, capture_output=True, check=False)
    return monotonic() - began, cpu_s() - before


def wave_of(log: Log) -> list[Case]:
    """A wave of leak cases, each from a healthy state, after those three states."""
    roots = {case.name: case for case, _ in log.asked}
    first = next(case for case, _ in log.asked)
    found = [
        Case(name=case.name, twin=case.twin, values=case.values, parent="high")
        for case, _ in leaks(log)
        if case.name.startswith("high") and not case.removed
    ][:40]
    return [first, *(roots[name] for name in ("nominal", "high")), *found]


def timed(cases: list[Case], jobs: int) -> float:
    with Pool(jobs=jobs) as pool:
        list(pool.solve(cases[:3]))
        began = monotonic()
        list(pool.solve(cases[3:]))
        return monotonic() - began


def two_workers(log: Log) -> Line:
    cases, ratios = wave_of(log), []
    for _ in range(5):
        half = len(cases[3:]) // 2
        parts = [cases[:3] + cases[3 : 3 + half], cases[:3] + cases[3 + half :]]
        with ThreadPoolExecutor(2) as threads:
            alone = max(threads.map(lambda part: timed(part, 1), parts))
        ratios.append(alone / timed(cases, 2))
    found = median(ratios)
    return Line(
        "2 workers against two single workers at once, median of 5",
        "≥ 0.85",
        f"{found:.2f}",
        found >= 0.85,
    )


def outside(log: Log, name: str) -> Line:
    share = 1.0 - log.totals.inside_s / log.cpu_s
    return Line(
        f"processor time not spent inside ngspice, {name}", "≤ 25 %", f"{share:.0%}", share <= 0.25
    )


def stages(count: int) -> Twin:
    """Return triode stages side by side, two capacitors each, on one rectifier."""
    cards = ["* t", "Vac a 0 SIN(0 300 50)", "Rs a b 50", "D1 b bp DM", "C0 bp 0 47u"]
    cards.append(".model DM D(IS=1n N=1.8)")
    for n in range(count // 2):
        cards += [
            f"Rp{n} bp p{n} 100k",
            f"B{n} p{n} k{n} I=1m*pow(max(V(g{n},k{n})+V(p{n},k{n})/50,0),1.5)",
            f"Rk{n} k{n} 0 1.5k",
            f"Ck{n} k{n} 0 10u",
            f"Cc{n} p{n} o{n} 10n",
            f"Ro{n} o{n} 0 470k",
            f"Rg{n} g{n} 0 470k",
        ]
    cards.append(".end")
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "stages.cir"
        path.write_text("\n".join(cards), encoding="ascii")
        netlist = read(path)
    return Twin(elements=netlist.elements, models=netlist.models, period_s=0.02)


def growth() -> Line:
    sizes, times = (10, 20, 40, 80), []
    for size in sizes:
        twin = stages(size)
        cases = [Case(name="root", twin=twin)]
        cases += [
            Case(name=f"{n}", twin=twin, parent="root", values={f"Ro{n % (size // 2)}": 3e5})
            for n in range(24)
        ]
        with Pool(jobs=1) as pool:
            list(pool.solve(cases[:1]))
            before = pool.totals.inside_s
            list(pool.solve(cases[1:]))
            times.append((pool.totals.inside_s - before) / 24)
    exponent = float(np.polyfit(np.log(sizes), np.log(times), 1)[0])
    return Line(
        "time per case against the number of capacitors, 10 to 80: exponent",
        "≤ 1.2",
        f"{exponent:.2f} ({', '.join(f'{1e3 * t:.0f} ms' for t in times)})",
        exponent <= 1.2,
    )


def accuracy(log: Log, name: str, *, periods: int) -> Line:
    case = condition(log, "nominal")
    own = next(a for c, a in log.steady if c.name == "nominal")
    fine = averaged_plainly(case, points=FINER * Grid().points, periods=periods)
    ripple = peak = 0.0
    for position in case.twin.currents:
        row = f"i({position.lower()})"
        if fine.get(row, (0.0, 0.0))[1] > 1e-4:
            current = own.waves.current(position)
            ripple = max(ripple, abs(own.waves.rms(current) / fine[row][1] - 1.0))
    for row, (mean, _, top) in fine.items():
        if "#plate" in row and row.startswith("i(") and top > 3.0 * max(mean, 0.01):
            # The pulses of the rectifier, which has more than 10 ohm in its path.
            found = float(own.waves.current(row[2:-1]).max())
            peak = max(peak, abs(found / top - 1.0))
    direct = off(own, case, fine)
    return Line(
        f"accuracy against a plain transient of {periods} periods, {FINER} times finer, {name}: "
        "direct, rms current, peak of the rectifier",
        "0.02 %, 0.5 %, 2 %",
        f"{100 * direct:.3f} %, {100 * ripple:.2f} %, {100 * peak:.2f} %",
        direct <= 2e-4 and ripple <= 5e-3 and 0.0 < peak <= 2e-2,
    )


def off(own: Settled, case: Case, fine: dict[str, tuple[float, float, float]]) -> float:
    """How far the mean voltages at the capacitors are off, of those above 1 V."""
    nodes = {
        node
        for element in case.twin.elements
        if element.letter == "C" and element.name in case.twin.currents
        for node in element.nodes
        if abs(fine.get(f"v({node})", (0.0,))[0]) > 1.0
    }
    return max(
        abs(own.waves.mean(own.waves.voltage(node)) / fine[f"v({node})"][0] - 1.0) for node in nodes
    )


def unloaded(log: Log, name: str, *, periods: int) -> Line:
    case = condition(log, "cold")
    own = next(a for c, a in log.steady if c.name == "cold")
    direct = off(own, case, averaged_plainly(case, points=Grid().points, periods=periods))
    return Line(
        f"accuracy without load (cold) against a plain transient of {periods} periods, {name}",
        "0.3 %",
        f"{100 * direct:.3f} %",
        direct <= 3e-3,
    )


def peak_MB(process: psutil.Process) -> float:
    """The most memory a process has had so far, as the kernel keeps it."""
    status = Path(f"/proc/{process.pid}/status").read_text(encoding="ascii")
    return int(status.split("VmHWM:")[1].split()[0]) / 1e3


def memory(count: int) -> Line:
    twin = stages(10)
    with Pool(jobs=1) as pool:
        list(pool.solve([Case(name="root", twin=twin)]))
        worker = max(psutil.Process().children(), key=lambda p: p.memory_info().rss)
        sizes = []
        for start in range(0, count, count // 5):
            list(
                pool.solve(
                    Case(name=f"{n}", twin=twin, parent="root", values={"Ro1": 3e5 + n % 7})
                    for n in range(start, start + count // 5)
                )
            )
            sizes.append(worker.memory_info().rss)
        peak = peak_MB(worker)
    grown = (sizes[-1] - sizes[0]) / 4 * 5 / count * 10_000 / 1e6
    return Line(
        f"memory of a worker: peak, growth over 10,000 cases ({count} run)",
        "≤ 200 MB, ≤ 2 MB",
        f"{peak:.0f} MB, {grown:.1f} MB",
        peak <= 200 and grown <= 2,
    )


def main() -> None:
    quick = "--quick" in sys.argv
    lines: list[Line] = []

    def add(line: Line) -> None:
        lines.append(line)
        print(
            f"{'met ' if line.met else 'NOT '} {line.what}: {line.found} ({line.target})",
            flush=True,
        )

    receiver, midget = reviewed(RECEIVER, jobs=2), reviewed(MIDGET, jobs=2)
    for log, name in ((receiver, "receiver"), (midget, "midget")):
        add(cycles(log, name))
        add(from_rest(log, name))
        add(outside(log, name))
    samples = 3 if quick else 8
    add(against_plain(receiver, "receiver", target=60, samples=samples))
    add(against_plain(midget, "midget", target=6, samples=2 * samples))
    add(against_program(receiver, 600))
    add(two_workers(receiver))
    add(growth())
    add(accuracy(receiver, "receiver", periods=500))
    add(accuracy(midget, "midget", periods=200))
    add(unloaded(receiver, "receiver", periods=3000))
    add(unloaded(midget, "midget", periods=3000))
    add(memory(1000 if quick else 10_000))
    table = [
        "# Numbers of the engine",
        "",
        f"`python tests/bench/engine.py{' --quick' if quick else ''}`, ngspice {ngspice().version}, Python "
        f"{platform.python_version()}, {psutil.cpu_count()} cores. "
        f"Reviews on 2 workers: receiver {receiver.totals.cases} cases in {receiver.wall_s:.0f} s, "
        f"midget {midget.totals.cases} in {midget.wall_s:.0f} s.",
        "",
        "| what | target | found | met |",
        "| --- | --- | --- | --- |",
        *(f"| {x.what} | {x.target} | {x.found} | {'yes' if x.met else 'no'} |" for x in lines),
    ]
    RESULTS.write_text("\n".join(table) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
