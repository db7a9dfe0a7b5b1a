"""Models that ngspice does not have: piecewise linear diodes and switches of the ps kind."""

from __future__ import annotations

from collections.abc import Mapping
from math import inf

from stress.netlist.expression import Binary, Call, Expression, Number, Unary
from stress.netlist.flat import Model

_IDEAL = frozenset({"ron", "roff", "vfwd", "vrev", "rrev"})


def is_ideal(model: Model) -> bool:
    """Whether a diode model is given by straight lines instead of a junction."""
    return bool(_IDEAL & set(model.parameters))


def _number(model: Model, name: str, default: float) -> float:
    value = model.parameters.get(name, default)
    return value if isinstance(value, float) else default


def ideal_diode(model: Model, v: Expression, parameters: Mapping[str, float]) -> Expression:
    """Return the current of a piecewise linear diode.

    Off it conducts by ROFF; above VFWD by RON; below -VREV by RREV. EPSILON and REVEPSILON
    round the corners: over that many volts the conductance changes in a straight line. ILIMIT
    and REVILIMIT bend the current over with tanh. As the lt dialect defines it (from memory,
    checked against the lt mode of ngspice 39).
    """
    ron = max(_number(model, "ron", 1.0), 1e-6)
    off = 1 / max(_number(model, "roff", 1e12), 1e-6)
    forward = _number(model, "vfwd", 0.0)
    reverse = _number(model, "vrev", inf)
    back = max(_number(model, "rrev", ron), 1e-6)
    found: Expression = Binary("*", Number(off), v)
    rise = _corner(v, forward, _number(model, "epsilon", 0.0))
    on: Expression = Binary("*", Number(1 / ron - off), rise)
    limit = _number(model, "ilimit", inf)
    if limit != inf and limit > 0:
        on = _bent(on, limit)
    found = Binary("+", found, on)
    if reverse != inf:
        fall = _corner(Unary("-", v), reverse, _number(model, "revepsilon", 0.0))
        down: Expression = Binary("*", Number(1 / back - off), fall)
        limit = _number(model, "revilimit", inf)
        if limit != inf and limit > 0:
            down = _bent(down, limit)
        found = Binary("-", found, down)
    times = parameters.get("m", 1.0) * parameters.get("area", 1.0)
    return found if times == 1 else Binary("*", Number(times), found)


def _corner(v: Expression, threshold: float, epsilon: float) -> Expression:
    """Return the volts above a threshold, with a parabola over `epsilon` volts around it."""
    if epsilon <= 0:
        return Call("ramp", (Binary("-", v, Number(threshold)),))
    start = threshold - epsilon / 2
    above = Binary("-", v, Number(start))
    inside = Call("limit", (above, Number(0.0), Number(epsilon)))
    curved = Binary("*", Number(0.5 / epsilon), Binary("*", inside, inside))
    return Binary("+", curved, Call("ramp", (Binary("-", above, Number(epsilon)),)))


def _bent(current: Expression, limit: float) -> Expression:
    return Binary("*", Number(limit), Call("tanh", (Binary("/", current, Number(limit)),)))


def switch_model(models: dict[str, Model], key: str) -> str:
    """Return the key of the SW or CSW model that stands for a switch; adds it where it is new.

    A switch of the ps kind closes gradually between its OFF and ON levels; here it has the same
    two levels as the ends of its hysteresis.
    """
    model = models[key]
    if model.kind not in ("vswitch", "iswitch"):
        return key
    voltage = model.kind == "vswitch"
    letter = "v" if voltage else "i"
    on = _number(model, f"{letter}on", 1.0 if voltage else 1e-3)
    off = _number(model, f"{letter}off", 0.0)
    ron, roff = _number(model, "ron", 1.0), _number(model, "roff", 1e6)
    if on < off:  # closes as its control falls
        ron, roff = roff, ron
    middle, half = (on + off) / 2, abs(on - off) / 2
    numbers = {f"{letter}t": middle, f"{letter}h": half, "ron": ron, "roff": roff}
    models[key] = Model(
        name=model.name, kind="sw" if voltage else "csw", parameters=numbers, span=model.span
    )
    return key
