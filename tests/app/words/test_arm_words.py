"""CO2 is better or worse only where it was or is at issue; elsewhere pH and PaCO2 are told as they moved."""

import pytest

from app.words import Reader
from app.words.arm_words import arm_words
from app.words.figure_lines import FigureLines
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.judgement.response_shapes import ResponseFigure
from tests.support.log_cases import at, episode

READER = Reader()
LUNG = "00:20 indication pneumonia target_spo2_low 94 target_spo2_high 98\n"


def newest(log: str) -> tuple[ResponseFigure, str]:
    f = episode_figures(episode(log), at("06:00"), shipped_policy())
    told = f.responses[-1]
    return told, FigureLines(READER).of(f).verdict(told)


@pytest.mark.parametrize(
    ("before", "after", "moved"),
    [
        ("ph 7.45 paco2 36", "ph 7.49 paco2 32", "pH up and PaCO2 down without acute hypercapnia"),
        ("ph 7.46 paco2 34", "ph 7.40 paco2 41", "pH down and PaCO2 up without acute hypercapnia"),
        ("ph 7.45 paco2 34", "ph 7.46 paco2 34", ""),
    ],
)
def test_who_never_was_acidotic_is_not_called_better_or_worse_by_co2(before: str, after: str, moved: str) -> None:
    log = LUNG + f"00:30 {before} pao2 60 gas_fio2 60%\n01:00 mode CPAP cpap 8 fio2 60%\n02:00 {after} pao2 60\n"
    told, text = newest(log)
    words = arm_words(told.gases[-1], READER)
    assert "CO2 better" not in text
    assert "CO2 worse" not in text
    assert words.startswith(moved + ", oxygen" if moved else "oxygen")
    assert words in text


@pytest.mark.parametrize(
    ("before", "after", "said"),
    [
        ("ph 7.28 paco2 70", "ph 7.34 paco2 58", "CO2 better"),
        ("ph 7.40 paco2 44", "ph 7.30 paco2 60", "CO2 worse"),  # acute hypercapnia is new
        ("ph 7.40 paco2 60", "ph 7.50 paco2 44", "CO2 over-correction"),
    ],
)
def test_where_co2_is_at_issue_it_has_its_verdict(before: str, after: str, said: str) -> None:
    log = LUNG + f"00:30 {before} pao2 60 gas_fio2 60%\n01:00 mode CPAP cpap 8 fio2 60%\n02:00 {after} pao2 60\n"
    told, _ = newest(log)
    assert arm_words(told.gases[-1], READER).startswith(said)
