"""What silicon instead of a rectifier tube asks for: a resistor that drops what the tube did."""

from __future__ import annotations

from collections.abc import Iterator

from stress.finding import Finding, Severity
from stress.study.silicon import SeriesResistor
from stress.text.figure import figure

POWER_MARGIN = 2.0  # on the power of a resistor (common practice)


def resistor_findings(found: tuple[SeriesResistor, ...]) -> Iterator[Finding]:
    """Yield a note for every supply whose rectifier tubes silicon replaces."""
    for one in found:
        yield Finding(
            severity=Severity.NOTE,
            where=one.tubes[0],
            text=f"with silicon the supply behind {' and '.join(one.tubes)} stands at "
            f"{figure(one.silicon_V, 'V')} instead of {figure(one.tube_V, 'V')}; "
            f"{figure(one.ohm, 'ohm')} in series with the diodes makes it "
            f"{figure(one.with_V, 'V')} and takes {figure(one.power_W, 'W', digits=2)}: fit "
            f"{figure(POWER_MARGIN * one.power_W, 'W', digits=2)} or more. While the tubes are "
            "cold it takes nothing away.",
            rule="silicon-resistor",
        )
