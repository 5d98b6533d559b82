"""What stands: corrections, withdrawals, moves, and what was known at a moment."""

from hypothesis import given
from hypothesis import strategies as st

from core.record.entries import Action, NewEntry, recorded
from core.record.knowledge import head_known_at, standing


def entry(seq, value=1.0, action=Action.ASSERT, replaces=0, at=None, episode="E", recorded_at=None):
    new = NewEntry(episode, "rr", seq if at is None else at, value, action=action, replaces=str(replaces or ""))
    return recorded(new, seq, str(seq), seq * 10 if recorded_at is None else recorded_at)


def numbers(entries, head=None):
    return [s.entry.number for s in standing(entries, head)]


def test_a_correction_takes_the_place_of_what_it_corrects():
    log = [entry(1, 20.0), entry(2, 22.0, Action.CORRECT, 1, at=1)]
    (only,) = standing(log)
    assert (only.entry.number, only.corrected, only.disputed, only.first) == (22.0, True, False, "1")
    assert numbers(log, head=1) == [20.0]


def test_a_withdrawn_entry_no_longer_stands_and_an_undo_brings_it_back():
    log = [entry(1, 20.0), entry(2, None, Action.WITHDRAW, 1)]
    assert numbers(log) == []
    undo = entry(3, 20.0, Action.CORRECT, 2, at=1)
    assert numbers([*log, undo]) == [20.0]


def test_two_corrections_of_one_entry_are_disputed_and_the_later_sequence_wins():
    log = [entry(1, 20.0), entry(2, 22.0, Action.CORRECT, 1), entry(3, 24.0, Action.CORRECT, 1)]
    (only,) = standing(log)
    assert (only.entry.number, only.disputed) == (24.0, True)


def test_a_correction_of_a_correction_is_no_dispute():
    log = [entry(1, 20.0), entry(2, 22.0, Action.CORRECT, 1), entry(3, 24.0, Action.CORRECT, 2)]
    (only,) = standing(log)
    assert (only.entry.number, only.disputed) == (24.0, False)


def test_a_moved_entry_belongs_to_its_new_episode():
    (only,) = standing([entry(1, 20.0), entry(2, 20.0, Action.MOVE, 1, episode="F")])
    assert only.entry.episode == "F"


def test_what_is_replaced_must_come_before():
    assert numbers([entry(1, 20.0, Action.CORRECT, 2), entry(2, 22.0)]) == [22.0]


def test_the_head_known_at_a_moment_is_the_last_recorded_by_it():
    log = [entry(1), entry(2, recorded_at=20), entry(3, recorded_at=20)]
    assert [head_known_at(log, t) for t in (9, 10, 19, 20, 99)] == [0, 1, 1, 3, 3]


ACTIONS = st.sampled_from([Action.ASSERT, Action.ASSERT, Action.CORRECT, Action.WITHDRAW, Action.MOVE])
HISTORIES = st.lists(st.tuples(ACTIONS, st.integers(1, 12), st.integers(0, 30), st.integers(0, 3)), max_size=12)


def history(rows):
    out, clock = [], 0
    for seq, (action, target, at, wait) in enumerate(rows, 1):
        clock += wait
        replaces = target % seq if action is not Action.ASSERT else 0
        value = None if action is Action.WITHDRAW else float(seq)
        out.append(entry(seq, value, action, replaces, at=at, recorded_at=clock))
    return out


@given(HISTORIES, st.integers(-1, 40))
def test_as_known_at_t_equals_a_store_that_never_saw_what_came_later(rows, known_at):
    log = history(rows)
    never_saw = [e for e in log if e.recorded_at <= known_at]
    assert standing(log, head_known_at(log, known_at)) == standing(never_saw)


@given(HISTORIES)
def test_each_chain_stands_once_at_most(rows):
    found = standing(history(rows))
    assert len({s.first for s in found}) == len(found)
    assert [s.entry.at for s in found] == sorted(s.entry.at for s in found)


@given(HISTORIES, st.randoms())
def test_the_order_in_which_entries_are_given_does_not_matter(rows, random):
    log = history(rows)
    shuffled = list(log)
    random.shuffle(shuffled)
    assert standing(shuffled) == standing(log)
