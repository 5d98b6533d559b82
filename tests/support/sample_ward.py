"""The sample night, and the figures of all its episodes at the moment that the demonstration pretends."""

from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

from app import demo
from app.operations import figures as operations
from core.judgement.shapes import EpisodeFigures
from storage.store import Store


def sample_night(folder: Path) -> Path:
    """A store of the sample night in a folder: made once in a run, and copied."""
    path = folder / demo.STORE_NAME
    path.touch(mode=0o600, exist_ok=False)
    path.write_bytes(_made())
    return path


@cache
def _made() -> bytes:
    with TemporaryDirectory() as folder:
        path = demo.make_demo_store(Path(folder))
        assert list(path.parent.iterdir()) == [path], "a store that is closed is one file"
        return path.read_bytes()


@cache
def sample_ward() -> tuple[EpisodeFigures, ...]:
    """All of them, in order of concern; computed once in a run."""
    now = demo.demo_now()
    with TemporaryDirectory() as folder, Store.open(sample_night(Path(folder)), read_only=True) as store:
        return operations.of_ward(store, "", now, operations.WardRequest(now, everything=True)).value.figures
