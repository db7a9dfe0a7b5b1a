"""Review two positions of a reference equipment from Python and print what decides.

    python examples/api_review.py [NETLIST [POSITION ...]]

Nothing is drawn and nothing is written; every number is SI, as the fields say.
"""

import sys
from pathlib import Path

from stress import load, review

MIDGET = Path(__file__).parents[1] / "netlists" / "harbour_midget.cir"


def main(arguments: list[str]) -> None:
    path = arguments[0] if arguments else MIDGET
    circuit = load(path)
    wanted = arguments[1:] or ([] if arguments else ["C6", "C7"])
    result = review(path, only=wanted)

    print(
        f"{circuit.name}: {len(circuit.positions)} positions, {result.run.unsolved} unsolved cases"
    )
    for risk in result.risks:
        if wanted and risk.position not in wanted:
            continue
        position = circuit.position(risk.position)
        nominal = result.working.positions[position.name]["nominal"]
        print(f"{risk.rank}. {position.name}, {position.role_text}: {risk.severity.value}")
        print(f"   bears {nominal.dc_V:.1f} V, ripple {1e3 * nominal.ripple_rms_A:.3f} mA rms")

        leak = result.leakage.get(position.name)
        if leak is not None and leak.governing is not None and leak.governing.critical_ohm:
            victim = leak.governing.victim
            print(
                f"   below {leak.governing.critical_ohm:.3g} ohm of leakage"
                f" {victim.part} passes its limit ({victim.quantity}, {leak.governing.condition})"
            )
        fit = result.replacements.get(position.name)
        if fit is not None:
            print(f"   fit {1e6 * fit.value_F:g} uF, {fit.style}, {fit.rated_V:g} V")


if __name__ == "__main__":
    main(sys.argv[1:])
