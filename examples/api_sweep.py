"""Ask a question of one's own: what does a leaking coupling capacitor do to the output tube?

    python examples/api_sweep.py

Each line is a settled state of the whole receiver, at the nominal line voltage; every case starts
from the state of the one before it.
"""

from pathlib import Path

from stress import load
from stress.engine import twin
from stress.engine.case import Settled
from stress.engine.pool import Pool
from stress.study import conditions

RECEIVER = Path(__file__).parents[1] / "netlists" / "shore_receiver.cir"
COUPLING, GRID, CATHODE, SUPPLY, CATHODE_OHM = "C13", "g4", "k4", "b1", 270.0


def main() -> None:
    circuit = load(RECEIVER)
    nominal, *_ = conditions.conditions(circuit)
    built = twin.build(circuit)
    cases = [conditions.case(circuit, nominal, twin=built, name="sound")]
    for megohms in (50, 20, 10, 5, 2, 1):
        cases.append(
            conditions.case(
                circuit,
                nominal,
                twin=built,
                name=f"{megohms} Mohm",
                parent=cases[-1].name,
                values={f"{COUPLING}#leak": 1e6 * megohms},
            )
        )

    print(f"{circuit.name}, {COUPLING} leaking")
    print("leakage   grid      cathode    B+")
    with Pool() as pool:
        for case, answer in zip(cases, pool.solve(cases), strict=True):
            if not isinstance(answer, Settled):
                print(f"{case.name:8s}  {type(answer).__name__.lower()}")
                continue
            grid, cathode, supply = (
                answer.waves.mean(answer.waves.voltage(node)) for node in (GRID, CATHODE, SUPPLY)
            )
            milliamps = 1e3 * cathode / CATHODE_OHM
            print(f"{case.name:8s}  {grid:5.2f} V  {milliamps:6.1f} mA  {supply:6.1f} V")


if __name__ == "__main__":
    main()
