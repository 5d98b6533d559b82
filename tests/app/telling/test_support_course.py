"""The course of support: stretches of unchanged settings, what changed from what, breaks, nothing later."""

from app.telling.support_course import course_of
from tests.support.invented_ward import NOW, at, failing, on_cpap, record_of


def test_stretches_follow_each_other_and_name_what_changed():
    course = course_of(failing().record, NOW)
    starts = [s.start for s in course.stretches]
    assert starts == sorted(starts)
    assert all(a.end == b.start for a, b in zip(course.stretches, course.stretches[1:], strict=False))
    assert course.stretches[1].changed == {"ipap": 12.0}
    assert dict(course.stretches[2].changed) == {"ipap": 16.0, "epap": 5.0, "fio2": 0.28}
    assert course.stretches[-1].end == NOW


def test_nothing_later_than_the_moment():
    course = course_of(failing().record, at("23:00"))
    assert course.stretches[-1].settings.ipap == 16
    assert course.stretches[-1].end == at("23:00")
    assert course.breaks == ()


def test_the_same_settings_again_are_no_change():
    record = record_of("E", [("20:00", {"mode": "CPAP", "cpap": "8"}), ("21:00", {"cpap": "8"})])
    assert len(course_of(record, NOW).stretches) == 1


def test_breaks_and_the_end_of_support():
    assert [(b.start, b.end) for b in course_of(failing().record, NOW).breaks] == [(at("01:10"), at("01:35"))]
    record = record_of("E", [("20:00", {"mode": "CPAP", "cpap": "8"}), ("22:00", {"stopped": ""})])
    assert course_of(record, NOW).stretches[-1].end == at("22:00")


def test_an_empty_record_has_no_course():
    assert course_of(record_of("E", []), NOW).stretches == ()
    assert course_of(on_cpap().record, at("03:00")).stretches == ()
