"""Order and filter of lanes."""

from dataclasses import replace

from app.telling.headline import headline
from app.ward.ordering import Order, Shown, first_to_see, natural, next_due, ordered, shown
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.judgement.shapes import Concern, DueFigure, EpisodeFigures, SupportFigure
from core.record.instant import HOUR
from core.record.message import Message
from tests.support.invented_ward import at, ward
from tests.support.log import episode, moment
from tests.support.night_check import END, night
from tests.support.sample_ward import sample_ward

FIGURES = [b.figures for b in ward()]


def labels(figures):
    return [f.label for f in figures]


def test_by_concern_the_failing_one_is_first_and_the_ended_last():
    order = labels(ordered(FIGURES, Order.CONCERN))
    assert order[0] == "Bed 7"
    assert order[-1] == "Bed 5"


def test_by_bed_counts_as_people_do_and_the_ended_stand_last():
    assert labels(ordered(FIGURES, Order.BED)) == [
        "Bed 2",
        "Bed 3",
        "Bed 7",
        "Bed 9",
        "Bed 10",
        "Bed 11",
        "Bed 12",
        "Bed 14",
        "Bed 5",
    ]


def test_by_due_the_overdue_is_first():
    assert labels(ordered(FIGURES, Order.DUE))[0] == "Bed 7"


def test_filters():
    assert "Bed 3" not in labels(shown(FIGURES, Shown.NOT_RESPONDING))
    assert "Bed 7" in labels(shown(FIGURES, Shown.NOT_RESPONDING))
    assert "Bed 5" not in labels(shown(FIGURES, Shown.NOT_RESPONDING))
    assert "Bed 12" not in labels(shown(FIGURES, Shown.DUE))
    assert labels(shown(FIGURES, Shown.ALL, "bay c")) == ["Bed 12"]
    assert labels(shown(FIGURES, Shown.ALL, "copd 7")) == ["Bed 7"]
    assert shown(FIGURES, Shown.ALL, "nobody") == ()


def test_a_relapse_after_support_was_stopped_stands_with_the_sick():
    log = "01:00 mode bpap-st ipap 16 epap 5\n02:00 ph 7.36 paco2 50\n03:00 stopped\n"
    now, policy = moment("04:00"), shipped_policy()
    quiet = replace(episode_figures(episode(log), now, policy), label="Bed 1")
    again = replace(episode_figures(episode(log + "03:50 ph 7.24 paco2 70"), now, policy), label="Bed 2")
    assert labels(ordered((quiet, again), Order.CONCERN)) == ["Bed 2", "Bed 1"]
    assert labels(shown((quiet, again), Shown.NOT_RESPONDING)) == ["Bed 2"]
    assert first_to_see((quiet, again)) == again


def test_a_relapse_is_not_responding_though_no_flag_is_open():
    f = next(f for f in sample_ward() if f.label == "Bed 5")
    assert shown([replace(f, flags=())], Shown.NOT_RESPONDING)
    better = next(f for f in sample_ward() if f.label == "Bed 3")
    assert not shown([replace(better, flags=())], Shown.NOT_RESPONDING)


def test_a_gas_due_is_told_before_care_that_is_later_overdue():
    because = Message("x")
    items = (DueFigure("skin_check", because, at("01:00"), at("02:00"), "overdue"),
             DueFigure("gas", because, at("04:00"), at("05:00"), "overdue"),
             DueFigure("reassessment", because, at("06:00"), at("07:00"), "open"))  # fmt: skip
    assert next_due(EpisodeFigures("E", at("05:30"), due=items)).what == "gas"
    review = DueFigure("oxygen_review", because, at("01:00"), at("02:00"), "overdue")
    assert next_due(EpisodeFigures("E", at("05:30"), due=(review, *items))).what == "gas"
    assert next_due(EpisodeFigures("E", at("05:30"), due=(items[0], items[2]))).what == "reassessment"
    assert next_due(EpisodeFigures("E", at("05:30"), due=items[2:])).what == "reassessment"
    assert next_due(EpisodeFigures("E", at("05:30"), due=(replace(items[0], state="done"),))) is None


def test_nobody_is_seen_first_where_all_is_quiet():
    quiet = EpisodeFigures("E", 0, concern=Concern(5))
    assert (
        first_to_see([quiet, EpisodeFigures("F", 0, support=SupportFigure(ended_at=1), concern=Concern(6))]) is None
    )
    assert first_to_see(FIGURES).label == "Bed 7"


def test_natural_order_is_total_for_odd_labels():
    assert sorted(["", "Bed", "7", "Bed 7a", "Bed 07"], key=natural)


def test_who_is_not_better_with_a_late_gas_stands_before_who_is_better_since_the_start():
    """Of the sample night: Bay A 4, pH 7.26 and not better, before Bed 2, pH 7.33 and better since the start."""
    order = labels(ordered(sample_ward(), Order.CONCERN))
    assert order.index("Bay A 4") < order.index("Bed 2")


def test_no_resolved_bed_without_a_concern_stands_above_an_acidotic_one():
    running = [f for f in ordered(sample_ward(), Order.CONCERN) if f.support.ended_at is None]
    quiet = [f for f in running if f.concern.rank >= 2]
    sick = [f.now.state in ("severe", "acidotic") for f in quiet]
    assert sick == sorted(sick, reverse=True)


def test_not_responding_or_flagged_is_just_that():
    """At each hour of the sample night: in by an open flag of concern, or by what the lane itself says; else out."""
    poor = ("worse", "mixed", "gain lost")
    seen = set()
    for hours in range(8):
        ward_then = [episode_figures(e, END - hours * HOUR, shipped_policy()) for e in night().values()]
        kept = {f.episode for f in shown(ward_then, Shown.NOT_RESPONDING)}
        for f in (f for f in ward_then if f.support.ended_at is None):
            flagged = any(g.ended_at is None and g.settled_at is None and g.tier != "remark" for g in f.flags)
            told = headline(f)
            unmoved = told is not None and "no clear change" in told.short  # by the state: a test of its own
            bad = told is not None and told.short.startswith(poor) and not unmoved
            if flagged or bad:
                assert f.episode in kept, (f.label, f.as_of)
            elif not unmoved:
                assert f.episode not in kept, (f.label, f.as_of, told)
            seen.add((flagged, bad, unmoved))
    assert {(True, False, False), (False, False, False)} <= seen


def test_no_clear_change_is_responding_only_where_an_acidosis_resolved():
    f = next(f for f in sample_ward() if f.label == "Emergency 3")
    assert headline(f).verdict.value == "no clear change"
    resolved = [replace(f, flags=(), now=replace(f.now, ever_acidotic=True))]
    assert not shown(resolved, Shown.NOT_RESPONDING)
    unchanged = replace(f, flags=(), responses=tuple(replace(r, state="acidotic") for r in f.responses))
    assert shown([unchanged], Shown.NOT_RESPONDING)
