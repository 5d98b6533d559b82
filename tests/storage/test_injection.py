"""Texts that act as code elsewhere are texts here: in every place that takes one they come back as they went in."""

from __future__ import annotations

import csv
from collections.abc import Callable
from pathlib import Path

import pytest

from core.record.entries import Action, NewEntry
from core.record.message import RecordError
from storage import archive, people
from storage.draft_batch import SourceFacts
from storage.engine import raw_connection
from storage.export.log_csv import write_log_csv
from storage.intake.log_csv import read_log_csv
from storage.store import Store, StoreError
from tests.storage.conftest import NOW
from tests.support.injections import ALL, FORMULAS, MARK, PATHS, SQL


def shape(path: Path) -> list[tuple[object, ...]]:
    connection = raw_connection(path, None, mode="ro")
    try:
        return connection.execute("SELECT type, name, sql FROM sqlite_master ORDER BY name").fetchall()
    finally:
        connection.close()


def test_every_text_of_a_store_is_only_a_text(make_store: Callable[..., Store], tmp_path: Path) -> None:
    store = make_store()
    before, files = shape(store.path), {p.name for p in tmp_path.iterdir()}
    for n, evil in enumerate(ALL):
        key = evil.strip() or evil
        source = SourceFacts(evil[:40], evil, facts={evil: evil})
        new = NewEntry(key, "note", NOW + n, words=evil, raw=evil, raw_unit=evil, zone=evil, by=evil, note=evil,
                       doubt=evil, source=evil)  # fmt: skip
        (first,) = store.append([new], by=evil, operation=evil, now=NOW + n, source=source).ids
        fixed = NewEntry(key, "note", NOW + n, words=evil + "!", action=Action.CORRECT, replaces=first, reason=evil)
        store.append([fixed], by="AB", operation="fix", now=NOW + n)
        store.put_layout(evil, evil)
        store.put_draft(evil, evil, NOW)
        document = store.put_document(evil[:40], evil, evil.encode("utf-8"), evil, NOW + n)
        store.record_event(evil[:60], person=evil, now=NOW + n, detail=evil)
        entries = store.entries(key)
        assert entries[-2].words == evil
        assert (entries[-2].note, entries[-2].by, entries[-2].raw) == (evil, evil, evil)
        assert (entries[-1].words, entries[-1].reason) == (evil + "!", evil)
        assert (store.layout(evil), store.draft(evil), store.document(document)) == (evil, evil, evil.encode("utf-8"))
        assert store.person_events((evil[:60],), person=evil)[-1].detail == evil
        assert store.sources()[-1].name == evil
        assert store.has_episode(key)
        assert key in store.episode_keys()
        assert (key, evil + "!") in store.texts_of("note")
    assert store.verify() == ()
    assert shape(store.path) == before
    assert {p.name for p in tmp_path.iterdir()} == files


def test_what_comes_back_from_a_file_is_what_was_exported(make_store: Callable[..., Store], tmp_path: Path) -> None:
    """Through CSV and back, with no cell that a spreadsheet would take for a formula."""
    store = make_store()
    kept = [e for e in ALL if "\x00" not in e]
    entries = [NewEntry(f"E{n}", "note", NOW + n, words=e, by="AB", note=e) for n, e in enumerate(kept)]
    store.append(entries, by="AB", operation="log", now=NOW)
    write_log_csv(store, tmp_path / "out.csv")
    with (tmp_path / "out.csv").open(newline="", encoding="utf-8") as file:
        cells = [cell for row in csv.reader(file) for cell in row]
    assert not [c for c in cells if c.startswith(("=", "+", "-", "@", "\t", "\r", "\uff1d", "\uff0b"))]
    intake = read_log_csv(tmp_path / "out.csv", now=NOW)
    assert not intake.refusals
    back = {d.entry.episode: d.entry for d in intake.entries}
    assert [back[f"E{n}"].words for n in range(len(kept))] == [e.strip() for e in kept]


@pytest.mark.parametrize("evil", [*PATHS, *SQL])
def test_a_store_a_backup_and_an_archive_lie_where_they_were_named(tmp_path: Path, evil: str) -> None:
    """A name that leads elsewhere is refused or led to as a path; nothing else is made."""
    folder = tmp_path / "deep" / "here"
    folder.mkdir(parents=True)
    name = evil.replace("/", "_").replace("~", "_")
    with Store.create(folder / name, now=NOW) as store:
        end = NewEntry(evil, "ended_at", NOW, float(NOW))
        store.append([end], by="AB", operation="log", now=NOW)
        store.backup(folder / f"b {name}")
        archive.write(store, [evil], folder / f"a {name}", by="AB", now=NOW)
        with pytest.raises((StoreError, RecordError)):
            people.add(store, evil, "2580", people.LEAD, by="AB", now=NOW)
    made = {p.relative_to(tmp_path).as_posix() for p in tmp_path.rglob("*") if p.is_file()}
    assert made == {f"deep/here/{prefix}{name}" for prefix in ("", "b ", "a ")}
    with Store.open(folder / f"a {name}") as old:
        assert old.episode_keys() == (evil,)
        assert old.verify() == ()


def test_the_corpus_is_what_it_says() -> None:
    assert len(ALL) == len(set(ALL)) >= 50
    assert all(MARK in evil for evil in ALL)
    assert len(FORMULAS) >= 10
