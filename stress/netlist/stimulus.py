"""Independent sources and what they do over time."""

from __future__ import annotations

from math import exp, inf, pi, sin

from stress.netlist.assembly import Assembly
from stress.netlist.card import Field
from stress.netlist.flat import Wave
from stress.netlist.part import Part

WAVES = {"sin": "sin", "sine": "sin", "pulse": "pulse", "pwl": "pwl", "exp": "exp",
         "sffm": "sffm", "am": "am"}  # fmt: skip
MOST = {"sin": 6, "pulse": 7, "exp": 6, "sffm": 5, "am": 5}
FEWEST = {"sin": 2, "pulse": 2, "pwl": 2, "exp": 2, "sffm": 2, "am": 2}
NOISE = frozenset({"trnoise", "trrandom", "external"})
_FILES = ("file", "wavefile", "chan", "tc", "td")


def source(part: Part, into: Assembly) -> None:
    """`V1 a b DC 5 AC 1 SIN(0 1 60)`, its series resistance and parallel capacitance too."""
    part.need(2, f"{part.letter}1 node node value")
    reader = _Source(part, into)
    reader.read()
    a, b = part.nodes(2)
    value, wave = reader.dc, reader.wave
    if value is None:
        value = at_zero(wave) if wave is not None else 0.0
    own = part.take("m")
    times = part.scope.multiplier * (1.0 if own is None else own)
    parameters: dict[str, float] = {}
    if times != 1 and part.letter == "I":
        if wave is None:
            value *= times
        else:
            parameters["m"] = times
    rser, cpar = part.take("rser"), part.take("cpar")
    for key, given in part.given.items():
        if key in ("load", "rpar", "lser"):
            part.notice("unknown-parameter", f'{part.full}: "{key}=" is not used', given.key)
    if cpar:
        into.add(part, "C", (a, b), cpar, suffix="#cpar")
    nodes = (a, b)
    if rser and part.letter == "V":
        inner = f"{part.full.lower()}#rser"
        into.add(part, "R", (a, inner), rser, suffix="#rser")
        nodes = (inner, b)
    into.add(part, part.letter, nodes, value, parameters=parameters, wave=wave)


class _Source:
    """Reads the words behind the nodes of a source."""

    def __init__(self, part: Part, into: Assembly) -> None:
        self.part, self.into = part, into
        self.dc: float | None = None
        self.wave: Wave | None = None
        # From the third word on, with the marks: a wave may stand with or without parentheses.
        start = part.words[1].end
        self.fields = [field for field in part.fields if field.start >= start]
        self.at = 0

    def read(self) -> None:
        while self.at < len(self.fields):
            field = self.fields[self.at]
            low = field.text.lower()
            if field.kind == "mark" or low in ("tran", "transient"):
                self.at += 1
            elif low == "dc" and field.kind == "word":
                self.at += 1
                self._equals()
                if self.at < len(self.fields) and self._is_value(self.fields[self.at]):
                    self.dc = self.part.number(self.fields[self.at])
                    self.at += 1
                elif self.dc is None:
                    self.dc = 0.0
            elif low in ("ac", "distof1", "distof2") and field.kind == "word":
                self._skip_numbers()
            elif low in WAVES and field.kind == "word":
                self._wave(WAVES[low], field)
            elif low in NOISE:
                self.part.notice(
                    "noise-source",
                    f"{self.part.full}: {field.text} counts as its direct value",
                    field,
                )
                self.at = len(self.fields)
            elif low in ("wavefile", "table") or (low in _FILES and self._followed_by_equals()):
                raise self._file(field)
            elif self._followed_by_equals():
                self.at += 2  # rser= and the like are in part.given
                self._step_over_value()
            elif low in ("portnum", "z0", "pwr", "freq", "phase"):
                self.at += 2
            elif self.wave is not None:  # ngspice takes no notice of it either
                self.part.notice(
                    "wave", f'{self.part.full}: "{field.text}" behind the wave is not used', field
                )
                self.at += 1
            elif self.dc is None or self.at > 0:
                self.dc = self.part.number(field) if self.dc is None else self._second(field)
                self.at += 1

    def _second(self, field: Field) -> float:
        raise self.part.error(
            f'"{field.text}" is not expected here',
            field,
            "a source is DC value, AC size, and one of SIN PULSE PWL EXP SFFM AM",
        )

    def _followed_by_equals(self) -> bool:
        following = self.at + 1
        return following < len(self.fields) and self.fields[following].text == "="

    def _equals(self) -> None:
        if self.at < len(self.fields) and self.fields[self.at].text == "=":
            self.at += 1

    def _step_over_value(self) -> None:
        """Step over what stands behind `name=`, parentheses and all."""
        if self.at < len(self.fields):
            self.at += 1

    def _is_value(self, field: Field) -> bool:
        return field.kind != "mark" and not (
            field.kind == "word"
            and (
                field.text.lower() in WAVES
                or field.text.lower() in NOISE
                or field.text.lower() == "ac"
            )
        )

    def _skip_numbers(self) -> None:
        """Step over the size and phase of AC: they do not matter here."""
        self.at += 1
        taken = 0
        while self.at < len(self.fields) and taken < 2:
            field = self.fields[self.at]
            if field.kind == "mark":
                self.at += 1
                continue
            low = field.text.lower()
            if field.kind == "word" and (low[:1].isalpha() and low not in self._names()):
                return
            self.at += 1
            taken += 1

    def _names(self) -> tuple[str, ...]:
        low = self.fields[self.at].text.lower()
        return (low,) if self.part.scope.value(low) is not None else ()

    def _file(self, field: Field) -> Exception:
        return self.part.obstacle(
            f"{self.part.full} takes its wave from a file, which is not read",
            field,
            "write the points of one period as PWL(t1 v1 t2 v2 …)",
        )

    def _wave(self, kind: str, word: Field) -> None:
        self.at += 1
        numbers: list[float] = []
        fields: list[Field] = []
        repeat: float | None = None
        relative: list[bool] = []
        depth = 0
        while self.at < len(self.fields):
            field = self.fields[self.at]
            low = field.text.lower()
            if field.kind == "mark":
                self.at += 1
                depth += {"(": 1, ")": -1}.get(field.text, 0)
                if depth == 0 and field.text == ")" and numbers and not self._goes_on():
                    break
            elif (kind == "pwl" and low in ("file", "wavefile", "chan")) or field.kind == "string":
                raise self._file(field)
            elif kind == "pwl" and low in ("r", "td") and self._followed_by_equals():
                value = self.part.number(self.fields[self.at + 2])
                if low == "r":
                    repeat = value if value >= 0 else None
                elif value:
                    numbers = [n + value if k % 2 == 0 else n for k, n in enumerate(numbers)]
                self.at += 3
            elif kind == "pwl" and low in ("time_scale_factor", "value_scale_factor"):
                raise self._file(field)
            elif kind == "pwl" and low == "repeat":
                repeat = 0.0
                self.at += 1
            elif kind == "pwl" and low in ("forever", "endrepeat", "for"):
                if low == "for":
                    self.at += 1
                self.at += 1
            elif self._followed_by_equals() or (
                (field.kind == "word" and low in ("dc", "ac", "distof1", "distof2"))
                or (low in WAVES and low != kind)
            ):
                break
            else:
                fields.append(field)
                relative.append(kind == "pwl" and field.text[:1] == "+")
                numbers.append(self.part.number(field))
                self.at += 1
        if len(numbers) < FEWEST[kind]:
            raise self.part.error(f"{word.text} needs at least {FEWEST[kind]} numbers", word)
        if kind == "pwl":
            numbers = self._points(numbers, relative, fields, word)
        elif len(numbers) > MOST[kind]:
            told = " ".join(field.text for field in fields[MOST[kind] :])
            self.part.notice(
                "wave", f"{self.part.full}: {word.text} goes on for ever; {told} is not used", word
            )
            numbers = numbers[: MOST[kind]]
        self.wave = Wave(kind, tuple(self._filled(kind, numbers)), repeat)

    def _goes_on(self) -> bool:
        """Whether more of the wave stands behind its parenthesis: `r=0`, `repeat`, `(3 4)`."""
        if self.at >= len(self.fields):
            return False
        text = self.fields[self.at].text.lower()
        return text == "(" or text in ("r", "td", "repeat", "endrepeat", "forever", "for")

    def _points(
        self, numbers: list[float], relative: list[bool], fields: list[Field], word: Field
    ) -> list[float]:
        """Check the points of a PWL; a time with a plus sign counts from the point before."""
        if len(numbers) % 2:
            raise self.part.error(
                "PWL needs a value for every time", fields[-1] if fields else word
            )
        for k in range(2, len(numbers), 2):
            if relative[k]:
                numbers[k] += numbers[k - 2]
            if numbers[k] < numbers[k - 2]:
                raise self.part.error("the times of a PWL must not fall", fields[k])
        return numbers

    def _filled(self, kind: str, numbers: list[float]) -> list[float]:
        """Put in the defaults that hang on the analysis card, as the ngspice manual states them."""
        step, stop = self.into.step_s, self.into.stop_s
        if step is None or stop is None:
            return numbers
        given = len(numbers)
        if kind == "pulse":
            if given <= 2:
                numbers = [*numbers, 0.0]
            whole = [0.0, 0.0, 0.0, step, step, stop, stop]
            numbers = numbers + whole[len(numbers) :]
            for k in (3, 4):
                numbers[k] = numbers[k] or step
            for k in (5, 6):
                numbers[k] = numbers[k] or stop
        elif kind == "sin" and stop > 0:
            if given == 2 or numbers[2] == 0:
                numbers = [*numbers[:2], 1 / stop, *numbers[3:]]
        elif kind == "exp":
            td1 = numbers[2] if given > 2 else 0.0
            whole = [0.0, 0.0, 0.0, step, td1 + step, step]
            numbers = numbers + whole[given:]
            for k in (3, 5):
                numbers[k] = numbers[k] or step
        return numbers


def at_zero(wave: Wave) -> float:
    """Return what a wave is at time 0, which stands for its direct value."""
    numbers = wave.values
    if wave.kind == "sin":
        delay = numbers[3] if len(numbers) > 3 else 0.0
        phase = numbers[5] if len(numbers) > 5 else 0.0
        angle = phase * pi / 180
        if delay < 0:
            theta = numbers[4] if len(numbers) > 4 else 0.0
            angle += 2 * pi * numbers[2] * -delay
            return numbers[0] + numbers[1] * sin(angle) * exp(theta * delay)
        return numbers[0] + numbers[1] * sin(angle)
    if wave.kind == "pwl":
        times, values = numbers[0::2], numbers[1::2]
        if times[0] >= 0:
            return values[0]
        for k in range(1, len(times)):
            if times[k] >= 0:
                run = times[k] - times[k - 1] or inf
                return values[k - 1] - times[k - 1] * (values[k] - values[k - 1]) / run
        return values[-1]
    if wave.kind == "am":
        return 0.0
    return numbers[0]
