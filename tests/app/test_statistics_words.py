"""What shift figures say: what is known and what is not in words, and a star at every unconfirmed threshold."""

from app.statistics.bars import flag_bars, known_words
from app.statistics.measures import Measure, as_text, flag_name, measures
from app.words import Reader
from core.figures.ward_statistics import FlagCount, Waits, WardStatistics, Windows

READER = Reader()


def test_what_is_not_known_is_said_in_words() -> None:
    assert known_words(Waits((30.0,), not_known=2)) == "1 known\n2 not known"
    assert known_words(Waits((30.0, 40.0))) == "2 known"
    assert Measure("G", "N", None).shown == "not known"
    assert Measure("G", "N", 31.5, "h").shown == "31 h 30 min"


def test_an_unconfirmed_marker_bears_its_star_and_the_text_says_what_it_means() -> None:
    assert flag_name("ph_below_severe", READER) == "pH below 7.25"
    assert flag_name("gcs_below_8", READER) == "GCS below 8*"
    flags = {"gcs_below_8": FlagCount("escalate", "consciousness", 1, seen=Waits(not_known=1))}
    found = WardStatistics(0, 3_600_000_000, {}, (30.0, 120.0), flags=flags)
    assert [b.name for b in flag_bars(found, READER)] == ["GCS below 8*"]
    (told,) = [m for m in measures(found, READER) if "GCS below 8*" in m.name]
    assert told.note == "not marked seen: 1"
    assert "to be confirmed locally" in as_text(found, READER).splitlines()[-1]


def test_windows_say_of_which_changes_they_are_beside_the_responses() -> None:
    found = WardStatistics(0, 3_600_000_000, {}, (30.0, 120.0), windows=Windows(answered=2, replaced=1))
    row = next(m for m in measures(found, Reader()) if m.name == "Response windows answered by a gas")
    assert row.note.startswith("windows that ended in the span; responses are of changes made in it")
    assert row.note.endswith("cut short by the next change or the end of support: 1")
