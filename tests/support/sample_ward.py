"""The figures of every episode of the sample night, at the moment that the demonstration pretends."""

from functools import cache
from tempfile import TemporaryDirectory

from app import demo
from app.operations import figures as operations
from core.judgement.shapes import EpisodeFigures
from storage.store import Store


@cache
def sample_ward() -> tuple[EpisodeFigures, ...]:
    """All of them, in order of concern; computed once in a run."""
    from pathlib import Path

    now = demo.demo_now()
    with TemporaryDirectory() as folder:
        path = demo.make_demo_store(Path(folder))
        with Store.open(path, read_only=True) as store:
            return operations.of_ward(store, "", now, operations.WardRequest(now, everything=True)).value.figures
