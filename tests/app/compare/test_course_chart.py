"""Numbers stand at the ends of their lines."""

from itertools import pairwise

import numpy as np
import pytest
from PySide6.QtCore import QPointF, QRectF

from app.compare.course_chart import numbers_at
from app.compare.courses import Line

VIEW = QRectF(0, 100, 500, 60)


def ends(*places):
    lines = [Line(n, np.zeros(1), np.zeros(1), steps=False) for n, _ in enumerate(places, 1)]
    found = numbers_at(lines, [[QPointF(x, y)] if y is not None else [] for x, y in places], VIEW, 13, 26)
    return {n: (at.x(), at.y()) for n, at in found}


def test_lines_that_end_at_other_hours_keep_their_numbers_at_their_ends():
    assert ends((100, 130), (300, 130), (480, 131)) == {1: (100, 130), 2: (300, 130), 3: (480, 131)}


def test_lines_that_end_side_by_side_share_the_room_around_their_ends():
    found = ends((480, 130), (480, 131), (470, 129))
    heights = sorted(y for _, y in found.values())
    assert [b - a for a, b in pairwise(heights)] == pytest.approx([13, 13])
    assert heights[1] == pytest.approx(130)
    assert [n for n, _ in sorted(found.items(), key=lambda item: item[1][1])] == [3, 1, 2]


def test_a_number_stays_inside_its_row_and_an_empty_line_has_none():
    assert ends((480, 155), (480, 400), (480, None)) == {1: (480, 147), 2: (480, 160)}
