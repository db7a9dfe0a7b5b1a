"""Where something stands in a text, and errors that point there."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Span:
    """A run of characters on one line of one file; line and column count from 1.

    Attributes:
        file: The file as the user named it.
        line, column: Where the run starts; 0 where a whole file is meant.
        length: How many characters it covers, at least 1.
        text: The whole line, without its newline.
        within: The calls that led here, outermost first, such as "XU2, called at amp.cir:41".
    """

    file: str
    line: int
    column: int
    length: int
    text: str
    within: tuple[str, ...] = ()

    def __str__(self) -> str:
        return f"{self.file}:{self.line}:{self.column}" if self.line else self.file


class SourceError(Exception):
    """The text at `span` cannot be used; `hint` says what would be accepted."""

    def __init__(self, message: str, span: Span, hint: str = "") -> None:
        super().__init__(message, span, hint)  # what unpickling calls again
        self.message, self.span, self.hint = message, span, hint

    def __str__(self) -> str:
        at = self.span
        lines = [f"{at}: {self.message}"]
        if at.line:
            gutter = f"{at.line} | "
            # A tab is kept, so that the caret lands right at any tab width.
            before = "".join("\t" if c == "\t" else " " for c in at.text[: at.column - 1])
            caret = "^" + "~" * (at.length - 1)
            lines.append(f"  {gutter}{at.text}")
            lines.append(f"  {' ' * (len(gutter) - 2)}| {before}{caret}")
        lines += [f"  in {call}" for call in reversed(at.within)]
        if self.hint:
            lines.append(f"  hint: {self.hint}")
        return "\n".join(lines)


class SourceErrors(Exception):
    """Everything that is wrong with one input, in the order of the text."""

    def __init__(self, errors: Iterable[SourceError]) -> None:
        self.errors = tuple(errors)
        super().__init__(self.errors)

    def __str__(self) -> str:
        return "\n".join(str(error) for error in self.errors)
