"""Pictures by the command line."""

from pathlib import Path

import pytest

from app.cli import DONE, REFUSED, WRONG_USAGE
from tests.support.command_line import Run


@pytest.mark.parametrize(("suffix", "start"), [("png", b"\x89PNG"), ("svg", b"<?xml"), ("pdf", b"%PDF")])
def test_a_picture_is_drawn_in_each_format(filled: Run, tmp_path: Path, suffix: str, start: bytes) -> None:
    out = tmp_path / f"n4.{suffix}"
    code, _, err = filled("picture", "N4", "--out", out, "--as-of", "2026-03-27T23:00Z", "--size", "900x600")
    assert code == DONE, err
    assert out.read_bytes().startswith(start)
    assert out.stat().st_size > 3000


def test_a_picture_of_an_old_episode_ends_at_its_newest_moment_and_says_so(filled: Run, tmp_path: Path) -> None:
    code, _, err = filled("picture", "N4", "--out", tmp_path / "p.png")
    assert (code, "drawn as of 27-Mar-2026 21:25" in err) == (DONE, True), err
    _, _, err = filled("picture", "N4", "--out", tmp_path / "q.png", "--as-of", "2026-03-27T22:00Z")
    assert "drawn as of" not in err


def test_a_picture_that_cannot_be_is_refused(filled: Run, tmp_path: Path) -> None:
    assert filled("picture", "N4", "--out", tmp_path / "x.gif")[0] == WRONG_USAGE
    assert filled("picture", "N4", "--out", tmp_path / "gone" / "x.png")[0] == REFUSED
    assert filled("picture", "N9", "--out", tmp_path / "x.png")[0] == REFUSED
    assert not (tmp_path / "x.png").exists()
