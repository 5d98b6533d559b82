"""What every test gets: an off-screen Qt, a settings and data folder of its own."""

import os
from collections.abc import Iterator

import pytest
from hypothesis import HealthCheck, settings

# A loaded machine is no finding, so no deadline. In CI the examples are fixed: a random find belongs to a person.
settings.register_profile(
    "luffmark", deadline=None, derandomize="CI" in os.environ, suppress_health_check=[HealthCheck.too_slow]
)
settings.load_profile("luffmark")

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
os.environ["QT_SCALE_FACTOR"] = "1"

from tests.support import nothing_left  # noqa: E402  # Qt reads the environment when it is imported

nothing_left.see_timers()


@pytest.fixture(autouse=True)
def nothing_is_left_behind() -> Iterator[None]:
    """No test leaves a thread, a running timer or a window to the next."""
    before = nothing_left.threads()
    yield
    left = nothing_left.left_behind(before)
    assert not left, f"left behind: {left}"


@pytest.fixture(autouse=True)
def own_folders(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> None:
    """No test reads or writes the user's real settings, stores or cache."""
    home = tmp_path_factory.mktemp("home")
    xdg = [f"XDG_{kind}_HOME" for kind in ("DATA", "CONFIG", "CACHE", "STATE")]
    for name in ("HOME", "LOCALAPPDATA", "APPDATA", *xdg):
        monkeypatch.setenv(name, str(home))
