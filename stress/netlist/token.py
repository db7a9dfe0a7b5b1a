"""The tokens of an expression, one at a time."""

from __future__ import annotations

import re

from stress.netlist.meaning import FormulaError

_NUMBER = re.compile(r"(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?[\wµμ]*")
_NAME = re.compile(r"[^\W\d][\w.$#@§]*|[@$#][\w.]+(?:\[\w+\])?")
_OPERATOR = re.compile(r"\*\*|==|!=|<>|<=|>=|&&|\|\||[-+*/%<>&|^!~?:,(){}'=]")
_BLANK = re.compile(r"\s*")


class Tokens:
    """The token under the eye: `token`, its `kind`, and `start` and `end` in the text.

    The kinds are "number", "name", "mark" and "end".
    """

    def __init__(self, text: str) -> None:
        """Begin at the first token."""
        self.text = text
        self.start = self.end = 0
        self.kind = self.token = ""
        self.step()

    def step(self) -> None:
        """Go to the next token."""
        blank = _BLANK.match(self.text, self.end)
        self.start = blank.end() if blank else self.end
        if self.start >= len(self.text):
            self.kind, self.token, self.end = "end", "", self.start
            return
        for kind, pattern in (("number", _NUMBER), ("name", _NAME), ("mark", _OPERATOR)):
            found = pattern.match(self.text, self.start)
            if found:
                self.kind, self.token, self.end = kind, found[0], found.end()
                return
        raise FormulaError(
            f'"{self.text[self.start]}" has no meaning in an expression', self.start, self.start + 1
        )

    def fail(self, message: str, hint: str = "", *, obstacle: bool = False) -> FormulaError:
        """Return an error at the token."""
        return FormulaError(
            message, self.start, max(self.end, self.start + 1), hint, obstacle=obstacle
        )

    def take(self, *tokens: str) -> str:
        """Step over one of these marks and return it; "" where none of them stands here."""
        if self.kind == "mark" and self.token in tokens:
            token = self.token
            self.step()
            return token
        return ""

    def expect(self, token: str) -> None:
        """Step over a mark that must stand here."""
        if not self.take(token):
            got = f'got "{self.token}"' if self.token else "the expression ends here"
            raise self.fail(f'expected "{token}", {got}')

    def raw_arguments(self) -> list[str]:
        """Return the text between the parentheses, cut at its commas; steps past the end."""
        opening, depth, pieces, begin = self.start, 0, [], self.start + 1
        for at in range(opening, len(self.text)):
            mark = self.text[at]
            if mark in "({":
                depth += 1
            elif mark in ")}":
                depth -= 1
                if depth == 0:
                    pieces.append(self.text[begin:at])
                    self.end = at + 1
                    self.step()
                    return pieces
            elif mark == "," and depth == 1:
                pieces.append(self.text[begin:at])
                begin = at + 1
        raise FormulaError('"(" is never closed', opening, opening + 1, 'add the missing ")"')
