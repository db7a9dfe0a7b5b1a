"""What goes wrong or is worth telling while a netlist is read, each thing once."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import TypeVar

from stress.finding import Finding, Severity
from stress.netlist.flat import Ignored
from stress.text.span import SourceError, SourceErrors, Span

MOST_ERRORS = 100


class Obstacle(SourceError):
    """The text is right, but what it describes cannot be simulated as it stands."""


class Limit(SourceErrors):
    """A bound was passed: reading stops here."""


_Told = TypeVar("_Told", SourceError, Finding, Ignored)


def in_order(told: Iterable[_Told]) -> list[_Told]:
    """Return what points into texts in the order of the text, file by file."""
    kept = [(entry, entry.span) for entry in told if entry.span is not None]
    files = {file: at for at, file in enumerate(dict.fromkeys(span.file for _, span in kept))}
    kept.sort(key=lambda pair: (files[pair[1].file], pair[1].line, pair[1].column))
    return [entry for entry, _ in kept]


@dataclass(slots=True)
class Problems:
    """Collects; nothing is told twice for one place.

    Attributes:
        end: File and line of the `.end` card: ngspice reads on behind it, but what is wrong
            there is no error.
        absent: An include is missing: what it would have defined is no mistake of the text.
        missing: Libraries that are not there; they only matter where something is missing.
    """

    errors: list[SourceError] = field(default_factory=list)
    obstacles: list[SourceError] = field(default_factory=list)
    notices: list[Finding] = field(default_factory=list)
    ignored: list[Ignored] = field(default_factory=list)
    end: tuple[str, int] | None = None
    absent: bool = False
    missing: list[Obstacle] = field(default_factory=list)
    _told: set[tuple[object, ...]] = field(default_factory=set)

    def error(self, error: SourceError) -> None:
        """Keep an error; an `Obstacle` only prevents the simulation.

        Raises:
            Limit: There are too many to go on.
        """
        if not self._new(error.message, error.span):
            return
        span = error.span
        if self.end is not None and span.file == self.end[0] and span.line > self.end[1]:
            self.ignore(f"behind .end, and no card: {error.message}", span)
            return
        if isinstance(error, Obstacle):
            self.obstacles.append(error)
            return
        if (self.absent or self.missing) and "undefined parameter" in error.message:
            hint = error.hint or "it may be defined in a file that is missing"
            self.obstacles.append(Obstacle(error.message, span, hint))
            return
        self.errors.append(error)
        if len(self.errors) >= MOST_ERRORS:
            self.stop(f"more than {MOST_ERRORS} errors; the rest is not listed", error.span)

    def sorted_errors(self) -> list[SourceError]:
        """Return the errors in the order of the text, file by file."""
        return in_order(self.errors)

    def settle_missing(self) -> None:
        """Make the missing libraries obstacles, or notices where everything was found anyway."""
        for error in self.missing:
            if self.obstacles or self.errors:
                self.obstacle(error.message, error.span, error.hint)
            else:
                text = f"{error.message}; all models and subcircuits were found without it"
                self.notice("missing-library", "equipment", text, error.span)

    def stop(self, message: str, span: Span, hint: str = "") -> None:
        """Give up on the whole netlist.

        Raises:
            Limit: Always.
        """
        raise Limit([*self.sorted_errors(), SourceError(message, span, hint)])

    def obstacle(self, message: str, span: Span, hint: str) -> None:
        """Keep what prevents a simulation."""
        if self._new(message, span):
            self.obstacles.append(Obstacle(message, span, hint))

    def notice(self, rule: str, where: str, text: str, span: Span, action: str = "") -> None:
        """Keep how something unusual was read."""
        if self._new(rule, span, text if rule == "trap" else ""):
            self.notices.append(
                Finding(
                    severity=Severity.NOTE,
                    where=where,
                    text=text,
                    action=action,
                    rule=rule,
                    span=span,
                )
            )

    def ignore(self, what: str, span: Span) -> None:
        """Keep that a card was set aside."""
        if self._new("ignored", span):
            self.ignored.append(Ignored(what, span))

    def _new(self, what: str, span: Span, more: str = "") -> bool:
        key = (what, more, span.file, span.line, span.column)
        if key in self._told:
            return False
        self._told.add(key)
        return True
