"""The hazard log names tests that are there: a control whose proof was deleted or renamed is no control."""

import pytest

from tests.support.hazards import COLUMNS, commands, hazards, is_there, named_tests


def test_every_hazard_is_whole():
    found = hazards()
    assert len(found) >= 20
    assert [h["no"] for h in found] == [f"H{n}" for n in range(1, len(found) + 1)]
    for hazard in found:
        assert all(hazard[c] for c in COLUMNS), hazard["no"]


@pytest.mark.parametrize("number", range(len(hazards())))
def test_every_hazard_is_proved_by_tests_that_are_there(number):
    hazard = hazards()[number]
    named = named_tests(hazard["proved by"])
    assert named, hazard["no"]
    for path, name in named:
        assert is_there(path, name), (hazard["no"], path, name)


def test_every_proof_names_a_command_that_finds_tests():
    found = commands()
    assert len(found) >= 8
    for path, words in found:
        assert is_there(path, words), (path, words)


def test_the_check_sees_a_test_that_is_gone():
    assert not is_there("tests/test_hazard_log.py", "test_that_never_was")
    assert not is_there("tests/none.py", "test_every_hazard_is_whole")
    assert is_there("tests/test_hazard_log.py", "test_every_hazard_is_whole")
