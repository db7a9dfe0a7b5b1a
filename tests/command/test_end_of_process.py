"""A review that is ended from outside leaves no worker and no file, however it is ended."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import psutil
import pytest

MIDGET = Path(__file__).parents[2] / "netlists" / "harbour_midget.cir"
COMMAND = "from stress.command.main import main; main()"
LIMIT_S = 30.0  # far beyond what it takes; only a test that fails waits so long

pytestmark = [
    pytest.mark.ngspice,
    pytest.mark.skipif(os.name != "posix", reason="signals of POSIX"),
]


def until(found):
    """Return what `found` returns as soon as it is something."""
    end = time.monotonic() + LIMIT_S
    while time.monotonic() < end:
        if result := found():
            return result
        time.sleep(0.02)
    raise AssertionError("it did not come to that")


def at_work(parent, folder):
    """Return the workers when all of them have begun and there is a twin to simulate."""
    workers = [p for p in parent.children() if "spawn_main" in " ".join(p.cmdline())]
    inside = [worker for worker in workers if Path(worker.cwd()).name == "empty"]
    return workers if len(inside) == 2 and list(folder.glob("*/*.twin")) else []


@pytest.mark.parametrize(
    ("blow", "status"),
    [(signal.SIGTERM, 128 + signal.SIGTERM), (signal.SIGINT, 1), (signal.SIGKILL, -signal.SIGKILL)],
    ids=["told to end", "interrupted", "killed"],
)
def test_nothing_is_left_behind(tmp_path, blow, status):
    review = subprocess.Popen(
        [sys.executable, "-c", COMMAND, "review", str(MIDGET), "--jobs", "2"],
        env={**os.environ, "TMPDIR": str(tmp_path)},
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    try:
        parent = psutil.Process(review.pid)
        workers = until(lambda: at_work(parent, tmp_path))
        review.send_signal(blow)

        assert review.wait(timeout=LIMIT_S) == status
        _, alive = psutil.wait_procs(workers, timeout=LIMIT_S)
        assert alive == []
        assert until(lambda: not list(tmp_path.iterdir()))
    finally:
        review.kill()
        review.wait()
