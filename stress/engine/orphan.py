"""A worker whose parent is gone ends by itself, deep inside the library too.

However a parent ends, the pipe between both closes; that holds on every system and for any thread
of the parent, unlike the signal that some systems send.
"""

from __future__ import annotations

import multiprocessing
import os
import shutil
import threading
from pathlib import Path

from stress.engine.worker import enter


def start(folder: str, library: str, memory_bytes: int | None) -> None:
    """Make a worker process ready, as `stress.engine.worker.enter`, and bind it to its parent.

    Args:
        folder: Empty, inside the folder of the pool, which a parent that was killed leaves behind.
        library, memory_bytes: As `enter`.
    """
    enter(folder, library, memory_bytes)
    parents = Path(folder).parent
    threading.Thread(target=_follow, args=(parents,), name="parent watch", daemon=True).start()


def _follow(parents: Path) -> None:
    parent = multiprocessing.parent_process()
    if parent is None:
        return
    parent.join()
    os.chdir(parents.anchor)
    shutil.rmtree(parents, ignore_errors=True)
    os._exit(1)
