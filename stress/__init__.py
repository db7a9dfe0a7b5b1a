"""capstress: what every capacitor of a piece of equipment really bears.

`from stress import review; review("set.cir")` gives the result that the reports are made from.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from stress.pipeline import load, review

__all__ = ["load", "review"]


def __getattr__(name: str) -> Any:
    """Import the pipeline when it is first asked for: the command line answers faster without."""
    if name in __all__:
        from stress import pipeline

        return getattr(pipeline, name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
