"""The door to the scores: HACOR 2017, updated HACOR 2022, NEWS2, the COPD failure chart's risk class.

Pure functions of given inputs: which vitals are fresh enough is decided by the caller. A missing input is
never normal: `points` is None and `lowest`..`highest` bound the score.
"""

from __future__ import annotations

from core.judgement.scores_binning import half_up, ratio_text
from core.judgement.scores_copd_failure import Risk, RiskClass, copd_failure
from core.judgement.scores_hacor import failure_percent, hacor, hacor_points
from core.judgement.scores_hacor_updated import hacor_updated, updated_band
from core.judgement.scores_news2 import band as news2_band
from core.judgement.scores_news2 import breathes_oxygen, news2, single_three
from core.judgement.scores_result import Part, Score

__all__ = [
    "Part",
    "Risk",
    "RiskClass",
    "Score",
    "breathes_oxygen",
    "copd_failure",
    "failure_percent",
    "hacor",
    "hacor_points",
    "hacor_updated",
    "half_up",
    "news2",
    "news2_band",
    "ratio_text",
    "single_three",
    "updated_band",
]
