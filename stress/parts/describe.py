"""An entry of the type table as text, every number with its source."""

from __future__ import annotations

from collections.abc import Iterator

from stress.parts.limit import STRESSES
from stress.parts.models import fit_error, units
from stress.parts.type import Operation, Source, TypeEntry
from stress.parts.types import all_types
from stress.parts.wound import MEANINGS, SUBCIRCUITS
from stress.text.figure import figure

_WORDS = {
    "plate_V": "plate voltage",
    "screen_V": "screen voltage",
    "plate_W": "plate dissipation",
    "screen_W": "screen dissipation",
    "grid_W": "grid dissipation",
    "grid_A": "grid current",
    "cathode_A": "cathode current",
    "heater_cathode_V": "heater to cathode",
    "power_W": "dissipation",
    "voltage_V": "voltage",
    "current_A": "current",
    "average_A": "output current, direct",
    "peak_A": "peak current",
    "reverse_V": "peak inverse voltage",
}
_WARM_UP = {"instant": "works at once", "filament": "filament: up in seconds"}
_NUMBERS = (
    ("grid_circuit_fixed_ohm", "ohm", "grid circuit, fixed bias"),
    ("grid_circuit_cathode_ohm", "ohm", "grid circuit, cathode bias"),
    ("plate_rms_V", "V", "alternating voltage, capacitor input"),
    ("first_capacitor_max_F", "F", "largest first capacitor"),
    ("supply_impedance_min_ohm", "ohm", "smallest supply impedance"),
)


def description(entry: TypeEntry) -> str:
    """Return an entry as lines of text for people."""
    return "\n".join([*_head(entry), *_limits(entry), *_operation(entry), *_model(entry)])


def wound_description(name: str) -> str | None:
    """Return what a built-in transformer or choke is called with, as text, or None."""
    found = SUBCIRCUITS.get(name.lower())
    if found is None:
        return None
    pins, parameters, _ = found
    shown = [
        f"{name.lower()}: built-in subcircuit, as coupled inductors",
        f"  XT1 {pins} {name.lower()} {parameters}",
        "  pins and parameters with their defaults; state what you measure:",
    ]
    told = {word.split("=")[0] for word in parameters.split()}
    shown += [f"  {key:5} {MEANINGS[key]}" for key in MEANINGS if key in told]
    return "\n".join(shown)


def listing() -> str:
    """Return the designations of the whole table by family, and the wound parts."""
    families: dict[str, list[str]] = {}
    for entry in all_types():
        families.setdefault(entry.family, []).append(entry.name)
    families["transformers and chokes"] = list(SUBCIRCUITS)
    return "\n".join(f"{family}: {', '.join(names)}" for family, names in families.items())


def _row(words: str, value: str, note: object = "") -> str:
    return f"  {words:38} {value:>10}   {note}".rstrip()


def _source(entry: TypeEntry, name: str) -> Source | str:
    return entry.sources.get(name, "")


def _head(entry: TypeEntry) -> Iterator[str]:
    also = f"; also {', '.join(entry.aliases)}" if entry.aliases else ""
    yield f"{entry.name}: {entry.family}{also}"
    if entry.note:
        yield f"  {entry.note}"
    words = "filament" if entry.directly_heated else "heater"
    if entry.heater_V is not None:
        yield _row(f"{words} voltage", figure(entry.heater_V, "V"), _source(entry, "heater_V"))
    if entry.heater_A is not None:
        yield _row(f"{words} current", figure(entry.heater_A, "A"), _source(entry, "heater_A"))
    up = _WARM_UP.get(entry.warm_up, "cathode: up in 11 to 25 s (common practice)")
    yield f"  warm-up: {up}{', no sooner than the tubes it feeds' if entry.slow else ''}"
    if entry.contact:
        yield "  grid-leak (contact potential) bias is usual for this type (common practice)"


def _limits(entry: TypeEntry) -> Iterator[str]:
    ratings = sorted({limit.rating.value for limit in entry.limits.values()})
    if entry.limits:
        yield f"limits ({', '.join(ratings)})"
    for name, limit in entry.limits.items():
        own = f"{limit.rating.value}; " if len(ratings) > 1 else ""
        yield _row(_WORDS[name], figure(limit.value, STRESSES[name]), f"{own}{limit.source}")
    for name, unit, words in _NUMBERS:
        value = getattr(entry, name)
        if value is not None:
            yield _row(words, figure(value, unit), _source(entry, name))
    if entry.drop_V is not None and entry.drop_A is not None:
        each = " a plate" if entry.plates > 1 else ""
        words = f"drop at {figure(entry.drop_A, 'A')}{each}"
        yield _row(words, figure(entry.drop_V, "V"), _source(entry, "drop_V"))


def _operation(entry: TypeEntry) -> Iterator[str]:
    if entry.operation:
        yield "published lines"
    for line in entry.operation:
        yield f"  {_line(line)}"
        yield f"    {line.source}"


def _line(line: Operation) -> str:
    unit = f"unit {line.unit}: " if line.unit > 1 else ""
    volts = [f"plate {figure(line.plate_V, 'V')}"]
    if line.screen_V is not None:
        volts.append(f"screen {figure(line.screen_V, 'V')}")
    volts.append(f"grid {figure(line.grid_V, 'V')}")
    gives = []
    if line.plate_A is not None:
        gives.append(f"plate {figure(line.plate_A, 'A')}")
    if line.screen_A is not None:
        gives.append(f"screen {figure(line.screen_A, 'A')}")
    if line.gm_S is not None:
        gives.append(f"{1e3 * line.gm_S:.4g} mA/V")
    if line.mu is not None:
        gives.append(f"µ {line.mu:g}")
    if line.plate_ohm is not None:
        gives.append(f"plate resistance {figure(line.plate_ohm, 'ohm')}")
    return f"{unit}{', '.join(volts)}: {', '.join(gives)}"


def _model(entry: TypeEntry) -> Iterator[str]:
    if not units(entry):
        yield "no built-in model"
        return
    yield f"built-in model, pins in this order: {' '.join(entry.pins)}"
    off = fit_error(entry)
    if off:
        words = {"plate": "plate current", "screen": "screen current", "gm": "transconductance"}
        told = [f"{words[key]} {100 * off[key]:.1f} %" for key in words if key in off]
        if "curves" in off:
            told.append(f"points of published curves {100 * off['curves']:.0f} %")
        yield f"  largest error against the lines above: {', '.join(told)}"
    if entry.model != entry.name:
        yield f"  the model is that of {entry.model}"
