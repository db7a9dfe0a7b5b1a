"""The whole path of a review, stage by stage; the only module that knows every stage."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from functools import partial
from pathlib import Path
from time import monotonic
from typing import TypeAlias

from stress.circuit.build import build
from stress.circuit.chain import Chains
from stress.circuit.circuit import Circuit, Position
from stress.engine.pool import Pool
from stress.engine.solver import Solver
from stress.judge.cautions import cautions
from stress.judge.explain import explain
from stress.judge.findings import Results, findings
from stress.judge.pair import pair_texts
from stress.judge.power_up import power_up
from stress.judge.risk import risks
from stress.netlist.read import read as read_netlist
from stress.parts import read_sheet, types
from stress.parts.models import subcircuit
from stress.parts.policy import Policy, policies
from stress.parts.policy import load as load_policy
from stress.parts.sheet import Sheet
from stress.study.bench import bench
from stress.study.bench_in_place import survey
from stress.study.conditions import HIGH, NOMINAL, case, conditions
from stress.study.detune import timings
from stress.study.discharge import discharge
from stress.study.failures import failures
from stress.study.fault import parse
from stress.study.inrush import inrush
from stress.study.leakage import leakage
from stress.study.other_use import asked
from stress.study.pairs import pairs as likely_pairs
from stress.study.replacement import replacement
from stress.study.reservoir import checked
from stress.study.result import Bench, Leakage, Replacement, Review, Run, Worst
from stress.study.silicon import series_resistors
from stress.study.working import Healthy, work
from stress.study.worst import worst
from stress.text.span import SourceErrors

USUAL_POLICY = "common-practice"
POINTS = 22  # cases of one leakage sweep, for the time that is left

Progress: TypeAlias = Callable[[str, int, int], None]  # stage, cases answered, cases expected


def load(
    path: str | Path,
    *,
    sheet: str | Path | None = None,
    high_V: float | None = None,
    libraries: Sequence[Path] = (),
    type_files: Sequence[Path] = (),
    dialect: str | None = None,
) -> Circuit:
    """Read a netlist and its part sheet and return the circuit.

    Args:
        path: The netlist.
        sheet: The part sheet; None: the file of the same stem with the ending .toml, if any.
        high_V: High line voltage, rms, instead of the sheet's.
        libraries: Folders outside the netlist's own from which it may include files.
        type_files: The user's own tables of types.
        dialect: Instead of the one that is recognised.

    Raises:
        SourceErrors: Everything in netlist and sheet that prevents a simulation.
        OSError: A file that cannot be read.
    """
    own = [entry for file in type_files for entry in types.load(file)]
    netlist = read_netlist(
        path, libraries=libraries, dialect=dialect, built_in=partial(subcircuit, extra=own)
    )
    if netlist.obstacles:
        raise SourceErrors(netlist.obstacles)
    known = read_sheet_of(path, sheet)
    if high_V is not None:
        known = replace(known, line=replace(known.line, high_V=high_V))
    return build(netlist, known, types=own)


def read_sheet_of(path: str | Path, sheet: str | Path | None = None) -> Sheet:
    """Return the part sheet of a netlist; an empty one where there is none."""
    beside = Path(sheet) if sheet is not None else Path(path).with_suffix(".toml")
    if sheet is None and not beside.is_file():
        return Sheet()
    return read_sheet.read(beside)


def policy_of(name: str) -> Policy:
    """Return the derating policy of a name, or that in the user's own file.

    Raises:
        KeyError: There is neither.
        SourceErrors: The file cannot be used.
    """
    known = policies()
    return load_policy(Path(name)) if name not in known and Path(name).is_file() else known[name]


def review(
    path: str | Path,
    *,
    sheet: str | Path | None = None,
    high_V: float | None = None,
    only: Sequence[str] = (),
    also: Sequence[str] = (),
    ask: Sequence[str] = (),
    pairs: int = 0,
    policy: str = USUAL_POLICY,
    plan: bool = False,
    libraries: Sequence[Path] = (),
    type_files: Sequence[Path] = (),
    dialect: str | None = None,
    jobs: int | None = None,
    progress: Progress | None = None,
) -> Review:
    """Review the equipment of a netlist; see `load` for the arguments that are not here.

    Args:
        only: Names of the positions whose faults are studied; empty: all.
        also: Known faults that are in every case, such as "C5 leaky 1 Meg".
        ask: Further conditions, of those that are on offer (`Circuit.uses`).
        pairs: Most pairs of likely faults to be tried; 0: none.
        policy: Name of the derating policy, or a file of the same form.
        plan: Also make the power-up plan and follow the discharge.
        jobs: Worker processes; None: one a core.
        progress: Called with the stage, the cases solved and the cases expected.

    Raises:
        SourceErrors, OSError: As `load`.
        KeyError: A position or a policy of no such name.
        ValueError: A known fault that cannot be read, or a condition that is not on offer.
    """
    circuit = load(
        path,
        sheet=sheet,
        high_V=high_V,
        libraries=libraries,
        type_files=type_files,
        dialect=dialect,
    )
    return review_circuit(
        circuit,
        only=only,
        also=also,
        ask=ask,
        pairs=pairs,
        policy=policy,
        plan=plan,
        jobs=jobs,
        progress=progress,
    )


def review_circuit(
    circuit: Circuit,
    *,
    only: Sequence[str] = (),
    also: Sequence[str] = (),
    ask: Sequence[str] = (),
    pairs: int = 0,
    policy: str = USUAL_POLICY,
    plan: bool = False,
    jobs: int | None = None,
    progress: Progress | None = None,
) -> Review:
    """Review a circuit that has been built; see `review`."""
    started = monotonic()
    rules = policy_of(policy)
    circuit = asked(circuit, ask)
    studied = tuple(circuit.position(name) for name in only) or circuit.positions
    faults = tuple(parse(text, circuit) for text in also)
    stage = "working stress"
    expected = len(conditions(circuit)) + (2 * POINTS + 8) * len(studied)

    def tell(done: int, known: int) -> None:
        if progress is not None:
            progress(stage, done, max(known, expected))

    with Pool(jobs=jobs, progress=tell) as pool:
        healthy = work(circuit, solver=pool, also=faults)
        stage = "switch-on"
        healthy = inrush(circuit, healthy=healthy, solver=pool)
        dropping = series_resistors(circuit, healthy=healthy, solver=pool)
        stage = "leakage"
        leaks = leakage(circuit, studied, healthy=healthy, solver=pool)
        stage = "failures"
        failed = failures(circuit, studied, healthy=healthy, leakage=leaks, solver=pool)
        both = None
        if pairs:
            stage = "two faults at once"
            both = likely_pairs(
                circuit, studied, healthy=healthy, leakage=leaks, count=pairs, solver=pool
            )
        worsts = worst(circuit, working=healthy.working)
        order = risks(circuit, worst=worsts, leakage=leaks, failures=failed)
        stage = "what to fit, what may be read"
        fit = _replacements(circuit, healthy, worsts, rules, pool)
        limits = _bench(circuit, healthy, worsts, leaks, rules, pool)
        power, after = None, None
        if plan:
            stage = "power-up plan"
            power = power_up(
                circuit,
                healthy=healthy,
                leakage=leaks,
                failures=failed,
                risks=order,
                solver=pool,
            )
            stage = "discharge"
            after = discharge(circuit, healthy=healthy, solver=pool)
        versions, totals = pool.versions(), pool.totals
    results = Results(
        circuit=circuit,
        working=healthy.working,
        worst=worsts,
        leakage=leaks,
        failures=failed,
        risks=order,
        pairs=both,
        silicon=dropping,
    )
    return Review(
        circuit=circuit,
        working=healthy.working,
        worst=worsts,
        leakage=leaks,
        failures=failed,
        replacements=fit,
        bench=limits,
        risks=order,
        findings=findings(results),
        explanations=_explanations(results, fit, limits),
        cautions=cautions(circuit, working=healthy.working),
        run=Run(
            cases=totals.cases,
            unsolved=totals.unsolved,
            cycles=totals.cycles,
            wall_s=monotonic() - started,
        ),
        versions=versions,
        policy=policy,
        power_up=power,
        discharge=after,
        pairs=both,
        pair_texts=pair_texts(both, circuit) if both is not None else (),
    )


def _judged(circuit: Circuit, worsts: Mapping[str, Worst]) -> list[Position]:
    """Return the positions that have a value and a lasting voltage."""
    return [p for p in circuit.positions if p.name in worsts and p.value_F]


def _replacements(
    circuit: Circuit,
    healthy: Healthy,
    worsts: Mapping[str, Worst],
    policy: Policy,
    solver: Solver,
) -> Mapping[str, Replacement]:
    """Choose what to fit; reservoirs are tried in place at the highest line that settled."""
    chosen = {
        p.name: replacement(
            p, working=healthy.working, worst=worsts[p.name], policy=policy, circuit=circuit
        )
        for p in _judged(circuit, worsts)
    }
    for name in (HIGH, NOMINAL):
        for condition in healthy.working.conditions:
            if condition.name == name and name in healthy.settled:
                base = case(circuit, condition, twin=healthy.twin)
                return checked(chosen, circuit=circuit, base=base, solver=solver)
    return chosen


def _bench(
    circuit: Circuit,
    healthy: Healthy,
    worsts: Mapping[str, Worst],
    leaks: Mapping[str, Leakage],
    policy: Policy,
    solver: Solver,
) -> Mapping[str, Bench]:
    """Set the bench limits, and say which test means something with the part in place."""
    limits = {
        p.name: bench(
            p,
            working=healthy.working,
            worst=worsts[p.name],
            leakage=leaks.get(p.name),
            circuit=circuit,
            policy=policy,
        )
        for p in _judged(circuit, worsts)
    }
    return survey(limits, circuit=circuit, twin=healthy.twin, solver=solver)


def _explanations(
    results: Results, fit: Mapping[str, Replacement], limits: Mapping[str, Bench]
) -> Mapping[str, tuple[str, ...]]:
    chains = Chains(results.circuit)
    tuned = timings(results.circuit)
    ranked = {risk.position: risk for risk in results.risks}
    return {
        p.name: explain(
            p,
            circuit=results.circuit,
            chains=chains,
            working=results.working,
            worst=results.worst.get(p.name),
            leakage=results.leakage.get(p.name),
            failures=results.failures.get(p.name, ()),
            replacement=fit.get(p.name),
            bench=limits.get(p.name),
            risk=ranked[p.name],
            timing=tuned.get(p.name),
        )
        for p in results.circuit.positions
    }
