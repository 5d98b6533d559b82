"""A backup's key file is put back beside a store only where it opens it; the one that was there is set aside."""

import pytest

from app.operations.key_file import PUT_BACK, PutBack, put_back
from storage.errors import StoreError
from storage.keys import Cost, envelope_path
from storage.store import Store
from tests.support.open_window import NOW

SECRET, OTHER, CHEAP = "four quiet boats tonight", "five other boats tomorrow", Cost(64, 1, 1)


@pytest.fixture
def path(tmp_path):
    with Store.create(tmp_path / "ward.luffmark", now=NOW, passphrase=SECRET, cost=CHEAP) as store:
        store.backup(tmp_path / "copy.luff")
    return tmp_path / "ward.luffmark"


def test_an_altered_key_file_is_replaced_and_kept_aside(path):
    envelope = envelope_path(path)
    altered = envelope.read_text().replace('"passes": 1', '"passes": 2', 1)
    envelope.write_text(altered)
    with pytest.raises(StoreError, match=r"key.envelope_altered"):
        Store.open(path, passphrase=SECRET)
    aside = put_back(None, "AB", NOW, PutBack(path.with_name("copy.luff"), path, SECRET)).value
    assert aside.read_text() == altered
    with Store.open(path, passphrase=SECRET) as store:
        assert [(e.person, e.detail) for e in store.person_events((PUT_BACK,))] == [("AB", "copy.luff")]
        assert store.verify() == ()


def test_a_lost_key_file_comes_from_the_key_file_itself_too(path):
    envelope_path(path).unlink()
    copy = envelope_path(path.with_name("copy.luff"))
    aside = put_back(None, "AB", NOW, PutBack(copy, path, SECRET)).value
    assert not aside.exists()
    Store.open(path, passphrase=SECRET).close()


def test_it_opens_with_the_passphrase_of_its_time(path):
    with Store.open(path, passphrase=SECRET) as store:
        store.change_passphrase(SECRET, OTHER, CHEAP)
    envelope_path(path).write_text("{}")
    request = PutBack(path.with_name("copy.luff"), path, OTHER)
    with pytest.raises(StoreError, match=r"key.wrong_passphrase"):
        put_back(None, "AB", NOW, request)
    assert envelope_path(path).read_text() == "{}"
    put_back(None, "AB", NOW, PutBack(path.with_name("copy.luff"), path, SECRET))
    Store.open(path, passphrase=SECRET).close()


def test_the_key_of_another_store_is_not_put_there(path, tmp_path):
    Store.create(tmp_path / "other.luffmark", now=NOW, passphrase=SECRET, cost=CHEAP).close()
    before = envelope_path(path).read_text()
    with pytest.raises(StoreError, match=r"key.of_another_store"):
        put_back(None, "AB", NOW, PutBack(tmp_path / "other.luffmark", path, SECRET))
    assert envelope_path(path).read_text() == before
    assert not list(tmp_path.glob("*.set-aside"))


def test_a_store_that_is_not_there_is_said(path):
    with pytest.raises(StoreError, match=r"store.missing"):
        put_back(None, "AB", NOW, PutBack(path.with_name("copy.luff"), path.with_name("gone.luffmark"), SECRET))
