"""The command line as a whole: usage, help, and what it loads. Each command has tests of its own in `commands`."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from app.cli import DONE, REFUSED, WRONG_USAGE, main
from tests.support.command_line import Run


@pytest.mark.parametrize(
    "arguments",
    [("figures", "--as-of", "yesterday"), ("figures", "--as-of", "2026-03-27T20:00"), ("handover",), ("quux",),
     ("picture", "N4", "--out", "x.png", "--size", "10x10"), ("policy", "burn"), ("log", "N4")],
)  # fmt: skip
def test_wrong_usage_ends_with_2(run: Run, arguments: tuple[str, ...]) -> None:
    assert run(*arguments)[0] == WRONG_USAGE


@pytest.mark.parametrize("arguments", [("figures", "--as-of", "noon"), ("log", "N4", "rr 20", "--by", "")])
def test_wrong_usage_is_told_on_one_line(run: Run, arguments: tuple[str, ...]) -> None:
    code, _, err = run(*arguments)
    assert (code, len(err.splitlines())) == (WRONG_USAGE, 1), err
    assert "Accepted" in err


def test_a_store_that_is_not_there_is_told_in_one_line(run: Run) -> None:
    for command in (("figures",), ("verify",), ("backup", "x"), ("correct", "N4")):
        code, _, err = run(*command)
        assert code == REFUSED
        assert "There is no store" in err
        assert len(err.strip().splitlines()) == 1


def test_every_command_has_help_with_the_cautions(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        main(["--help"])
    said = capsys.readouterr().out
    for command in ("demo", "intake", "log", "figures", "handover", "picture", "screens", "verify", "backup",
                    "restore", "export", "correct", "policy"):  # fmt: skip
        assert f"    {command} " in said
        with pytest.raises(SystemExit) as ended:
            main([command, "--help"])
        assert ended.value.code == 0
        assert "no alarm" in " ".join(capsys.readouterr().out.split())


def test_help_and_verify_load_neither_qt_nor_pandas(run: Run, store: Path, log_file: Path) -> None:
    assert run("intake", log_file)[0] == DONE
    code = (
        "import sys; from app.cli import main\n"
        f"main(['verify', '--store', {str(store)!r}]); main(['log', 'N4', 'rr 20', '--store', {str(store)!r}])\n"
        "print([m for m in ('PySide6', 'pandas', 'scipy', 'pyqtgraph', 'alembic') if m in sys.modules])"
    )
    environment = dict(os.environ, TZ="Europe/London")
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, env=environment, check=True)
    assert done.stdout.strip().splitlines()[-1] == "[]"
