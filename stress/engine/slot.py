"""One worker process that can be lost and replaced at any moment."""

from __future__ import annotations

import multiprocessing
import os
import sys
import threading
from collections.abc import Callable, Iterator
from concurrent.futures import Future
from contextlib import contextmanager
from multiprocessing.context import SpawnContext, SpawnProcess
from types import ModuleType
from typing import Any, TypeVar

from pebble import ProcessPool

from stress.engine.orphan import start

Found = TypeVar("Found")

# Small matrices only: threads of the algebra library would fight over the cores.
_SINGLE = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")
_STARTING = threading.Lock()


@contextmanager
def _bare() -> Iterator[None]:
    """Let a process start without the caller's main module, and with single-threaded algebra.

    A script that asks for a review needs no guard against being run again in each worker.
    """
    with _STARTING:
        main, before = sys.modules["__main__"], {name: os.environ.get(name) for name in _SINGLE}
        sys.modules["__main__"] = ModuleType("__main__")
        os.environ.update(dict.fromkeys(_SINGLE, "1"))
        try:
            yield
        finally:
            sys.modules["__main__"] = main
            for name, value in before.items():
                if value is None:
                    del os.environ[name]
                else:
                    os.environ[name] = value


class _Process(SpawnProcess):
    """A fresh interpreter: forking a process that has threads is asking for a deadlock."""

    def start(self) -> None:
        with _bare():
            super().start()


class _Context(SpawnContext):
    Process = _Process


class Slot:
    """A place for one worker; a new one takes over when the old one is lost.

    Args:
        folder: Empty; the worker stands in it. What it lies in is the pool's own, and goes with the
            workers when the pool's process is killed.
        library: The ngspice library, as `stress.engine.ngspice.find_library` gives it.
        memory_bytes: Its address space, or None for no limit.
    """

    def __init__(self, folder: str, library: str, *, memory_bytes: int | None = None) -> None:
        self._place = (folder, library, memory_bytes)
        self._pool = self._fresh()

    def submit(self, function: Callable[..., Found], *args: Any) -> Future[Found]:
        """Hand over work; a lost worker shows as an exception of the future."""
        try:
            return self._pool.schedule(function, args=args)
        except RuntimeError as error:
            failed: Future[Found] = Future()
            failed.set_exception(error)
            return failed

    def replace(self) -> None:
        """End the worker, whatever it is doing, and start another."""
        self.end()
        self.join()
        self._pool = self._fresh()

    def end(self) -> None:
        """Tell the worker to go; what it was doing is lost."""
        self._pool.stop()  # type: ignore[no-untyped-call]

    def join(self) -> None:
        """Wait until the worker is gone."""
        self._pool.join()

    def _fresh(self) -> ProcessPool:
        context = _Context()
        return ProcessPool(
            max_workers=1,
            initializer=start,
            initargs=self._place,
            context=context,
        )


def cores() -> int:
    """Return how many cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return multiprocessing.cpu_count()
