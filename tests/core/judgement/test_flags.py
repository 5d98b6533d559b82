"""Flags and their history in the ledger: raised once, never gone in silence, undone when a correction says so."""

import json
from dataclasses import replace

import msgspec
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.figures.episode_figures import judged
from core.judgement.flag_history import history_of, transitions, word_on
from core.judgement.flags import evaluate, flag_id, open_flags
from core.judgement.markers.registry import GROUPS, MARKERS, marker_keys
from core.judgement.policy import shipped_policy
from core.judgement.shapes import FlagFigure
from core.record.entries import Action, Entry, recorded
from core.record.episode import build_episode
from core.record.knowledge import standing
from tests.support.flag_cases import BEFORE, COPD, START, flags, with_rule
from tests.support.log_cases import at, entries
from tests.support.recorded_night import KEYS, Deed, ledger, nights

POLICY = shipped_policy()
BASE = COPD + BEFORE + START
SEVERE = BASE + "02:00 ph 7.24 paco2 76\n"


def computed(made: list[Entry], clock, key: str = "E", policy=POLICY) -> tuple[FlagFigure, ...]:
    """The flags as of a moment of entries, transitions among them."""
    moment = at(clock) if isinstance(clock, str) else clock
    return evaluate(judged(build_episode(key, standing(made)), moment, policy))


def appended(made: list[Entry], clock: str) -> list[Entry]:
    """The ledger after a window has looked at the record and written what happened to its flags."""
    found = computed(made, clock)
    news = transitions(found, [e for e in made if e.action is Action.FLAG], "E", POLICY.hash, at(clock))
    out = list(made)
    for new in news:
        out.append(recorded(new, len(out) + 1, f"t{len(out)}", at(clock)))
    return out


def words(made: list[Entry], marker: str) -> list[str | None]:
    return [e.words for e in made if e.action is Action.FLAG and e.channel == marker]


def one(found, marker: str) -> FlagFigure:
    (flag,) = [f for f in found if f.marker == marker]
    return flag


def test_the_registry_and_the_policy_name_the_same_markers():
    assert set(marker_keys()) == set(POLICY.markers)
    assert {r.group for r in POLICY.markers.values()} <= set(GROUPS)
    for key, rule in POLICY.markers.items():
        assert rule.source.strip(), key
        assert MARKERS[key].find.__doc__, key


def test_the_name_of_a_flag_is_its_marker_and_its_beginning():
    flag = one(flags(SEVERE), "ph_below_severe")
    assert flag.flag_id == flag_id("ph_below_severe", at("02:00"))
    assert (flag.state, flag.tier, flag.policy) == ("raised", "concern", POLICY.hash)
    assert flag.source == POLICY.markers["ph_below_severe"].source


def test_the_strongest_of_a_group_shows_and_the_others_stand_under_it():
    found = flags(SEVERE)
    acidosis = [f for f in found if f.group == "acidosis" and f.ended_at is None]
    assert [f.marker for f in acidosis if f.strongest] == ["ph_not_better_severe"]
    assert len(acidosis) > 1
    assert found[0].tier == "escalate"


def test_an_ended_flag_stays_with_its_end():
    ended = one(flags(SEVERE + "04:00 ph 7.30 paco2 66"), "ph_below_severe")
    assert (ended.state, ended.ended_at) == ("no longer met", at("04:00"))


def test_what_comes_after_support_was_stopped_is_flagged_by_itself():
    found = flags(SEVERE + "02:20 stopped\n03:00 ph 7.05 paco2 90\n03:10 gcs 7")
    still = {f.marker for f in found if f.ended_at is None}
    assert still == {"ph_below_severe", "acidosis_off_support", "gcs_below_8", "gcs_below_11"}
    assert one(found, "ph_not_better_severe").ended_at == at("02:20")
    severe = one(found, "ph_below_severe")  # one flag: it goes on by the newer gas
    assert (severe.since, severe.evidence[0].values["at"]) == (at("02:00"), at("03:00"))


def test_a_gas_of_the_minute_in_which_support_was_stopped_is_flagged():
    found = flags(BASE + "02:00 ph 7.10 paco2 90\n02:00 stopped")
    assert one(found, "ph_below_severe").ended_at is None


def test_what_comes_after_intubation_is_judged_elsewhere():
    found = flags(BASE + "02:20 intubated\n03:00 ph 7.05 paco2 90")
    assert [f.marker for f in found if f.ended_at is None] == []


def test_a_flag_is_raised_once_whoever_looks():
    made = appended(entries(SEVERE), "02:10")
    again = appended(made, "02:20")
    assert again == made
    other_window = transitions(computed(entries(SEVERE), "02:11"), [e for e in made if e.action is Action.FLAG],
                               "E", POLICY.hash, at("02:11"))  # fmt: skip
    assert other_window == ()
    assert words(made, "ph_below_severe") == ["raised"]


def test_a_transition_says_what_it_rests_on():
    made = appended(entries(SEVERE), "02:10")
    (raised,) = [e for e in made if e.channel == "ph_below_severe" and e.action is Action.FLAG]
    told = json.loads(raised.raw)
    assert told["flag_id"] == flag_id("ph_below_severe", at("02:00"))
    assert (told["policy"], told["tier"], told["engine"]) == (POLICY.hash, "concern", "1")
    assert told["evidence"][0][1]["value"] == 7.24


def test_seen_and_settled_with_who_and_why():
    made = appended(entries(SEVERE), "02:10")
    flag = one(computed(made, "02:10"), "ph_below_severe")
    for word, by, clock, reason in (("seen", "CD", "02:15", ""), ("settled", "EF", "02:20", "agreed with the team")):
        made.append(recorded(word_on(flag, word, by, at(clock), "E", reason), len(made) + 1, word, at(clock)))
    before, seen, settled = (one(computed(made, c), "ph_below_severe") for c in ("02:12", "02:16", "02:21"))
    assert (before.state, seen.state, settled.state) == ("raised", "seen", "settled")
    assert (seen.seen_by, seen.seen_at) == ("CD", at("02:15"))
    assert (settled.settled_by, settled.settled_why) == ("EF", "agreed with the team")
    assert flag.flag_id not in [f.flag_id for f in open_flags(computed(made, "02:21"))]


def test_what_was_said_of_a_flag_can_be_taken_back():
    made = appended(entries(SEVERE), "02:10")
    flag = one(computed(made, "02:10"), "ph_below_severe")
    for i, (word, state) in enumerate(
        (("seen", "seen"), ("settled", "settled"), ("reopened", "seen"), ("not seen", "raised"))
    ):
        now = at(f"02:{20 + i}")
        made.append(recorded(word_on(flag, word, "CD", now, "E", "a reason"), len(made) + 1, word, now))
        assert one(computed(made, now), "ph_below_severe").state == state


def test_a_new_flag_never_stands_under_a_settled_one():
    made = appended(entries(SEVERE), "02:10")
    for flag in computed(made, "02:10"):
        if flag.group == "acidosis" and flag.marker != "ph_below_severe":
            made.append(recorded(word_on(flag, "settled", "EF", at("02:20"), "E", "known"), len(made) + 1,
                                 flag.marker, at("02:20")))  # fmt: skip
    shown = [f for f in computed(made, "02:21") if f.group == "acidosis" and f.strongest and f.ended_at is None]
    assert [f.marker for f in shown] == ["ph_below_severe"]


def test_no_longer_met_and_raised_again_are_transitions():
    made = appended(entries(SEVERE), "02:10")
    made = [*made, *later(made, "04:00 ph 7.30 paco2 66")]
    made = appended(made, "04:10")
    assert words(made, "ph_below_severe") == ["raised", "no longer met"]
    made = appended([*made, *later(made, "05:00 ph 7.22 paco2 80")], "05:10")
    assert words(made, "ph_below_severe") == ["raised", "no longer met", "raised"]
    ids = {json.loads(e.raw)["flag_id"] for e in made if e.channel == "ph_below_severe"}
    assert len(ids) == 2


def later(made: list[Entry], log: str) -> list[Entry]:
    """More of the log, recorded after what is there."""
    start = max(e.seq for e in made)
    return [replace(e, seq=start + i, id=f"{e.id}-{start}") for i, e in enumerate(entries(log), 1)]


def corrected(made: list[Entry], channel: str, clock: str, number: float | None, known: str) -> list[Entry]:
    """The ledger with a correction of one value (or its withdrawal), recorded at `known`."""
    wrong = next(e for e in made if e.channel == channel and e.at == at(clock) and e.action is Action.ASSERT)
    action = Action.WITHDRAW if number is None else Action.CORRECT
    new = replace(wrong, action=action, number=number, raw="" if number is None else str(number), replaces=wrong.id,
                  reason="misread")  # fmt: skip
    return [*made, replace(new, seq=max(e.seq for e in made) + 1, id=f"c-{channel}-{known}", recorded_at=at(known))]


@pytest.mark.parametrize("number", [7.31, None])
def test_a_correction_undoes_a_flag_and_it_does_not_vanish(number):
    made = corrected(appended(entries(SEVERE), "02:10"), "ph", "02:00", number, "02:30")
    gone = one(computed(made, "02:31"), "ph_below_severe")
    assert gone.undone_by_correction
    assert (gone.state, gone.since) == ("no longer met", at("02:00"))
    assert gone.evidence[0].values["value"] == 7.24
    made = appended(made, "02:31")
    assert words(made, "ph_below_severe") == ["raised", "undone"]
    assert appended(made, "02:40") == made


def test_a_flag_undone_in_error_comes_back_under_its_name():
    made = appended(corrected(appended(entries(SEVERE), "02:10"), "ph", "02:00", 7.31, "02:30"), "02:31")
    wrong = next(e for e in made if e.action is Action.CORRECT)
    back = replace(wrong, number=7.24, raw="7.24", replaces=wrong.id, seq=max(e.seq for e in made) + 1, id="back",
                   recorded_at=at("02:50"))  # fmt: skip
    made = appended([*made, back], "02:51")
    assert words(made, "ph_below_severe") == ["raised", "undone", "raised"]
    flag = one(computed(made, "02:52"), "ph_below_severe")
    assert (flag.state, flag.undone_by_correction) == ("raised", False)


def test_a_late_entry_that_moves_the_beginning_keeps_the_flag_and_who_saw_it():
    made = appended(entries(SEVERE), "02:10")
    flag = one(computed(made, "02:10"), "ph_below_severe")
    made.append(recorded(word_on(flag, "seen", "CD", at("02:15"), "E"), len(made) + 1, "seen", at("02:15")))
    made += [replace(e, recorded_at=at("02:30")) for e in later(made, "01:20 ph 7.23 paco2 76")]
    moved = one(computed(made, "02:31"), "ph_below_severe")
    assert (moved.flag_id, moved.since, moved.state) == (flag.flag_id, at("01:20"), "seen")
    assert words(appended(made, "02:31"), "ph_below_severe") == ["raised", "seen"]


def test_another_policy_ends_a_flag_without_calling_it_a_correction():
    made = appended(entries(SEVERE), "02:10")
    lower = msgspec.structs.replace(with_rule("ph_below_severe", limits={"ph": 7.2}), hash="another")
    gone = one(computed(made, "02:31", policy=lower), "ph_below_severe")
    assert (gone.state, gone.undone_by_correction) == ("no longer met", False)


def test_a_stale_flag_says_how_old_it_is():
    fresh, stale = (one(flags(SEVERE, c), "ph_below_severe") for c in ("08:00", "08:01"))
    assert "evidence.stale" not in [m.key for m in fresh.evidence]
    assert stale.evidence[-1].values["minutes"] == 361


def test_words_that_cannot_be_read_are_passed_over():
    made = entries(SEVERE)
    broken = replace(made[-1], channel="ph_below_severe", action=Action.FLAG, raw="{", words="raised", seq=99, id="x")
    assert history_of([broken]) == {}
    assert one(computed([*made, broken], "03:00"), "ph_below_severe").state == "raised"


def plain(found: tuple[FlagFigure, ...]) -> list[tuple[object, ...]]:
    """Flags without the names that the ledger gave them."""
    return sorted(
        (f.marker, f.tier, f.since, f.ended_at or 0, f.state, f.strongest, str(f.evidence))
        for f in found
        if not f.undone_by_correction
    )


@settings(max_examples=80, deadline=None)
@given(nights(), st.data())
def test_what_is_recorded_later_changes_no_flag_as_known_before(deeds: list[Deed], data) -> None:
    whole = ledger(deeds)
    moment = data.draw(st.sampled_from([e.recorded_at for e in whole]))
    head = max(e.seq for e in whole if e.recorded_at <= moment)
    for key in KEYS:
        known = build_episode(key, standing(whole, head))
        lived = build_episode(key, standing([e for e in whole if e.recorded_at <= moment]))
        assert evaluate(judged(known, moment, POLICY)) == evaluate(judged(lived, moment, POLICY))


@settings(max_examples=80, deadline=None)
@given(nights())
def test_late_corrected_and_withdrawn_entries_lead_to_the_state_of_a_record_right_from_the_start(deeds) -> None:
    whole = ledger(deeds)
    end = max(e.recorded_at for e in whole)
    for key in KEYS:
        counted = standing(whole)
        right = [
            replace(s.entry, action=Action.ASSERT, replaces="", reason="", seq=i, id=f"r{i}", recorded_at=s.entry.at)
            for i, s in enumerate(counted, 1)
        ]
        now = evaluate(judged(build_episode(key, counted), end, POLICY))
        straight = evaluate(judged(build_episode(key, standing(right)), end, POLICY))
        assert without_doubt(plain(now)) == without_doubt(plain(straight))


def without_doubt(rows: list[tuple[object, ...]]) -> list[tuple[object, ...]]:
    """Without the evidence: that a value was corrected or disputed is part of it, and is history."""
    return [row[:-1] for row in rows]


@settings(max_examples=40, deadline=None)
@given(nights(), st.data())
def test_transitions_are_written_once_and_bear_out_the_flags(deeds, data) -> None:
    whole = ledger(deeds)
    made: list[Entry] = []
    for count in sorted(data.draw(st.sets(st.integers(1, len(whole)), min_size=1, max_size=6)) | {len(whole)}):
        flags_taken = [e for e in made if e.action is Action.FLAG]
        made = [*whole[:count], *flags_taken]
        now = whole[count - 1].recorded_at
        found = computed(made, now, "E1")
        for new in transitions(found, flags_taken, "E1", POLICY.hash, now):
            made.append(recorded(new, 10_000 + len(made), f"t{len(made)}", now))
        again = computed(made, now, "E1")
        assert transitions(again, [e for e in made if e.action is Action.FLAG], "E1", POLICY.hash, now) == ()
        assert plain(again) == plain(found)
        history = history_of(e for e in made if e.action is Action.FLAG)
        lives = {name: h.life for name, h in history.items()}
        assert {f.flag_id for f in again if f.ended_at is None} == {k for k, v in lives.items() if v == "raised"}
