"""What is selected is what is written; nothing of a person's words, names or dates leaves de-identified."""

import csv
from collections.abc import Iterator
from itertools import count
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st

from core.record.channels import CHANNELS, Kind
from core.record.entries import NewEntry
from core.record.instant import DAY, HOUR, MINUTE, parse
from core.record.message import RecordError
from core.record.samples import DeviceSamples
from storage.errors import StoreError
from storage.export import data_dictionary
from storage.export.deidentified import OLDEST, write_deidentified
from storage.export.selection import Selection, write_dictionary, write_selection
from storage.intake.batch import take_in
from storage.intake.log_csv import read_log_csv
from storage.store import Store

AT = parse("2026-03-28T00:10:00+00:00")
_names = count(1)
ALL = Selection()


@pytest.fixture
def ward(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "ward.luff", now=AT - HOUR) as store:
        t = AT + np.arange(30, dtype=np.int64) * MINUTE
        entries = [
            NewEntry("N4-07", "label", AT, words="Bed 7"), NewEntry("N4-07", "age", AT, number=93.0),
            NewEntry("N4-07", "decided_at", AT, number=float(AT - 20 * MINUTE)),
            NewEntry("N4-07", "ph", AT, number=7.25),
            NewEntry("N4-07", "note", AT + 5 * MINUTE, words="=HYPERLINK(1)", by="KL", note="spoke to the daughter"),
            NewEntry("N4-07", "ph", AT + HOUR, number=7.31), NewEntry("N4-08", "rr", AT, number=28.0),
            NewEntry("N4-07", "interface", AT, words="one made at home"),
        ]  # fmt: skip
        store.append(entries, by="KL", operation="entry.log", now=AT + 2 * HOUR,
                     samples=[DeviceSamples("N4-07", "leak", "device", t, np.full(30, 24.5), 1)])  # fmt: skip
        yield store


def rows(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def test_episodes_channels_and_span_are_kept_to(ward: Store, tmp_path: Path) -> None:
    wanted = Selection(("N4-07",), frozenset({"ph", "leak"}), AT + MINUTE, AT + HOUR)
    assert write_selection(ward, tmp_path / "a.csv", wanted) == 1 + 29
    found = rows(tmp_path / "a.csv")
    assert {r["channel"] for r in found} == {"ph", "leak"}
    assert [r["value"] for r in found if r["channel"] == "ph"] == ["7.31"]
    assert found[0]["at"] == "2026-03-28T01:10:00+00:00"


def test_facts_of_the_profile_come_with_a_span(ward: Store, tmp_path: Path) -> None:
    write_selection(ward, tmp_path / "a.csv", Selection(start=AT + 30 * MINUTE))
    assert {r["channel"] for r in rows(tmp_path / "a.csv")} == {"label", "age", "decided_at", "ph"}


def test_a_formula_is_guarded_and_the_selection_can_be_taken_in_again(ward: Store, tmp_path: Path) -> None:
    write_selection(ward, tmp_path / "a.csv", ALL)
    assert "'=HYPERLINK(1)" in [r["value"] for r in rows(tmp_path / "a.csv")]
    with Store.create(tmp_path / "b.luff", now=AT, imported=True) as other:
        intake = read_log_csv(tmp_path / "a.csv", now=AT + 3 * HOUR, existing=other)
        assert not intake.refusals
        take_in(other, intake, by="KL", now=AT + 3 * HOUR)
        assert other.episode("N4-07").text("note").v == ("=HYPERLINK(1)",)


def test_an_unknown_channel_and_an_existing_file_are_refused(ward: Store, tmp_path: Path) -> None:
    with pytest.raises(RecordError):
        write_selection(ward, tmp_path / "a.csv", Selection(channels=frozenset({"nonsense"})))
    (tmp_path / "there.csv").write_text("mine")
    with pytest.raises(StoreError):
        write_deidentified(ward, tmp_path / "there.csv", ALL)
    assert (tmp_path / "there.csv").read_text() == "mine"


def test_the_dictionary_names_every_channel(tmp_path: Path) -> None:
    assert write_dictionary(tmp_path / "d.csv") == len(CHANNELS)
    assert [r["channel"] for r in rows(tmp_path / "d.csv")] == list(CHANNELS)
    write_dictionary(tmp_path / "e.csv", ["ph"])
    (only,) = rows(tmp_path / "e.csv")
    assert (only["channel"], only["unit"], only["hard_low"]) == ("ph", "pH", "6.5")
    assert len(data_dictionary.COLUMNS) == len(only)


def test_what_is_left_out_and_what_remains_is_stated(ward: Store, tmp_path: Path) -> None:
    told = write_deidentified(ward, tmp_path / "d.csv", ALL)
    assert (told.episodes, told.rows) == (2, 38 - 2)
    assert told.removed == {"age (90 and more)": 1, "interface (own words)": 1, "label": 1,
                            "note (words)": 1, "remark beside a value": 1}  # fmt: skip
    assert told.remains == {"age": 1, "decided_at": 1, "leak": 30, "note": 1, "ph": 2, "rr": 1}
    text = (tmp_path / "d.csv").read_text("utf-8")
    for gone in ("N4-07", "Bed 7", "HYPERLINK", "daughter", "KL", "2026-03", "home"):
        assert gone not in text
    found = rows(tmp_path / "d.csv")
    assert next(r["value"] for r in found if r["channel"] == "age") == f"{OLDEST:.0f}"
    first, second = (parse(r["at"]) for r in found if r["channel"] == "ph")
    assert second - first == HOUR
    decided = parse(next(r["value"] for r in found if r["channel"] == "decided_at"))
    assert first - decided == 20 * MINUTE


def test_no_two_exports_and_no_two_episodes_are_moved_alike(ward: Store, tmp_path: Path) -> None:
    for name in ("a", "b"):
        write_deidentified(ward, tmp_path / f"{name}.csv", ALL)
    starts = [{r["episode"]: parse(r["at"]) for r in rows(tmp_path / f"{n}.csv")} for n in ("a", "b")]
    moments = [at for s in starts for at in s.values()]
    assert len(set(moments)) == 4
    assert all(abs(at - AT) > 365 * DAY for at in moments)


_WORD = st.text(st.characters(categories=("Lu", "Ll", "Nd", "Zs", "Po", "So")), min_size=5, max_size=30).filter(
    lambda t: t.strip() == t and len(t.strip()) >= 5
)
_TYPED = [c.key for c in CHANNELS.values() if c.kind in (Kind.TEXT, Kind.MARK)]
_OPEN = [c.key for c in CHANNELS.values() if c.open_choice]
_FIXED = {
    "episode",
    "at",
    "channel",
    "value",
    "unit",
    *CHANNELS,
    *(w for c in CHANNELS.values() for w in c.choices),
}


@settings(max_examples=20, deadline=None, suppress_health_check=list(HealthCheck), phases=[Phase.generate])
@given(st.lists(st.tuples(st.sampled_from([*_TYPED, *_OPEN]), _WORD, _WORD, _WORD), min_size=1, max_size=12))
def test_no_label_no_free_text_and_no_name_is_in_the_file(tmp_path: Path, typed) -> None:
    folder = tmp_path / str(next(_names))
    folder.mkdir()
    with Store.create(folder / "w.luff", now=AT) as store:
        store.append([NewEntry("E1", "rr", AT, number=20.0)], by="AB", operation="entry.log", now=AT)
        kept: list[str] = []
        for channel, words, by, note in typed:
            new = NewEntry("E1", channel, AT, words=words, raw=words, by=by, note=note, reason=note)
            try:
                store.append([new], by=by, operation="entry.log", now=AT)
            except RecordError:
                continue
            kept += [words, by, note]
        write_deidentified(store, folder / "d.csv", ALL)
    text = (folder / "d.csv").read_text("utf-8")
    cells = {cell for row in csv.reader(text.splitlines()) for cell in row}
    kept = [k for k in kept if k not in _FIXED]  # a word of the format itself tells nothing of a patient
    assert not [k for k in kept if k in cells]
    assert not [k for k in kept if k in text and not any(k in fixed for fixed in _FIXED)]
