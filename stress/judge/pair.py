"""Two faults at once in words: who is hit, what each alone does, and the way to the victim."""

from __future__ import annotations

from stress.circuit.chain import Chains
from stress.circuit.circuit import Circuit
from stress.study.failures import describe
from stress.study.fault import Fault
from stress.study.pairs import Pair, Pairs
from stress.text.figure import figure

LONGEST_WAY = 6  # steps that one still reads


def pair_text(pair: Pair, chains: Chains) -> str:
    """Return what a pair does, its worst victim with numbers and both ways to it.

    "XV4 plate dissipation 14.6 W, limit 12 W; C13 leaky alone 11.2 W, C14 short alone 11.8 W
    (C13 -> grid of XV4 -> XV4; C14 -> cathode of XV4 -> XV4)".
    """
    worst = pair.victims[0]
    unit = worst.victim.quantity.rpartition("_")[2]
    alone = ", ".join(
        f"{short(fault)} alone {figure(stress, unit)}"
        for fault, stress in zip(pair.faults, worst.alone, strict=True)
    )
    ways = "; ".join(_way(fault, worst.victim.part, chains) for fault in pair.faults)
    text = f"{describe(worst.victim)}; {alone} ({ways})"
    if len(pair.victims) > 1:
        text += "; also " + "; ".join(describe(v.victim) for v in pair.victims[1:3])
    return text


def pair_texts(pairs: Pairs, circuit: Circuit) -> tuple[str, ...]:
    """Return the summary of the pairs, then each that was found, then what has no number."""
    chains = Chains(circuit)
    found = [f"{named(p)} ({p.condition}): {pair_text(p, chains)}" for p in pairs.found]
    lost = [
        f"{named(p)}: {'; '.join(f'{w.case}: {w.kind}' for w in p.unanswered)}"
        for p in pairs.unsolved
    ]
    return (summary(pairs), *found, *lost)


def _way(fault: Fault, part: str, chains: Chains) -> str:
    """Return the way from a fault to a part, a long one by its ends."""
    words = chains.words(fault.position, part)
    if len(words) > LONGEST_WAY:
        words = (*words[:3], "…", *words[-2:])
    return " -> ".join(words)


def named(pair: Pair) -> str:
    """Return both faults: "C13 leaky 12 MΩ and C14 short"."""
    return f"{_full(pair.faults[0])} and {_full(pair.faults[1])}"


def short(fault: Fault) -> str:
    """Return a fault without its resistance."""
    return f"{fault.position} {fault.kind}"


def _full(fault: Fault) -> str:
    if fault.ohm is None:
        return short(fault)
    return f"{short(fault)} {figure(fault.ohm, 'ohm')}"


def summary(pairs: Pairs) -> str:
    """Return how many pairs were tried, of which faults, and what came of it."""
    if not pairs.possible:
        return "no pairs: the likely faults that were studied are all of one position"
    text = (
        f"{len(pairs.tried)} of the {pairs.possible} pairs of the {len(pairs.faults)} likeliest "
        f"faults were tried (likelihood by style and age, common practice; leaks are half of "
        f"what is critical, or 1 MΩ): "
    )
    found, unsolved = len(pairs.found), len(pairs.unsolved)
    text += f"{found or 'none'} pass{'es' if found == 1 else ''} a limit that neither passes alone"
    return f"{text}, {unsolved} not solved" if unsolved else f"{text}, all solved"
