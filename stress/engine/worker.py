"""What runs in a worker process: jobs in, results out, one ngspice inside.

The process stands in an empty folder that is also its home, so that no start-up file of the
user is ever executed. Whatever ends or poisons it costs the job it was at, nothing else.
"""

from __future__ import annotations

import os
import pickle
import signal
from collections import OrderedDict
from collections.abc import Mapping
from dataclasses import dataclass, replace
from importlib.metadata import version
from pathlib import Path
from typing import TypeAlias

import numpy as np

from stress.engine.beyond import bent
from stress.engine.case import (
    Analysis,
    Answer,
    Ran,
    Response,
    Settled,
    SmallSignal,
    Steady,
    Transient,
    Twin,
    Unsolved,
    Wandering,
    Waves,
)
from stress.engine.cycle import CAREFUL, SHUNTED, Grid
from stress.engine.deck import Deck
from stress.engine.draft import Draft
from stress.engine.ease import holders
from stress.engine.memory import Memory, Outcome, inherited, start_from, translated
from stress.engine.ngspice import VARIABLE, Broken, DeckRefused, Ngspice, RunFailed
from stress.engine.oscillation import Tank, oscillates, tanks
from stress.engine.response import response
from stress.engine.solver import Versions
from stress.engine.steady import Search
from stress.engine.topology import LoopOfSources

SHUNT_NOTICE = "solved with 10 gigohm from every node to ground, without which nothing starts"
KEPT_TWINS, KEPT_DRAFTS = 8, 64
STEPS = 1000  # of a transient without a period


@dataclass(frozen=True, slots=True, kw_only=True)
class Job:
    """A case on its way to a worker.

    Attributes:
        case: Its name.
        twin: File with the pickled twin.
        memory: What its parent left, or None.
        quieted: Elements taken away so that a stage does not oscillate.
    """

    case: str
    twin: str
    values: Mapping[str, float]
    removed: frozenset[str]
    analysis: Analysis
    memory: Memory | None
    quieted: frozenset[str] = frozenset()


@dataclass(frozen=True, slots=True, kw_only=True)
class Result:
    """What a worker says of a job.

    Attributes:
        poisoned: Why the process must not be used again, or "".
        cycles: Periods simulated, with those for Jacobians.
        inside_s: Processor time spent in ngspice.
    """

    answer: Answer
    memory: Memory | None
    cycles: int
    inside_s: float
    poisoned: str = ""


# Twin, what is left out, which sources are changed, forever, easy.
_Key: TypeAlias = tuple[str, frozenset[str], frozenset[str], bool, bool]


class _Process:
    """What a worker process keeps from job to job."""

    def __init__(self) -> None:
        self._ngspice: Ngspice | None = None
        self._twins: OrderedDict[str, Twin] = OrderedDict()
        self._holders: dict[str, frozenset[str]] = {}
        self._drafts: OrderedDict[_Key, Draft] = OrderedDict()

    @property
    def ngspice(self) -> Ngspice:
        if self._ngspice is None:
            self._ngspice = Ngspice()
        return self._ngspice

    def draft(self, job: Job, *, forever: bool, easy: bool = True) -> Draft:
        quieted = frozenset() if job.memory is None else job.memory.quieted
        removed = job.removed | quieted | job.quieted
        twin = self._twin(job.twin)
        moved = {name.lower() for name in job.values}
        if isinstance(job.analysis, SmallSignal):
            moved.add(job.analysis.source.lower())
        changed = frozenset(moved & self._holders[job.twin])
        key = (job.twin, removed, changed, forever, easy)
        draft = self._drafts.get(key)
        if draft is None:
            draft = Draft(twin, removed, forever=forever, easy=easy, changed=changed)
            self._drafts[key] = draft
            if len(self._drafts) > KEPT_DRAFTS:
                self._drafts.popitem(last=False)
        self._drafts.move_to_end(key)
        return draft

    def _twin(self, path: str) -> Twin:
        twin = self._twins.get(path)
        if twin is None:
            twin = pickle.loads(Path(path).read_bytes())
            assert isinstance(twin, Twin)
            self._twins[path] = twin
            self._holders[path] = frozenset(holders(twin.elements))
            if len(self._twins) > KEPT_TWINS:
                self._twins.popitem(last=False)
        return twin


_PROCESS = _Process()


def enter(folder: str, library: str, memory_bytes: int | None) -> None:
    """Make the process ready: an empty folder as working folder and home, and its limits."""
    # A worker deep inside the library must still go at once when it is told to.
    signal.signal(signal.SIGTERM, signal.SIG_DFL)
    os.chdir(folder)
    os.environ.update({"HOME": folder, "USERPROFILE": folder, VARIABLE: library})
    if memory_bytes is not None:
        import resource

        resource.setrlimit(resource.RLIMIT_AS, (memory_bytes, memory_bytes))


def versions() -> Versions:
    """Return what this process simulates with."""
    ngspice = _PROCESS.ngspice
    return Versions(ngspice=ngspice.version, pyspice=version("PySpice"), library=ngspice.path)


def work(job: Job) -> Result:
    """Solve one job; whatever goes wrong becomes part of the result."""
    started = _PROCESS.ngspice.seconds
    poisoned = ""
    try:
        outcome = _solved(job)
    except LoopOfSources as error:
        outcome = _unsolved(job, str(error))
    except RunFailed as error:
        outcome = _unsolved(job, str(error))
    except (DeckRefused, Broken) as error:
        poisoned = f"ngspice: {error}"
        outcome = _unsolved(job, poisoned)
    return Result(
        answer=outcome.answer,
        memory=outcome.memory,
        cycles=outcome.cycles,
        inside_s=_PROCESS.ngspice.seconds - started,
        poisoned=poisoned,
    )


def _unsolved(job: Job, reason: str) -> Outcome:
    return Outcome(answer=Unsolved(case=job.case, reason=reason), memory=None, cycles=0)


def _solved(job: Job) -> Outcome:
    match job.analysis:
        case Steady(own=own):
            return _steady(job, own=own)
        case Transient():
            return _transient(job, job.analysis)
        case SmallSignal():
            return _small_signal(job, job.analysis)


def _steady(job: Job, *, own: bool) -> Outcome:
    """Settle, and quiet what oscillates by itself where there is no relative to tell."""
    outcome = _settled(job, own=own)
    past = _bent(job, outcome.answer)
    if past:
        reason = f"no operating point: the law of {past} leaves the range of exp there"
        return Outcome(
            answer=Unsolved(case=job.case, reason=reason, cycles=outcome.cycles),
            memory=None,
            cycles=outcome.cycles,
        )
    if job.memory is not None or outcome.memory is None or job.quieted:
        return outcome
    found = _oscillating(job, outcome.memory)
    if not found:
        return outcome
    quieted = frozenset(name.lower() for tank in found for name in tank.couplings)
    again = _settled(replace(job, quieted=quieted), own=own) if quieted else outcome
    answer, memory = again.answer, again.memory
    if isinstance(answer, Settled | Wandering):
        told = tuple(tank.told for tank in found)
        answer = replace(answer, notices=(*answer.notices, *told))
    if memory is not None:
        memory = replace(memory, quieted=quieted)
    cycles = outcome.cycles + (again.cycles if quieted else 0)
    return replace(again, answer=answer, memory=memory, cycles=cycles)


def _bent(job: Job, answer: Answer) -> str:
    """Return whose law is past its range at an operating point, or ""."""
    if not isinstance(answer, Settled) or answer.proof.method != "operating point":
        return ""
    elements = _PROCESS.draft(job, forever=True, easy=False).elements
    return ", ".join(bent(elements, answer.waves))


def _oscillating(job: Job, memory: Memory) -> tuple[Tank, ...]:
    """Return the tanks of a settled circuit that a push makes oscillate."""
    draft = _PROCESS.draft(job, forever=True)
    deck = draft.deck(job.values)
    if deck.plain:
        return ()
    above_Hz = memory.grid.points / 8.0 / deck.period_s if deck.period_s else 0.0
    node_V = translated(deck, memory)
    return tuple(
        tank
        for tank in tanks(draft.elements, above_Hz=above_Hz)
        if oscillates(_PROCESS.ngspice, deck, tank, x=memory.x, node_V=node_V)
    )


def _settled(job: Job, *, own: bool) -> Outcome:
    """Settle; after a numerical failure again from rest with ever more careful settings."""
    deck = _PROCESS.draft(job, forever=True).deck(job.values)

    def spare() -> Deck:
        return _PROCESS.draft(job, forever=True, easy=False).deck(job.values)

    search = Search(_PROCESS.ngspice, deck, spare=spare, case=job.case, own=own)
    try:
        return search.run(job.memory)
    except RunFailed as error:
        first, spent = error, search.spent
    for grid in (CAREFUL, SHUNTED):
        again = Search(_PROCESS.ngspice, spare(), spare=spare, case=job.case, own=own)
        try:
            outcome = again.run(None, grid=grid)
        except RunFailed:
            spent += again.spent
        else:
            answer = _told(outcome.answer, grid)
            return replace(outcome, answer=answer, cycles=outcome.cycles + spent)
    answer = Unsolved(case=job.case, reason=str(first), cycles=spent)
    return Outcome(answer=answer, memory=None, cycles=spent)


def _told(answer: Answer, grid: Grid) -> Answer:
    """Return an answer that says what was added to the circuit so that it could be solved."""
    if grid is not SHUNTED or isinstance(answer, Unsolved):
        return answer
    return replace(answer, notices=(*answer.notices, SHUNT_NOTICE))


def _transient(job: Job, asked: Transient) -> Outcome:
    """Run; after a numerical failure again with ever more careful settings."""
    grid = Grid() if job.memory is None else job.memory.grid
    try:
        return _ran(job, asked, grid=grid, easy=True)
    except RunFailed as error:
        first = error
    for careful in (CAREFUL, SHUNTED):
        try:
            outcome = _ran(job, asked, grid=replace(careful, points=grid.points), easy=False)
        except RunFailed:
            continue
        return replace(outcome, answer=_told(outcome.answer, careful))
    raise first


def _ran(job: Job, asked: Transient, *, grid: Grid, easy: bool) -> Outcome:
    draft = _PROCESS.draft(job, forever=job.memory is not None, easy=easy)
    deck = draft.deck(job.values, phase_deg=asked.phase_deg, keep=asked.keep)
    period_s = deck.period_s or asked.stop_s * grid.points / STEPS
    step_s = asked.step_s or period_s / grid.points
    ngspice = _PROCESS.ngspice
    node_V = deck.initial_V if job.memory is None else translated(deck, job.memory)
    ngspice.load(deck.text(node_V, options=grid.options))
    if job.memory is not None:
        x, _ = inherited(deck, job.memory, start_from(deck, node_V))
        for state, value in zip(deck.states, x, strict=True):
            ngspice.alter_start(state.device, float(value))
    ngspice.transient(stop_s=asked.stop_s, step_s=step_s)
    time_s = ngspice.vector("time")
    rows = np.array([ngspice.vector(probe.vector) for probe in deck.probes])
    rows = rows.reshape(len(deck.probes), time_s.size)
    if time_s[0] > 0.0:
        time_s, rows = np.append(0.0, time_s), np.concatenate((rows[:, :1], rows), axis=1)
    rising = np.append(True, np.diff(time_s) > 0.0)
    names = tuple(probe.name for probe in deck.probes)
    waves = Waves(time_s[rising], names, rows[:, rising])
    cycles = int(np.ceil(asked.stop_s / deck.period_s)) if deck.period_s else 1
    answer = Ran(case=job.case, waves=waves, notices=deck.notices)
    return Outcome(answer=answer, memory=None, cycles=cycles)


def _small_signal(job: Job, asked: SmallSignal) -> Outcome:
    deck = _PROCESS.draft(job, forever=True).deck(job.values, driven=asked.source)
    ngspice = _PROCESS.ngspice
    ngspice.load(deck.text(deck.initial_V, options=Grid().options))
    names = tuple(probe.name for probe in deck.probes)
    values = np.empty((len(names), len(asked.frequencies_Hz)), dtype=np.complex128)
    for column, frequency_Hz in enumerate(asked.frequencies_Hz):
        ngspice.small_signal(frequency_Hz)
        values[:, column] = response(ngspice, deck, frequency_Hz)
    answer = Response(
        case=job.case,
        frequencies_Hz=np.array(asked.frequencies_Hz),
        names=names,
        values=values,
        notices=deck.notices,
    )
    return Outcome(answer=answer, memory=None, cycles=len(asked.frequencies_Hz))
