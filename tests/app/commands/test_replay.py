"""`luffmark replay` end to end: one policy, two side by side, a span, refusals, and Ctrl+C."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest

from app.cli import DONE, REFUSED, main
from core.judgement.policy import shipped_text
from tests.support.sample_ward import sample_night


@pytest.fixture(scope="module")
def night(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The sample night's store; nothing here writes to it."""
    return sample_night(tmp_path_factory.mktemp("night"))


@pytest.fixture
def run(night: Path, capsys: pytest.CaptureFixture[str]) -> Any:
    def runner(*arguments: str | Path) -> tuple[int, str, str]:
        capsys.readouterr()
        code = main(["--store", str(night), "--zone", "UTC", "replay", *map(str, arguments)])
        said = capsys.readouterr()
        return code, said.out, said.err

    return runner


FAILS, WELL = "N-0327-04", "N-0327-11"


def test_one_policy_says_when_how_often_and_against_what(run: Any) -> None:
    code, out, err = run("--episodes", FAILS, WELL)
    assert (code, err) == (DONE, "")
    assert "in force: Shipped policy, version 1" in out
    assert "28-Mar-2026 03:11  28-Mar-2026 03:08  pH below 7.25 and not better at 1-2 h" in out
    for head in ("When each flag", "How often", "per episode-hour", "Shift from", "Outcome as logged"):
        assert head in out


def test_two_policies_stand_side_by_side(run: Any, tmp_path: Path) -> None:
    ward = tmp_path / "ward.toml"
    ward.write_text(shipped_text().replace("limits = { ph = 7.25 }", "limits = { ph = 7.2 }"), "utf-8")
    code, out, _ = run("--policy", "shipped", "--against", ward, "--episodes", FAILS, "--json")
    told = json.loads(out)
    assert code == DONE
    assert [p["from"] for p in told["policies"]] == ["shipped", "ward.toml"]
    assert told["policies"][0]["hash"] != told["policies"][1]["hash"]
    (row,) = [m for m in told["markers"] if m["marker"] == "ph_below_severe"]
    assert row["raised"][0] == 1
    (episode,) = told["episodes"]
    assert len(episode["flags"]) == 2
    assert sum(told["shifts"][-1]["raised"]) == sum(load["raised"] for load in told["load"])
    code, out, _ = run("--policy", "shipped", "--against", ward, "--episodes", FAILS)
    assert "Difference" in out
    assert "Raised A" in out


def test_a_span_and_a_store_without_anything_in_it(run: Any) -> None:
    early = json.loads(run("--episodes", FAILS, "--to", "2026-03-28T02:30:00Z", "--json")[1])
    assert all(f["raised_at"] < "2026-03-28T02:30" for f in early["episodes"][0]["flags"][0])
    assert "nothing to replay" in run("--to", "2026-03-20T00:00:00Z")[1]


def test_what_it_refuses(run: Any, tmp_path: Path) -> None:
    bad = tmp_path / "bad.toml"
    bad.write_text(shipped_text().replace("ph = 7.25", "ph = 72.5"), "utf-8")
    assert run("--policy", bad)[0] == REFUSED
    assert run("--policy", tmp_path / "none.toml")[0] == REFUSED
    code, _, err = run("--episodes", "N-9")
    assert code == REFUSED
    assert "N-9" in err
    assert run("--from", "2026-03-28T02:00:00Z", "--to", "2026-03-28T01:00:00Z")[0] == REFUSED


def test_it_writes_nothing(night: Path, run: Any) -> None:
    from storage.store import Store

    with Store.open(night, read_only=True) as store:
        before = store.printed_head()
    run("--episodes", FAILS)
    with Store.open(night, read_only=True) as store:
        assert store.printed_head() == before


@pytest.mark.skipif(not Path("/proc/self/task").exists(), reason="looks for child processes in /proc")
def test_an_interrupt_ends_every_process(night: Path) -> None:
    line = [sys.executable, "-m", "app.cli", "--store", str(night), "replay", "--processes", "2"]
    main_process = subprocess.Popen(line, stdout=subprocess.PIPE, stderr=subprocess.PIPE, start_new_session=True)
    workers = _wait_for_workers(main_process.pid)
    os.killpg(main_process.pid, signal.SIGINT)  # as a terminal does: to all of them
    out, err = main_process.communicate(timeout=30)
    assert main_process.returncode == REFUSED
    assert out == b""
    assert err.decode().strip() == "luffmark: the replay was stopped."
    assert _all_gone(workers)


def _all_gone(pids: list[str]) -> bool:
    """Whether every one ended; the tracker of shared objects does so a moment after us."""
    for _ in range(250):
        if not [pid for pid in pids if Path(f"/proc/{pid}").exists()]:
            return True
        time.sleep(0.02)
    return False


def _wait_for_workers(pid: int) -> list[str]:
    """The worker processes, once both and the resource tracker are there."""
    for _ in range(400):
        children = Path(f"/proc/{pid}/task/{pid}/children").read_text().split()
        if len(children) >= 3:
            return children
        time.sleep(0.02)
    raise AssertionError("the workers never came")
