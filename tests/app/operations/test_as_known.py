"""Looking back through a real store: what it knew at T is what a store that never saw the rest knows."""

from dataclasses import replace
from itertools import count
from pathlib import Path
from uuid import UUID

import numpy as np
import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st

from app.operations import as_known, figures, handover, statistics
from app.operations.figures import WardRequest
from app.sheet.content import sheet_content
from app.sheet.shapes import EpisodePage
from app.words import Reader
from core.figures.json_form import to_json
from core.judgement.policy import policy_hash, shipped_policy, shipped_text
from core.record.entries import Action, NewEntry
from core.record.hindsight import Later
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import RecordError
from core.record.samples import DeviceSamples
from storage.draft_batch import DraftBatch, DraftEntry
from storage.store import Store
from tests.support.recorded_night import BEGIN, KEYS, Deed, nights

_names = count(1)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    return tmp_path


def filled(folder: Path, deeds: list[Deed], until: Instant) -> tuple[Store, list[Deed]]:
    """A store that took the deeds recorded by a moment; and those that no rule refused."""
    store = Store.create(folder / f"{next(_names)}.luff", now=BEGIN)
    ids: list[str] = []
    taken = []
    for number, deed in enumerate(deeds):
        if deed.recorded_at > until:
            break
        target = "" if deed.target is None or deed.target >= len(ids) else ids[deed.target]
        draft = DraftEntry(replace(deed.entry, replaces=target), str(UUID(int=number)))  # the same id in both stores
        try:
            store.append_drafts((DraftBatch("AB", "entry.log", (draft,)),), (deed.recorded_at,))
        except RecordError:
            ids.append("")
            continue
        ids.append(draft.id)
        taken.append(deed)
    return store, taken


def ward(store: Store, at: Instant, known: Instant | None) -> list[dict[str, object]]:
    answer = figures.of_ward(store, "AB", at, WardRequest(at, known, everything=True)).value
    return [to_json(f) for f in answer.figures]


def handed_over(store: Store, at: Instant, known: Instant | None) -> list[EpisodePage]:
    """The pages of a handover, but for the one line that tells what came later."""
    request = handover.HandoverRequest(at - 12 * HOUR, at + HOUR, known)
    content = sheet_content(handover.prepare(store, "AB", at, request).value, Reader())
    told = (tuple(line for line in p.to_check if not line.startswith("Not known then")) for p in content.episodes)
    return [replace(p, to_check=kept, chart=None) for p, kept in zip(content.episodes, told, strict=True)]


def counted(store: Store, at: Instant, known: Instant | None) -> object:
    return statistics.of_ward(store, "AB", at, statistics.StatisticsRequest(at - 12 * HOUR, at, known)).value


@settings(max_examples=15, deadline=None, suppress_health_check=list(HealthCheck), phases=[Phase.generate])
@given(deeds=nights(12), data=st.data())
def test_a_store_as_known_then_is_a_store_that_never_saw_the_rest(folder: Path, deeds: list[Deed], data) -> None:
    at = data.draw(st.sampled_from([d.recorded_at for d in deeds]))
    whole, _ = filled(folder, deeds, deeds[-1].recorded_at)
    early, taken = filled(folder, deeds, at)
    with whole, early:
        assert ward(whole, at, at) == ward(early, at, None)
        assert handed_over(whole, at, at) == handed_over(early, at, None)
        assert counted(whole, at, at) == counted(early, at, None)
        assert bool(taken) == bool(early.episode_keys())


def test_a_policy_and_device_samples_of_later_are_not_known(folder: Path) -> None:
    at = BEGIN + 60 * MINUTE
    t = BEGIN + np.arange(50, dtype=np.int64) * MINUTE
    entries = [NewEntry("E1", "mode", BEGIN, words="BPAP-ST"), NewEntry("E1", "ipap", BEGIN, number=16.0),
               NewEntry("E1", "epap", BEGIN, number=5.0)]  # fmt: skip
    stores = [Store.create(folder / f"{name}.luff", now=BEGIN) for name in ("whole", "early")]
    for store in stores:
        store.append(entries, by="AB", operation="entry.log", now=BEGIN)
    text = shipped_text().replace('name = "', 'name = "another ')
    stores[0].append((), by="AB", operation="intake", now=at + 1,
                     samples=[DeviceSamples("E1", "rr_total", "device", t, np.full(50, 33.0))])  # fmt: skip
    stores[0].put_policy(text, policy_hash(text), "AB", at + 2)
    with stores[0] as whole, stores[1] as early:
        assert ward(whole, at, at) == ward(early, at, None)
        assert ward(whole, at, at)[0]["policy"] == shipped_policy().hash
        assert ward(whole, at, None) != ward(early, at, None)


def test_moments_of_recording_lie_on_both_sides(folder: Path) -> None:
    with Store.create(folder / "m.luff", now=BEGIN) as store:
        for minutes in (10, 25):
            entry = NewEntry("E1", "rr", BEGIN, number=20.0)
            store.append([entry], by="AB", operation="entry.log", now=BEGIN + minutes * MINUTE)
        found = as_known.beside(store, "AB", 0, BEGIN + 20 * MINUTE).value
        assert (found.before, found.after) == (BEGIN + 10 * MINUTE, BEGIN + 25 * MINUTE)
        assert as_known.beside(store, "AB", 0, BEGIN + 25 * MINUTE).value.after is None


def test_what_came_later_is_told_by_episode(folder: Path) -> None:
    at = BEGIN + 60 * MINUTE
    with Store.create(folder / "l.luff", now=BEGIN) as store:
        first = store.append([NewEntry("E1", "ph", BEGIN, number=7.25), NewEntry("E2", "rr", BEGIN, number=20.0)],
                             by="AB", operation="entry.log", now=BEGIN)  # fmt: skip
        fixed = NewEntry("E1", "ph", BEGIN, number=7.29, action=Action.CORRECT, replaces=first.ids[0],
                         reason="misread")  # fmt: skip
        late = NewEntry("E1", "spo2", BEGIN + MINUTE, number=84.0)
        store.append([fixed, late], by="CD", operation="entry.correct", now=at + MINUTE)
        told = as_known.came_later(store, "AB", 0, as_known.LaterRequest(at)).value
        assert set(told) == {KEYS[0]}
        assert [(h.what, h.then and h.then.number, h.now and h.now.number) for h in told["E1"]] == [
            (Later.CORRECTED, 7.25, 7.29), (Later.RECORDED, None, 84.0)]  # fmt: skip
        with pytest.raises(RecordError):
            as_known.came_later(store, "AB", 0, as_known.LaterRequest(at, ("nobody",)))
