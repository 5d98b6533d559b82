"""Every line that a handover owes, read from the printed page of an episode whose every value was typed by hand.

What is expected stands here in letters: nothing is taken from what made the page.
"""

from __future__ import annotations

import pytest

from app.operations import entry, episode, flag
from app.operations import handover as operations
from app.operations.figures import EpisodeRequest, of_episode
from app.sheet.content import sheet_content
from app.sheet.paper import PAPERS
from app.sheet.printing import pdf_bytes
from app.words import Reader
from core.record.instant import HOUR, MINUTE, parse
from storage.store import Store
from tests.support.pdf_text import flat, flat_pages

EVENING, MORNING = parse("2026-03-27T19:30:00Z"), parse("2026-03-28T07:30:00Z")
FACTS = {
    "label": "Bed 9", "location": "Bay C", "age": "71", "sex": "male", "indication": "copd",
    "target_spo2_low": "88", "target_spo2_high": "92", "ceiling_of_care": "no intubation",
    "resuscitation": "not for resuscitation", "contact": "registrar, bleep 99", "usual_paco2": "52 mmHg",
    "home_support": "oxygen 1 L/min at home", "feeding": "sips only", "isolation": "droplet",
}  # fmt: skip
BEFORE = (
    "18:00 ph 7.22 paco2 84 pao2 55 gas_fio2 28 site arterial",
    "18:20 bpap-st 14/5 28 rate_set 14 interface oronasal",
    "19:20 ph 7.23 paco2 82 pao2 57 gas_fio2 28 site arterial", "19:25 rr 30 spo2 87 gcs 15",
)  # fmt: skip
NIGHT = (
    "20:00 20/5", "21:10 ph 7.31 paco2 66 pao2 60 gas_fio2 28 site arterial", "21:15 rr 24 spo2 90 leak 14",
    "22:00 mask off", "22:20 mask on", "23:00 secretions", "23:05 comfort fair",
    "01:00 fio2 32", "02:10 ph 7.28 paco2 74 pao2 63 gas_fio2 32 site arterial", "02:12 rr 27 spo2 94",
    "02:20 told medical registrar, will come at 03:00", "03:00 skin check", "06:40 rr 26 spo2 95 leak 14",
    "06:50 spo2 95",
    "03:05 ph 7.27 paco2 75 site venous",
    "plan if pH below 7.25 by 06:00 call intensive care", "agreed with Dr Onyx",
    "breaks and night 20 min for meals, none before 06:00", "jobs chest film", "handover remark watch the left seal",
)  # fmt: skip

EPISODE = {
    "patient label and place": ("Bed 9", "71 y, male, COPD. Bay C. Episode A."),
    "why on support and since when": ("Why on support COPD", "support since 27-Mar-2026 18:20"),
    "hours on the mask": ("12 h 50 min on the mask", "Mask this shift 11 h 40 min; off 22:00 to 22:20"),
    "target": ("SpO2 target 88 to 92 %",),
    "ceiling and resuscitation apart": ("Ceiling of care no intubation", "Resuscitation not for resuscitation"),
    "responsible, usual PaCO2, home": ("Responsible registrar, bleep 99", "52 mmHg", "oxygen 1 L/min at home"),
    "settings now": ("Settings now BPAP-ST, IPAP 20 / EPAP 5 cmH2O (PS 15), FiO2 32 %, backup rate 14/min",),
    "every change with its response": (
        "20:00 IPAP 14 to 20 cmH2O", "01:00 FiO2 28 to 32 % Worse, gain lost", "PaCO2 +8 mmHg, P/F −17 mmHg"),
    "the chart": ("IPAP / EPAP cmH2O", "pH", "PaCO2 mmHg", "Rate /min", "SpO2 %", "20/5 28 %"),
    "gases with their differences": ("21:10 art 7.31 +0.08 66 −16 60", "02:10 art 7.28 −0.03 74 +8 63", "03:05 ven"),
    "leak and interface": ("Leak 14 L/min", "Interface: oronasal"),
    "tolerance, secretions, skin, feeding, isolation": (
        "Tolerance fair", "Secretions 23:00 recorded", "Skin 03:00 recorded", "Feeding sips only",
        "Isolation droplet"),
    "flags, open and settled": ("CONCERN", "SpO2 above range on oxygen", "Settled:", "by KL: seen with the team"),
    "calls and answers": ("Calls, answers 02:20 medical registrar", "will come at 03:00"),
    "levers": ("Levers that could act", "a qualified person decides", "Pressure support: pH 7.28"),
    "due next": ("Due in the next 4 h, and overdue", "OVERDUE"),
    "plan": ("Plan if pH below 7.25 by 06:00 call intensive care", "Agreed with Dr Onyx",
             "Breaks and night 20 min for meals, none before 06:00", "Jobs not done chest film"),
    "remark": ("remark watch the left seal",),
    "what changed since the last handover": (
        "What changed Since the last handover, 27-Mar-2026 19:30: Settings: IPAP 14 to 20 cmH2O, FiO2 28 to 32 %.",
        "State: severe acidosis before, now acidotic, pH 7.23 to 7.28, PaCO2 82 to 74 mmHg", "change of 20:00 better",
        "Plan: new."),
    "given, taken, times": ("Given by", "G. Iver", "Taken by", "T. Aker", "Time 28-Mar-2026 07:30"),
    "head, page, cautions": ("Ledger head", "Page 2 of 2", "It is no alarm and no monitor",
                             "Local policy and licensed practice come first"),
}  # fmt: skip
WARD = {
    "whom to see first and why": ("See first Bed 9:",),
    "the episode": ("1 Bed 9", "71 y, male, COPD", "Acidotic: pH 7.28, PaCO2 74 mmHg", "no intubation",
                    "not for resuscitation", "BPAP-ST 20/5 cmH2O (PS 15), FiO2 32 %"),
    "change of state": ("Severe acidosis before, now acidotic",),
    "what is due": ("Due in the next 4 h, and overdue", "Bed 9"),
    "what it is compared with": ("the last closed handover, as of 27-Mar-2026 19:30: Day, AB to CD",),
    "head, page, cautions": ("Ledger head", "Page 1 of 2", "It is no alarm and no monitor", "Given by G. Iver"),
}  # fmt: skip


@pytest.fixture(scope="module", params=sorted(PAPERS))
def printed(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory, qapp: object) -> list[str]:
    with Store.create(tmp_path_factory.mktemp("own") / "w.luffmark", now=EVENING - 2 * HOUR) as store:
        episode.begin(store, "AB", EVENING - 2 * HOUR, episode.BeginRequest("A", FACTS))
        for line in BEFORE:
            log(store, EVENING, line)
        day = operations.prepare(store, "AB", EVENING, operations.HandoverRequest(EVENING - 12 * HOUR, EVENING)).value
        kept = operations.ClosedHandover("Day, AB to CD", b"%PDF", operations.facts_of(day))
        operations.close(store, "AB", EVENING, kept)
        for line in NIGHT:
            log(store, MORNING, line)
        settle(store)
        shift = operations.HandoverRequest(EVENING, MORNING)
        made = operations.prepare(store, "AB", MORNING, shift).value
        content = sheet_content(made, Reader(), given_by="G. Iver", taken_by="T. Aker")
    return flat_pages(pdf_bytes(content, request.param)[0])


def log(store: Store, now: int, line: str) -> None:
    entry.log_line(store, "AB", now, entry.LineRequest("A", line, "UTC", confirmed=True))


def settle(store: Store) -> None:
    """One flag of the night is settled with a reason."""
    figures = of_episode(store, "KL", MORNING, EpisodeRequest("A", MORNING - MINUTE)).value.figures
    found = next(f for f in figures.flags if f.state == "raised" and f.marker == "skin_check_overdue")
    flag.settle(store, "KL", MORNING - MINUTE, flag.FlagRequest("A", found.flag_id, "seen with the team"))


@pytest.mark.parametrize("clause", EPISODE)
def test_the_episodes_page_says(printed: list[str], clause: str) -> None:
    for words in EPISODE[clause]:
        assert flat(words) in printed[1], words


@pytest.mark.parametrize("clause", WARD)
def test_the_wards_page_says(printed: list[str], clause: str) -> None:
    for words in WARD[clause]:
        assert flat(words) in printed[0], words


def test_a_response_stands_in_words_or_where_there_is_no_room_by_its_verdict(printed: list[str]) -> None:
    whole = flat("20:00 IPAP 14 to 20 cmH2O Better: pH +0.08, PaCO2 −16 mmHg, P/F +10.7 mmHg after 1 h 10 min")
    assert whole in printed[1] or flat("20:00 IPAP 14 to 20 cmH2O: better") in printed[1]


def test_there_is_one_page_for_the_ward_and_one_for_the_episode(printed: list[str]) -> None:
    assert len(printed) == 2
