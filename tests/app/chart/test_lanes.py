"""The ward view: picking by mouse, choosing by keys, words for both."""

from dataclasses import replace

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QImage, QPainter

from app.chart.lane_layout import geometry_of, place_items
from app.chart.lane_painter import LanePainter
from app.chart.lanes import WardLanes
from app.chart.marks import cut_between, fitted
from app.chart.shapes import LaneItem, LaneKind
from app.look.theme import DARK, LIGHT
from tests.app.chart.conftest import at


@pytest.fixture
def ward(qtbot, lanes_spec):
    view = WardLanes(LIGHT)
    qtbot.addWidget(view)
    view.set_spec(lanes_spec)
    view.resize(1200, 600)
    view.show()
    qtbot.waitExposed(view)
    return view


def point_of(ward, item, lane=0):
    g = ward._geometry
    placed = next(p for p in ward._placed[lane] if p.item is item)
    middle = placed.box.center()
    return QPoint(round(middle.x()), round(g.head + g.top(lane) + middle.y()))


@pytest.mark.parametrize("kind", LaneKind)
def test_a_click_picks_the_thing_under_it(ward, qtbot, lanes_spec, kind):
    item = next(i for i in lanes_spec.lanes[0].items if i.kind is kind)
    with qtbot.waitSignal(ward.selection_changed) as caught:
        qtbot.mouseClick(ward.viewport(), Qt.MouseButton.LeftButton, pos=point_of(ward, item))
    assert caught.args == ["e1", item]
    assert ward.accessibleDescription() == f"Bed 1: {item.sentence}"


def test_hovering_tells_in_words(ward, qtbot, lanes_spec):
    heard = []
    ward.hovered.connect(heard.append)
    qtbot.mouseMove(ward.viewport(), point_of(ward, lanes_spec.lanes[0].items[0]))
    qtbot.waitUntil(lambda: heard == ["gas at 30"])
    qtbot.mouseMove(ward.viewport(), QPoint(20, 60))
    qtbot.waitUntil(lambda: heard == ["gas at 30", "Bed 1 in words"])


def test_keys_choose_lanes_and_items_in_order_of_time(ward, qtbot):
    sentences = []

    def heard(_key, item):
        sentences.append(None if item is None else item.sentence)

    ward.selection_changed.connect(heard)
    for _ in range(3):
        qtbot.keyClick(ward, Qt.Key.Key_Right)
    qtbot.keyClick(ward, Qt.Key.Key_End)
    qtbot.keyClick(ward, Qt.Key.Key_Left)
    qtbot.keyClick(ward, Qt.Key.Key_Home)
    qtbot.keyClick(ward, Qt.Key.Key_Escape)
    assert sentences == ["gas at 30", "IPAP 16", "pH below 7.25", "gas due", "gas at 300", "gas at 30", None]
    qtbot.keyClick(ward, Qt.Key.Key_Down)
    assert ward.selected_key == "e2"
    qtbot.keyClick(ward, Qt.Key.Key_Right)
    assert ward.selected_item is None  # a lane with nothing in it


def test_enter_opens_the_lane_or_the_item(ward, qtbot):
    with qtbot.waitSignal(ward.lane_activated) as caught:
        qtbot.keyClick(ward, Qt.Key.Key_Return)
    assert caught.args == ["e1"]
    qtbot.keyClick(ward, Qt.Key.Key_Right)
    with qtbot.waitSignal(ward.item_activated) as caught:
        qtbot.keyClick(ward, Qt.Key.Key_Return)
    assert caught.args[1].sentence == "gas at 30"


def test_a_chosen_lane_far_down_is_brought_into_view(ward):
    ward.select("e25")
    g, bar = ward._geometry, ward.verticalScrollBar()
    top = g.top(24) - bar.value()
    assert 0 <= top <= ward.viewport().height() - g.head - g.lane


def test_what_is_chosen_stays_chosen_when_lanes_are_sorted_anew(ward, lanes_spec):
    item = lanes_spec.lanes[0].items[1]
    ward.select("e1", item)
    ward.set_spec(replace(lanes_spec, lanes=lanes_spec.lanes[::-1]))
    assert (ward.selected_key, ward.selected_item) == ("e1", item)
    ward.set_spec(replace(lanes_spec, lanes=lanes_spec.lanes[1:]))
    assert (ward.selected_key, ward.selected_item) == ("", None)  # never another than was chosen
    assert ward.sentence_of_selection() == ""


def test_an_unknown_lane_is_refused(ward):
    with pytest.raises(KeyError, match="nowhere"):
        ward.select("nowhere")


def test_an_empty_ward_says_so(ward, lanes_spec, qtbot):
    ward.set_spec(replace(lanes_spec, lanes=(), empty_word="No episode is open"))
    worded = ward.grab().toImage()
    ward.set_spec(replace(lanes_spec, lanes=()))
    assert ward.grab().toImage() != worded
    qtbot.keyClick(ward, Qt.Key.Key_Down)
    assert ward.sentence_of_selection() == ""


def test_gases_of_one_minute_do_not_hide_each_other(ward, lanes_spec):
    first = lanes_spec.lanes[0]
    twin = replace(first.items[0], at=at(31), sentence="twin")
    ward.set_spec(replace(lanes_spec, lanes=(replace(first, items=(first.items[0], twin)),)))
    one, other = ward._placed[0]
    assert abs(one.row - other.row) >= 14


def test_each_part_of_a_lane_changes_the_picture(ward, lanes_spec):
    lane = lanes_spec.lanes[0]
    pictures = [ward.grab().toImage()]
    for change in ({"due_late": True}, {"first_word": "See first"}, {"closed": True}, {"flag_word": "low pH"}):
        ward.set_spec(replace(lanes_spec, lanes=(replace(lane, **change), *lanes_spec.lanes[1:])))
        pictures.append(ward.grab().toImage())
    ward.set_spec(lanes_spec)
    ward.set_theme(DARK)
    pictures.append(ward.grab().toImage())
    assert all(a != b for n, a in enumerate(pictures) for b in pictures[:n])


@pytest.mark.parametrize("scale", [1.0, 1.5, 2.0])
@pytest.mark.parametrize("width", [1280, 1920])
def test_the_clock_keeps_room_at_any_text_size(qtbot, lanes_spec, scale, width):
    view = WardLanes(LIGHT.scaled(scale))
    qtbot.addWidget(view)
    view.set_spec(lanes_spec)
    view.resize(width, 800)
    view.show()
    assert view._geometry.clock >= 0.35 * width


class Heard:
    """Stands for a painter that writes down which words were drawn, where they begin and end."""

    def __init__(self, painter_class, monkeypatch):
        self.words = []
        drawn = painter_class._words

        def words(made, painter, word, left, top, ink, taken):
            before = len(taken)
            drawn(made, painter, word, left, top, ink, taken)
            self.words += [(word, *taken[-1])] if len(taken) > before else []

        monkeypatch.setattr(painter_class, "_words", words)


def settings_of(spec, *items):
    made = tuple(LaneItem(LaneKind.SETTING, at(m), f"{word} at {m}", word=word) for m, word in items)
    return replace(spec, lanes=(replace(spec.lanes[0], items=made, support=()),))


def test_the_newest_setting_wins_where_words_collide(qtbot, ward, lanes_spec, monkeypatch):
    heard = Heard(LanePainter, monkeypatch)
    ward.set_spec(settings_of(replace(lanes_spec, now=None), (100, "20/5 30 %"), (104, "24/5 35 %")))
    ward.grab()
    assert [word for word, *_ in heard.words] == ["24/5 35 %"]


def test_words_of_a_setting_never_stand_right_of_the_now_line(qtbot, ward, lanes_spec, monkeypatch):
    heard = Heard(LanePainter, monkeypatch)
    ward.set_spec(settings_of(replace(lanes_spec, now=at(200)), (20, "12/5"), (198, "24/10 25 %")))
    ward.grab()
    assert {word for word, *_ in heard.words} == {"12/5", "24/10 25 %"}
    assert all(right < ward._geometry.x(at(200)) for *_, right in heard.words)


def test_settings_from_before_the_mask_came_off_are_dimmed(qtbot, ward, lanes_spec):
    spec = settings_of(lanes_spec, (100, "20/5 30 %"))
    ward.set_spec(spec)
    before = ward.grab().toImage()
    ward.set_spec(replace(spec, lanes=(replace(spec.lanes[0], off_mask=True),)))
    assert ward.grab().toImage() != before


def crowded(lanes_spec, count=12):
    lane = lanes_spec.lanes[0]
    return replace(lanes_spec, lanes=tuple(replace(lane, key=f"e{n}", title=f"Bed {n}") for n in range(count)))


@pytest.mark.parametrize("scale", [1.0, 1.25])
def test_twelve_lanes_stand_on_the_screen_at_once_and_nothing_in_them_collides(lanes_spec, scale):
    theme = LIGHT.scaled(scale)
    g = geometry_of(crowded(lanes_spec), theme, 1248 * scale, 550 * scale)
    assert g.head + g.top(12) - g.gap <= 550 * scale
    assert g.close
    top, bottom = g.middle - g.mark / 2, g.middle + g.mark / 2
    assert g.flag_top + g.flag <= top + 1  # a pennant ends where a gas begins
    assert g.words >= bottom - theme.px(1)  # letters begin below the top of their line
    assert 2 * g.line <= g.lane


def test_a_ward_that_must_be_scrolled_shows_as_many_lanes_as_can_be_read_and_a_small_one_has_its_room(lanes_spec):
    long = geometry_of(crowded(lanes_spec, 20), LIGHT, 1248, 550)
    assert long.lane == 40
    few = geometry_of(crowded(lanes_spec, 4), LIGHT, 1248, 550)
    assert few.lane == 92


def test_the_chosen_lane_is_brought_into_view_when_lanes_are_sorted_anew(ward, lanes_spec):
    many = crowded(lanes_spec, 30)
    ward.set_spec(many)
    ward.select("e2")
    ward.set_spec(replace(many, lanes=many.lanes[::-1]))
    assert ward.verticalScrollBar().value() == 0  # a refresh leaves the person where they are
    ward.show_chosen()
    g, top = ward._geometry, ward.verticalScrollBar().value()
    assert top <= g.top(27) <= top + ward.viewport().height() - g.head


def test_long_words_under_a_name_do_not_make_lanes_twice_as_high(lanes_spec):
    """Eight lanes stand at 1280 x 800 though one of them has been silent for long and says so."""
    lane = replace(lanes_spec.lanes[0], state_word="P/F 236 mmHg; acidotic, pH 7.31", due_word="x" * 60, items=())
    spec = replace(lanes_spec, lanes=(replace(lane, subtitle="nothing logged for 15 h; " + "x" * 60), *[lane] * 7))
    g = geometry_of(spec, LIGHT, 1248, 550)
    assert not g.folded
    assert g.head + g.top(8) <= 550 + g.gap


def test_words_of_settings_keep_their_contrast_while_the_mask_is_off(qtbot, lanes_spec):
    """They stand in brackets instead of being faint."""
    lane = replace(lanes_spec.lanes[0], off_mask=True)
    spec = replace(lanes_spec, lanes=(lane,))
    g = geometry_of(spec, LIGHT, 1248, 90)
    image = QImage(1248, round(g.lane), QImage.Format.Format_RGB32)
    image.fill(0xFFFFFF)
    drawn = LanePainter(spec, LIGHT, g, [])
    placed = [p for p in place_items(lane, g, LIGHT) if p.item.kind is LaneKind.SETTING]
    assert placed
    painter = QPainter(image)
    drawn._draw_settings(painter, lane, placed, [])
    painter.end()
    foot = image.copy(0, round(g.words), 1248, round(g.lane - g.words))
    shades = [foot.pixelColor(x, y).lightness() for x in range(foot.width()) for y in range(foot.height())]
    assert min(shades) <= QColor(LIGHT.colours.ink_quiet).lightness() + 25


@pytest.mark.parametrize("width", range(110, 230, 3))
def test_no_number_is_cut_in_the_middle(qtbot, width):
    """Half of a value would be another value."""
    image = QImage(10, 10, QImage.Format.Format_RGB32)
    painter = QPainter(image)
    painter.setFont(LIGHT.font(LIGHT.type.caption, bold=True))
    whole = "P/F 236 mmHg; acidotic, pH 7.31"
    told = fitted(painter, whole, width)
    painter.end()
    kept = told.removesuffix("\N{HORIZONTAL ELLIPSIS}").rstrip()
    assert whole.startswith(kept)
    words = whole.replace(";", "").replace(",", "").split()
    assert all(part.strip(";,") in words for part in kept.split() if any(x.isdigit() for x in part))


def test_with_large_text_words_shrink_before_they_are_cut(qtbot, lanes_spec):
    theme = LIGHT.scaled(2.0)
    g = geometry_of(lanes_spec, theme, 1236, 500)
    drawn = LanePainter(lanes_spec, theme, g, [])
    usual = theme.px(theme.type.caption)
    assert drawn._font_for("short", 400, bold=True).pixelSize() == usual
    smaller = drawn._font_for("Repeat blood gas overdue 11 h 35 min", 440, bold=True)
    assert theme.type.emphasis <= smaller.pixelSize() < usual
    assert QFontMetricsF(smaller).horizontalAdvance("Repeat blood gas overdue 11 h 35 min") <= 440
    plain = LanePainter(lanes_spec, LIGHT, geometry_of(lanes_spec, LIGHT, 1236, 500), [])
    assert plain._font_for("x" * 200, 100, bold=True).pixelSize() == LIGHT.type.caption


UNKNOWN_STATE = (
    "P/F 218 mmHg at 23:20; state not known, last gas off support",
    "P/F 218 mmHg at 23:20; off support: state not known",
    "P/F 218 mmHg; off support: pH not known",
)


@pytest.mark.parametrize("scale", [1.0, 1.25, 1.5])
@pytest.mark.parametrize("width", [1248, 1334, 1888])
def test_a_state_is_never_blank_and_never_cut(qtbot, lanes_spec, width, scale):
    theme = LIGHT.scaled(scale)
    lane = replace(
        lanes_spec.lanes[0], state_word=UNKNOWN_STATE[0], state_shorter=UNKNOWN_STATE[1:],
        due_word="Reassessment overdue 1 h 01 min", flag_word="Gas overdue*; Acidosis off support* +1",
    )  # fmt: skip
    spec = replace(lanes_spec, lanes=(lane,))
    g = geometry_of(spec, theme, width, 550)
    painting = LanePainter(spec, theme, g, [])
    room = g.state - theme.px(16) - theme.px(22)
    form = painting._state_word(lane, room)
    assert form in UNKNOWN_STATE
    assert QFontMetricsF(painting._font_for(form, room, bold=True)).horizontalAdvance(form) <= room


def test_what_has_no_room_is_cut_between_its_parts_and_never_left_out(qtbot):
    image = QImage(10, 10, QImage.Format.Format_RGB32)
    painter = QPainter(image)
    painter.setFont(LIGHT.font(LIGHT.type.caption, bold=True))
    whole = "P/F 218 mmHg at 23:20; state not known, last gas off support"
    told = {cut_between(painter, whole, width) for width in range(30, 500)}
    painter.end()
    assert {whole, "P/F 218 mmHg at 23:20; state not known \N{HORIZONTAL ELLIPSIS}",
            "P/F 218 mmHg at 23:20 \N{HORIZONTAL ELLIPSIS}"} <= told  # fmt: skip
    assert "" not in told
    assert not any(t.startswith("P/F 21\N{HORIZONTAL ELLIPSIS}") for t in told)
