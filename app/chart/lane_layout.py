"""Where everything of the ward view stands: one calculation for painting, picking and keys alike."""

from dataclasses import dataclass

from PySide6.QtCore import QRectF
from PySide6.QtGui import QFontMetricsF

from app.chart.shapes import Lane, LaneItem, LaneKind, LanesSpec
from app.look.theme import Theme

_LEAST_CLOCK = 420  # below this many pixels at 100 % the two columns at the right are laid one over the other
_LEAST_NAME = 200  # width at 100 % that names keep before the columns at the right are folded
_CLOSE = 40  # least height of a lane at 100 %: twelve stand on a screen of 1280 x 800 at once
_COMFORT = 54  # least height at which marks and words have their full size
_FOLDED = 84  # least height with the two columns one over the other


@dataclass(frozen=True, slots=True)
class Placed:
    """An item and its place, in the pixels of its lane (the lane's top left corner is the origin)."""

    item: LaneItem
    box: QRectF  # what the mouse hits
    x: float
    row: float  # middle of the item


@dataclass(frozen=True, slots=True)
class LaneGeometry:
    """Sizes of the ward view for one width, height and theme; all lanes are alike."""

    width: float
    head: float
    lane: float
    gap: float
    left: float
    state: float
    due: float
    folded: bool
    start: int
    end: int
    unit: float
    """A pixel at 100 %, in pixels."""

    @property
    def close(self) -> bool:
        """Lanes stand close: smaller marks and narrower lines, so that nothing lies over anything."""
        return self.lane < _COMFORT * self.unit

    @property
    def mark(self) -> float:
        """Diameter of a gas."""
        return (13 if self.close else 14) * self.unit

    @property
    def flag(self) -> float:
        """Height of a pennant; its top is at `flag_top`."""
        return (9.5 if self.close else 16) * self.unit

    @property
    def flag_top(self) -> float:
        """Where pennants begin, under the lane's top."""
        return (2.75 if self.close else 4) * self.unit  # clear of the frame of the lane in hand

    @property
    def words(self) -> float:
        """Top of the words in the lane's foot."""
        return self.lane - (14.5 if self.close else 19) * self.unit

    @property
    def line(self) -> float:
        """Height of a line of words at the lane's ends."""
        return (17 if self.close else 20) * self.unit

    @property
    def right(self) -> float:
        return self.state if self.folded else self.state + self.due

    @property
    def clock(self) -> float:
        return max(self.width - self.left - self.right, 1.0)

    def x(self, instant: int) -> float:
        """Column of an instant, in the pixels of the view."""
        return self.left + (instant - self.start) / (self.end - self.start) * self.clock

    def top(self, lane: int) -> float:
        """Top of a lane below the heading, before scrolling."""
        return lane * (self.lane + self.gap)

    @property
    def middle(self) -> float:
        return self.lane * (0.45 if self.close else 0.5)

    @property
    def thickest(self) -> float:
        return self.lane * 0.30


def geometry_of(spec: LanesSpec, theme: Theme, width: float, height: float) -> LaneGeometry:
    """Lanes share the height that is there, within what is still readable and not absurdly tall."""
    px = theme.px
    text = QFontMetricsF(theme.font(theme.type.body, bold=True))
    quiet = QFontMetricsF(theme.font(theme.type.caption))
    titles = [text.horizontalAdvance(lane.title) for lane in spec.lanes]
    subtitles = [quiet.horizontalAdvance(lane.subtitle) for lane in spec.lanes]
    names = max([*titles, px(96)]) + px(36)
    left = min(max([names, *(s + px(36) for s in subtitles)]), width * 0.24)
    words = QFontMetricsF(theme.font(theme.type.caption, bold=True))
    states = [words.horizontalAdvance(w) for lane in spec.lanes for w in (lane.state_word, lane.verdict_word)]
    dues = [words.horizontalAdvance(w) for lane in spec.lanes for w in (lane.due_word, lane.flag_word)]
    shortest = [(lane.state_word, *lane.state_shorter)[-1] for lane in spec.lanes]
    least = max(map(words.horizontalAdvance, shortest), default=0.0)  # they have room whatever the clock loses
    state = max(min(max([*states, px(60)]) + px(44), width * 0.215), min(least + px(44), width * 0.28))
    due = min(max([*dues, px(60)]) + px(60), width * 0.25)
    spare = width - left - state - due - px(_LEAST_CLOCK)
    if spare < 0:  # what stands under a name is cut before the columns are folded: folded lanes are twice as high
        left = max(left + spare, min(left, max(names, px(_LEAST_NAME))))
    folded = width - left - state - due < px(_LEAST_CLOCK) - 1
    if folded:
        longest = max([*states, *dues, px(60)])
        state = min(longest + px(56), width * 0.43)
    head, gap, lane = _heights(len(spec.lanes), px(_FOLDED) if folded else 0, theme, height)
    unit = float(theme.text_scale)
    return LaneGeometry(width, head, lane, gap, left, state, due, folded, spec.start, spec.end, unit)


def _heights(lanes: int, least: int, theme: Theme, height: float) -> tuple[float, float, float]:
    """Heights of heading, gap and lane. Lanes come close together where the ward does not stand on the screen in
    comfort: the more of it is seen, the fewer are forgotten. `least`: of a lane that needs more; 0 else."""
    px, count = theme.px, max(lanes, 1)
    head, gap = float(px(36)), float(px(6))
    comfort = (height - head) / count - gap
    wanted = least or px(_COMFORT)
    if comfort >= wanted:
        return head, gap, round(min(comfort, px(92)))
    close_head, close_gap = float(px(28)), float(px(3))
    if least:
        return head, gap, wanted
    close = int((height - close_head) / count - close_gap)
    return close_head, close_gap, max(min(close, wanted - 1), px(_CLOSE))


def place_items(lane: Lane, g: LaneGeometry, theme: Theme) -> list[Placed]:
    """The items of a lane in order of time, each with its place."""
    px = theme.px
    placed: list[Placed] = []
    flag_end = gas_end = float("-inf")
    gas_row = 0
    for item in sorted(lane.items, key=_order):
        x = g.x(item.at)
        if item.kind is LaneKind.GAS:
            gas_row = 1 - gas_row if x < gas_end else 0  # two gases of one time stand one under the other
            gas_end = x + g.mark + px(3)
            row = g.middle + gas_row * g.mark
            box = _around(x, row, g.mark + px(6), g.mark + px(6))
        elif item.kind is LaneKind.FLAG:
            x = max(x, flag_end)
            flag_end = x + px(18)
            row = g.flag_top + g.flag / 2
            box = QRectF(x - px(2), g.flag_top - px(1), px(18), g.flag + px(2))
        elif item.kind is LaneKind.SETTING:
            row = g.lane - px(12)
            box = _around(x, row, px(14), px(24))
        else:
            end = g.x(item.at if item.end is None else item.end)
            window = item.kind is LaneKind.WINDOW
            row = g.lane - px(12) if window else g.middle
            box = QRectF(x, row - px(10), max(end - x, px(8)), px(20))
        if box.right() >= g.left and box.left() <= g.left + g.clock:
            placed.append(Placed(item, box, x, row))
    return placed


def hit(placed: list[Placed], x: float, y: float) -> LaneItem | None:
    """The item under a point of the lane; gases and flags before what lies wide beneath them."""
    under = [p for p in placed if p.box.contains(x, y)]
    return min(under, key=_narrowness).item if under else None


def _narrowness(placed: Placed) -> float:
    return placed.box.width()


def _order(item: LaneItem) -> tuple[int, str]:
    return item.at, item.kind


def _around(x: float, y: float, width: float, height: float) -> QRectF:
    return QRectF(x - width / 2, y - height / 2, width, height)
