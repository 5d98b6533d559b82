"""Every message that the sample night gives, at many moments, becomes a whole sentence."""

import logging
from collections.abc import Iterator, Mapping
from dataclasses import fields, is_dataclass
from pathlib import Path
from typing import Any

import pytest

from app import demo
from app.figures.plain import episode_text
from app.operations import figures as operations
from app.words import Reader, sentence
from core.record.instant import HOUR
from core.record.message import Message
from storage.store import Store
from tests.support.sample_ward import sample_night

ZONE = demo.ZONE


@pytest.fixture(scope="module")
def wards(tmp_path_factory: pytest.TempPathFactory) -> list[operations.WardAnswer]:
    path: Path = sample_night(tmp_path_factory.mktemp("night"))
    now = demo.demo_now()
    with Store.open(path) as store:
        moments = [now - n * HOUR for n in range(0, 11, 2)]
        return [operations.of_ward(store, "", now, operations.WardRequest(m)).value for m in moments]


def messages(value: Any) -> Iterator[Message]:
    if isinstance(value, Message):
        yield value
    elif is_dataclass(value) and not isinstance(value, type):
        for f in fields(value):
            yield from messages(getattr(value, f.name))
    elif isinstance(value, Mapping):
        for inner in value.values():
            yield from messages(inner)
    elif isinstance(value, (tuple, list)):
        for inner in value:
            yield from messages(inner)


@pytest.mark.parametrize("unit", ["mmHg", "kPa"])
def test_every_message_of_the_night_is_a_whole_sentence(
    wards: list[operations.WardAnswer], unit: str, caplog: pytest.LogCaptureFixture
) -> None:
    reader, seen = Reader(ZONE, unit), set()
    with caplog.at_level(logging.WARNING, "luffmark"):
        for message in (m for w in wards for f in w.figures for m in messages(f)):
            text = sentence(message, reader)
            seen.add(message.key)
            assert "{" not in text, message
            assert "None" not in text, message
            assert "  " not in text, message
    assert not caplog.records, caplog.records[0].getMessage()
    assert len(seen) > 60


def test_the_plain_figures_of_the_night_have_no_hole(wards: list[operations.WardAnswer]) -> None:
    for ward in wards:
        for f in ward.figures:
            text = episode_text(f, Reader(ZONE))
            for hole in ("None", "nan", "{", "}", "[["):
                assert hole not in text, (f.label, hole)
            assert f.label in text


def test_the_ward_stands_in_order_of_concern_and_grows_with_the_night(wards: list[operations.WardAnswer]) -> None:
    counts = [len(w.episodes) for w in wards]
    assert counts == sorted(counts, reverse=True)
    assert counts[0] == 12
    for ward in wards:
        keys = [operations.concern_order(f) for f in ward.figures]
        assert keys == sorted(keys)
