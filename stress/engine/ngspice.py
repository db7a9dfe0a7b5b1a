"""ngspice in this process, through PySpice's shared-library class. Nothing else imports it.

The library allows one instance a process, may end or poison the process, and executes
start-up files from the working and the home folder: it is only loaded in a worker that stands
in an empty folder (`stress.engine.worker`). Return codes do not tell of failure; every run is
judged by what was printed and by the plot that it left.
"""

from __future__ import annotations

import ctypes.util
import glob
import locale
import logging
import os
import platform
import time
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from typing import Any

import numpy as np

from stress.engine import message
from stress.engine.case import Floats

VARIABLE = "NGSPICE_LIBRARY_PATH"
HISTORY_CLEARED_EVERY = 200  # commands; the history is what grows otherwise
LONGEST_COMMAND = 1023


class LibraryMissing(Exception):
    """No ngspice shared library was found; the text says where was looked."""


class DeckRefused(Exception):
    """A deck could not be loaded; the process must not be used any more."""


class RunFailed(Exception):
    """An analysis gave no usable result; `text` is what ngspice said."""


class Broken(Exception):
    """ngspice asked to end the process: nothing it says from now on counts."""


def find_library() -> str:
    """Return the path or file name of the ngspice shared library.

    Raises:
        LibraryMissing: Where none is found.
    """
    named = os.environ.get(VARIABLE)
    if named:
        if os.path.basename(named) == named:
            return named
        if not os.path.exists(named):
            raise LibraryMissing(f"{VARIABLE} names {named}, and there is no such file")
        return os.path.abspath(named)
    if platform.system() == "Linux":
        # The runtime package has no unversioned name, which is the only one PySpice tries.
        found = ctypes.util.find_library("ngspice")
        if found:
            return found
        patterns: tuple[str, ...] = (
            "/usr/lib/*/libngspice.so*",
            "/usr/lib*/libngspice.so*",
            "/usr/local/lib/libngspice.so*",
        )
    elif platform.system() == "Darwin":
        patterns = ("/opt/homebrew/lib/libngspice*.dylib", "/usr/local/lib/libngspice*.dylib")
    else:
        found = ctypes.util.find_library("ngspice")
        if found:
            return found
        patterns = ("C:/Spice64/bin/ngspice.dll", "C:/Spice64_dll/dll-vs/ngspice.dll")
    for pattern in patterns:
        hits = sorted(glob.glob(pattern), key=len)
        if hits:
            return hits[0]
    raise LibraryMissing(
        f"no ngspice shared library in the system's library folders; {VARIABLE} may name it"
    )


@contextmanager
def _quiet() -> Iterator[None]:
    """Keep what the import and the start change for the whole process to themselves."""
    number_format = locale.setlocale(locale.LC_NUMERIC)
    logger = logging.getLogger("PySpice")
    level = logger.level
    logger.setLevel(logging.CRITICAL + 1)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            yield
    finally:
        logger.setLevel(level)
        locale.setlocale(locale.LC_NUMERIC, number_format)


def _library_class() -> tuple[Any, Any]:
    """Import PySpice and return (its class with our callbacks, its cffi interface)."""
    os.environ[VARIABLE] = find_library()
    from PySpice.Spice.NgSpice import Shared

    class Library(Shared.NgSpiceShared):  # type: ignore[misc]
        """Collects what is printed, raises nothing for it, and notes a wish to end."""

        def __init__(self) -> None:
            self.printed: list[str] = []
            self.wants_to_end = False
            self.setup_platform()
            super().__init__()

        @staticmethod
        def _send_char(text: Any, _number: int, user: Any) -> int:
            line = Shared.ffi.string(text).decode("utf-8", errors="replace")
            Shared.ffi.from_handle(user).printed.append(line.partition(" ")[2])
            return 0

        @staticmethod
        def _send_stat(_text: Any, _number: int, _user: Any) -> int:
            return 0

        @staticmethod
        def _exit(_status: int, _at_once: bool, _quit: bool, _number: int, user: Any) -> int:
            Shared.ffi.from_handle(user).wants_to_end = True
            return 0

        @staticmethod
        def _background_thread_running(_running: bool, _number: int, _user: Any) -> int:
            return 0

        def exec_command(self, command: str, join_lines: bool = True) -> Any:
            self.printed.clear()
            self._ngspice_shared.ngSpice_Command(command.encode("ascii"))
            lines = list(self.printed)
            return "\n".join(lines) if join_lines else lines

        @property
        def functions(self) -> Any:
            return self._ngspice_shared

    return Library, Shared.ffi


class Ngspice:
    """The library of this process: decks in, vectors out.

    Attributes:
        seconds: Processor time spent inside the library so far.
    """

    def __init__(self) -> None:
        """Load the library of this process.

        Raises:
            LibraryMissing: Where there is none, or none that loads.
        """
        with _quiet():
            library, self._ffi = _library_class()
            try:
                self._library = library()
            except OSError as error:
                raise LibraryMissing(str(error)) from error
        self._call = self._library.functions
        self._commands = 0
        self._loaded = False
        self.seconds = 0.0
        self._do("set noaskquit")

    @property
    def version(self) -> str:
        """Version as the library tells it, such as "39"."""
        return str(self._library.ngspice_version or "unknown")

    @property
    def path(self) -> str:
        """The library that was loaded."""
        return str(self._library.library_path)

    def load(self, lines: Sequence[str]) -> None:
        """Load a deck in place of the one before.

        Raises:
            DeckRefused: Where ngspice does not take it.
            Broken: Where the process is lost.
        """
        if self._loaded:
            self._do("destroy all")
            self._do("remcirc")
        self._library.printed.clear()
        started = time.process_time()
        kept = [self._ffi.new("char[]", line.encode("ascii")) for line in lines]
        status = self._call.ngSpice_Circ(self._ffi.new("char *[]", [*kept, self._ffi.NULL]))
        self.seconds += time.process_time() - started
        self._loaded = True
        grave = message.failures(self._library.printed)
        if status or grave or self._library.wants_to_end:
            raise DeckRefused(message.reason(self._library.printed) or f"status {status}")

    def alter_start(self, device: str, value: float) -> None:
        """Set the initial condition of a capacitor (V) or inductor (A)."""
        self._do(f"alter {device} ic = {value!r}")

    def transient(self, *, stop_s: float, step_s: float, keep_from_s: float = 0.0) -> None:
        """Run from the initial conditions; what lies before a time is not kept.

        Raises:
            RunFailed: Where the run does not reach its end.
        """
        times = f"{step_s!r} {stop_s!r} {keep_from_s!r} {step_s!r}"
        self._analyse(f"tran {times} uic", kind="tran")
        reached = self.vector("time")
        if reached.size < 2 or abs(reached[-1] - stop_s) > 1e-6 * stop_s:
            raise RunFailed(self._told() or "the run ended before its time")

    def operating_point(self) -> None:
        """Find the operating point.

        Raises:
            RunFailed: Where there is none to be found.
        """
        self._analyse("op", kind="op")

    def small_signal(self, frequency_Hz: float) -> None:
        """Run an AC analysis at one frequency.

        Raises:
            RunFailed: Where it gives nothing.
        """
        self._analyse(f"ac lin 1 {frequency_Hz!r} {frequency_Hz!r}", kind="ac")

    def vector(self, name: str) -> Floats:
        """Return a copy of a real vector of the current plot.

        Raises:
            RunFailed: Where there is none of that name.
        """
        found = self._found(name)
        size = found.v_length * 8
        return np.frombuffer(self._ffi.buffer(found.v_realdata, size), dtype=np.float64).copy()

    def complex_vector(self, name: str) -> np.ndarray[Any, np.dtype[np.complex128]]:
        """Return a copy of a complex vector of the current plot.

        Raises:
            RunFailed: Where there is none of that name.
        """
        found = self._found(name)
        size = found.v_length * 16
        return np.frombuffer(self._ffi.buffer(found.v_compdata, size), dtype=np.complex128).copy()

    def last(self, name: str) -> float:
        """Return the last value of a real vector of the current plot."""
        found = self._found(name)
        return float(found.v_realdata[found.v_length - 1])

    def _found(self, name: str) -> Any:
        found = self._call.ngGet_Vec_Info(name.encode("ascii"))
        if found == self._ffi.NULL or found.v_length < 1:
            raise RunFailed(f"no vector {name}")
        return found

    def _analyse(self, command: str, *, kind: str) -> None:
        self._do("destroy all")
        self._library.printed.clear()
        self._do(command)
        grave = message.failures(self._library.printed)
        plot = self._ffi.string(self._call.ngSpice_CurPlot()).decode("ascii", errors="replace")
        if grave or not plot.startswith(kind):
            raise RunFailed(self._told() or f"no result of {command.split()[0]}")

    def _told(self) -> str:
        return message.reason(self._library.printed)

    def _do(self, command: str) -> None:
        if len(command) > LONGEST_COMMAND:
            raise ValueError(f"command of {len(command)} characters")
        started = time.process_time()
        self._commands += 1
        if self._commands % HISTORY_CLEARED_EVERY == 0:
            self._call.ngSpice_Command(self._ffi.NULL)
        self._call.ngSpice_Command(command.encode("ascii"))
        self.seconds += time.process_time() - started
        if self._library.wants_to_end:
            raise Broken(self._told() or "ngspice asked to end")
