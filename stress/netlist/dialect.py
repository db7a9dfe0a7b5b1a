"""Whose meaning a text has: default, ps, lt or hs.

The rule: each mark below that stands in the netlist itself (not in its includes) counts its
points for its dialect; the dialect with the most points is taken, at least 2 of them; a draw or
fewer points is "default", which is ngspice's own meaning. `dialect=` overrides it.

What hangs on it: the power of a negative number (`stress.netlist.function.raised`), PWR (hs
keeps the sign), `$` as the start of a comment (not in ps).
"""

from __future__ import annotations

import re

DIALECTS = ("default", "ps", "lt", "hs")

_MARKS = tuple(
    (dialect, points, re.compile(pattern, re.IGNORECASE | re.MULTILINE))
    for dialect, points, pattern in (
        ("lt", 3, r"^[ \t]*\.backanno\b"),
        ("lt", 3, r"^\* \S.*\.asc\s*$"),
        ("lt", 2, r"^[ \t]*[a-z]§"),
        ("lt", 2, r"^[ \t]*\.tran[ \t]+\S+[ \t]*(?:startup.*|steady.*)?$"),
        ("lt", 2, r"^[ \t]*\.tran\b.*\bstartup\b"),
        ("lt", 2, r"^[ \t]*[clv]\S*\s.*\brser\s*="),
        ("lt", 1, r"^[ \t]*\.lib\s+\S+\.(?:bjt|dio|mos|jft|sub|cap|ind)\s*$"),
        ("lt", 1, r"\brnd\(|\bstartup\b|\bmfg\s*="),
        ("ps", 2, r"^[ \t]*\.(?:probe|stimulus|distribution|stmlib|autoconvergence)\b"),
        ("ps", 2, r"\bv(?:on|off)\s*=|\bvswitch\b|\biswitch\b"),
        ("ps", 2, r"^[ \t]*[eg]\S*\s.*\b(?:value|table)\s*=?\s*\{"),
        ("ps", 1, r"\bparams\s*:"),
        ("ps", 1, r"^[ \t]*\.lib\s+\"?[^\s\"]+\"?\s*$"),
        ("ps", 2, r"\$g_"),
        ("hs", 2, r"^[ \t]*\.(?:alter|data|del|protect|unprotect|hdl)\b"),
        ("hs", 2, r"^[ \t]*\.opt(?:ion|ions)?\b.*\bpost\b"),
        ("hs", 2, r"^[ \t]*[eg]\S*\s.*\b(?:vol|cur)\s*="),
        ("hs", 1, r"^[ \t]*\.lib\s+'[^']+'\s+\S+"),
        ("hs", 1, r"^[ \t]*\.param\b.*=\s*'"),
    )
)
_LOOKED_AT = 200_000  # characters: the marks of a dialect stand on its first pages


_EXPORT = re.compile(r"eeschema|kicad|\bnet-[(_]|\bunconnected-[(_]", re.IGNORECASE)


def is_raw_export(text: str) -> bool:
    """Whether a schematic editor wrote the text: then any reference letter may stand for any part."""
    return _EXPORT.search(text, 0, _LOOKED_AT) is not None


def recognise(text: str) -> str:
    """Return the dialect that the marks in a text speak for."""
    points = dict.fromkeys(DIALECTS, 0)
    for dialect, worth, pattern in _MARKS:
        if pattern.search(text, 0, _LOOKED_AT):
            points[dialect] += worth
    best = max(points.values())
    leading = [dialect for dialect in DIALECTS if points[dialect] == best]
    return leading[0] if best >= 2 and len(leading) == 1 else "default"
