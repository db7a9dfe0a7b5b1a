"""Physics after every solve: charge, energy, and the mean current of a capacitor."""

import numpy as np
import pytest

from stress.engine.case import Case, Settled

pytestmark = pytest.mark.ngspice


@pytest.fixture
def solved(circuit, twin_of, pool):
    name, cards, period_s = circuit
    twin = twin_of(cards, period_s=period_s)
    (answer,) = pool.solve([Case(name=f"invariants {name}", twin=twin)])
    assert isinstance(answer, Settled), answer
    return twin, answer


def currents(twin, waves):
    """Currents into the first node of every element that has two ends and a known current."""
    found = {}
    for element in twin.elements:
        if element.letter == "R":
            across = waves.voltage(*element.nodes[:2])
            found[element.name] = across / element.value
        elif element.letter in "VLCD":
            found[element.name] = waves.current(element.name)
    return found


def test_the_period_is_closed_and_proven(solved, circuit):
    _, answer = solved
    waves, proof = answer.waves, answer.proof

    assert waves.time_s[0] == 0.0
    assert waves.time_s[-1] == pytest.approx(circuit[2], rel=1e-12)
    assert (waves.values[:, 0] == waves.values[:, -1]).all()
    assert proof.distance <= 1e-4
    assert proof.method == "cycle map"
    assert proof.points + 1 == waves.time_s.size


def test_currents_into_every_node_sum_to_zero(solved):
    """At every instant, where all elements at the node are known, within 1e-3 of the largest.

    A node of 100 V is solved within 1e-6 of it, and 0.1 mV is 0.2 % of a diode's current where
    that begins to flow. In the mean it is 1e-5.
    """
    twin, answer = solved
    known = currents(twin, answer.waves)
    nodes = {}
    for element in twin.elements:
        for end, node in enumerate(element.nodes[:2]):
            nodes.setdefault(node, []).append((element, 1.0 if end == 0 else -1.0))
    checked = 0
    for node, ends in nodes.items():
        if node == "0" or any(element.name not in known for element, _ in ends):
            continue
        flows = [sign * known[element.name] for element, sign in ends]
        size = max(np.abs(flow).max() for flow in flows)
        assert np.abs(sum(flows)).max() <= 1e-3 * size, node
        assert abs(answer.waves.mean(sum(flows))) <= 1e-5 * size, node
        checked += 1
    assert checked >= 2


def test_the_mean_current_of_a_capacitor_is_zero(solved):
    """Within 1e-4 of its rms value, and the change over the period that was accepted.

    Where a switch makes the current jump, the straight line over the jump counts: twice that.
    """
    twin, answer = solved
    waves = answer.waves
    share = 2e-4 if any(element.letter == "S" for element in twin.elements) else 1e-4
    for element in twin.elements:
        if element.letter == "C":
            current = waves.current(element.name)
            left = answer.proof.residual * max(1.0, np.abs(waves.voltage(*element.nodes)).max())
            drift = element.value * left / waves.time_s[-1]
            assert abs(waves.mean(current)) < share * waves.rms(current) + drift, element.name


def test_power_in_is_power_out(solved):
    """What the sources give is what the rest takes, within 0.1 % of it."""
    twin, answer = solved
    waves, known = answer.waves, currents(twin, answer.waves)
    given = taken = 0.0
    for element in twin.elements:
        if element.letter in "KSB":
            continue
        power = waves.mean(waves.voltage(*element.nodes[:2]) * known[element.name])
        if element.letter == "V":
            given -= power
        else:
            taken += power
    for element in twin.elements:
        if element.letter == "S":  # in series with the current of what it feeds
            flow = known["L1"] - known["D1"] if "L1" in known else known["Rin"]
            taken += waves.mean(waves.voltage(*element.nodes[:2]) * flow)
        if element.letter == "B":
            flow = -known["Rk"] if element.nodes[0] == "k" else known["Rk"] + known["Ck"]
            taken += waves.mean(waves.voltage(*element.nodes[:2]) * flow)

    assert taken == pytest.approx(given, rel=1e-3)
