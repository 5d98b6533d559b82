"""Readings of the device that people typed: left out with the mask off, a volume in doubt as its figure is."""

from __future__ import annotations

import pytest

from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures
from tests.support.log_cases import at, episode

BEGIN = "00:30 rr 20\n01:00 mode BPAP-ST ipap 20 epap 5 leak_definition unintentional\n"


def _figures(log: str) -> EpisodeFigures:
    return episode_figures(episode(BEGIN + log), at("03:00"), shipped_policy())


def _told(log: str) -> list[tuple[str, int, str]]:
    return [(d.channel, d.at, d.why.key) for d in _figures(log).ventilation.typed_doubts]


@pytest.mark.parametrize(
    ("log", "told"),
    [
        ("02:00 vte 500 leak 20", []),
        ("02:00 vte 500 mv 9 leak 45", [("mv", "02:00", "tidal_volume.leak_too_large"),
                                        ("vte", "02:00", "tidal_volume.leak_too_large")]),
        ("02:00 vte 500", [("vte", "02:00", "tidal_volume.leak_not_known")]),
        ("01:50 mask_off\n02:00 vte 420 leak 22 rr_total 30",
         [(c, "02:00", "device.off_mask") for c in ("leak", "rr_total", "vte")]),
        ("01:50 mask_off\n01:55 leak 22\n02:10 mask_on\n02:20 leak 25", [("leak", "01:55", "device.off_mask")]),
        ("01:50 stopped\n02:00 leak 22", [("leak", "02:00", "device.off_mask")]),
    ],
)  # fmt: skip
def test_which_are_told_and_why(log: str, told: list[tuple[str, str, str]]) -> None:
    assert sorted(_told(log)) == sorted((c, at(t), why) for c, t, why in told)


def test_figures_do_not_deny_a_reading_that_was_logged_with_the_mask_off() -> None:
    f = _figures("01:50 mask_off\n02:00 vte 420 leak 22")
    reason = f.ventilation.tidal_volume_mL.reason
    assert reason is not None
    assert (reason.key, reason.values["at"]) == ("ventilation.tidal_volume_off_mask", at("02:00"))
    assert f.leak.median_L_per_min is None
    assert f.leak.reasons["median_L_per_min"].key == "leak.off_mask"


def test_the_newest_volume_has_the_doubt_of_its_figure() -> None:
    f = _figures("02:00 vte 500 leak 45")
    (doubt,) = f.ventilation.typed_doubts
    assert doubt.why == f.ventilation.tidal_volume_mL.doubt
