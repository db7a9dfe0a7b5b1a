"""The library that is used: found, told, and said to be missing."""

from importlib.metadata import version

import pytest
from click.testing import CliRunner

from stress.command.engine import engine
from stress.engine.case import Case
from stress.engine.ngspice import VARIABLE, LibraryMissing, find_library
from stress.engine.pool import Pool


@pytest.mark.ngspice
def test_the_command_tells_library_and_versions(monkeypatch):
    monkeypatch.delenv(VARIABLE, raising=False)
    told = CliRunner().invoke(engine)

    assert told.exit_code == 0
    assert f"library   {find_library()}" in told.output
    assert f"PySpice   {version('PySpice')}" in told.output
    assert "ngspice   " in told.output
    assert VARIABLE in told.output


def test_a_missing_library_is_said_with_how_to_get_one(monkeypatch, tmp_path):
    monkeypatch.setenv(VARIABLE, str(tmp_path / "libngspice.so"))
    told = CliRunner().invoke(engine)

    assert told.exit_code == 3
    assert (
        f"{VARIABLE} names {tmp_path / 'libngspice.so'}, and there is no such file" in told.output
    )
    assert "install" in told.output


def test_a_file_that_is_no_library_is_said_before_any_case_fails(monkeypatch, tmp_path, twin_of):
    path = tmp_path / "libngspice.so"
    path.write_text("not a library", encoding="ascii")
    monkeypatch.setenv(VARIABLE, str(path))
    case = Case(name="any", twin=twin_of("V1 a 0 1\nR1 a 0 1"))

    with Pool(jobs=1) as pool, pytest.raises(LibraryMissing, match="libngspice"):
        list(pool.solve([case]))


@pytest.mark.ngspice
def test_no_start_up_file_is_executed(monkeypatch, tmp_path, twin_of):
    """A start-up file in the user's folder and home would leave its mark."""
    mark = tmp_path / "executed"
    (tmp_path / ".spiceinit").write_text(f"shell touch {mark}\n", encoding="ascii")
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("HOME", str(tmp_path))
    case = Case(name="harmless", twin=twin_of("V1 a 0 1\nR1 a 0 1"))
    with Pool(jobs=1) as pool:
        (answer,) = pool.solve([case])

    assert answer.waves.voltage("a")[0] == pytest.approx(1.0)
    assert not mark.exists()
