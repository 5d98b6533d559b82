"""A row that goes on in a second line where it does not fit, so that large text is never cut."""

from __future__ import annotations

from PySide6.QtCore import QPoint, QRect, QSize, Qt
from PySide6.QtWidgets import QLayout, QLayoutItem, QWidget


class FlowRow(QLayout):
    """Widgets from left to right in lines; those added with `add_right` stand at the right end of the last line
    while it has room. Lines are as high as their highest widget."""

    def __init__(self, parent: QWidget | None = None, spacing: int = 8) -> None:
        super().__init__(parent)
        self._items: list[QLayoutItem] = []
        self._right: set[int] = set()
        self.setSpacing(spacing)

    def add_right(self, widget: QWidget) -> None:
        """A widget at the right end."""
        self._right.add(len(self._items))
        self.addWidget(widget)

    def addItem(self, item: QLayoutItem) -> None:
        self._items.append(item)

    def count(self) -> int:
        return len(self._items)

    def itemAt(self, index: int) -> QLayoutItem | None:
        return self._items[index] if 0 <= index < len(self._items) else None

    def takeAt(self, index: int) -> QLayoutItem | None:
        return self._items.pop(index) if 0 <= index < len(self._items) else None

    def expandingDirections(self) -> Qt.Orientation:
        return Qt.Orientation(0)

    def hasHeightForWidth(self) -> bool:
        return True

    def heightForWidth(self, width: int) -> int:
        m = self.contentsMargins()
        return self._place(QRect(0, 0, width - m.left() - m.right(), 0), move=False) + m.top() + m.bottom()

    def sizeHint(self) -> QSize:
        """All on one line."""
        m = self.contentsMargins()
        shown = self._shown()
        width = sum(i.sizeHint().width() for _, i in shown) + self.spacing() * max(len(shown) - 1, 0)
        height = max((i.sizeHint().height() for _, i in shown), default=0)
        return QSize(width + m.left() + m.right(), height + m.top() + m.bottom())

    def minimumSize(self) -> QSize:
        m = self.contentsMargins()
        widths = [i.minimumSize().width() for _, i in self._shown()]
        return QSize(max(widths, default=0) + m.left() + m.right(), self.sizeHint().height())

    def setGeometry(self, rect: QRect) -> None:
        super().setGeometry(rect)
        self._place(rect.marginsRemoved(self.contentsMargins()), move=True)

    def _shown(self) -> list[tuple[int, QLayoutItem]]:
        return [(n, i) for n, i in enumerate(self._items) if not i.isEmpty()]

    def _place(self, rect: QRect, *, move: bool) -> int:
        """Lay out into `rect`; the height that was needed."""
        lines = self._lines(rect.width())
        y = rect.top()
        for line in lines:
            height = max((i.sizeHint().height() for _, i in line), default=0)
            if move:
                self._place_line(line, rect, y, height)
            y += height + self.spacing()
        return max(y - self.spacing() - rect.top(), 0)

    def _lines(self, width: int) -> list[list[tuple[int, QLayoutItem]]]:
        lines: list[list[tuple[int, QLayoutItem]]] = [[]]
        used = 0
        for n, item in self._shown():
            wanted = item.sizeHint().width()
            if lines[-1] and used + self.spacing() + wanted > width:
                lines.append([])
                used = 0
            used += wanted + (self.spacing() if lines[-1] else 0)
            lines[-1].append((n, item))
        return lines

    def _place_line(self, line: list[tuple[int, QLayoutItem]], rect: QRect, y: int, height: int) -> None:
        x, right = rect.left(), rect.right() + 1
        for _, item in reversed([part for part in line if part[0] in self._right]):
            size = item.sizeHint()
            right -= size.width()
            item.setGeometry(QRect(QPoint(right, y + (height - size.height()) // 2), size))
            right -= self.spacing()
        for _, item in (part for part in line if part[0] not in self._right):
            size = item.sizeHint()
            size.setWidth(min(size.width(), rect.width()))
            item.setGeometry(QRect(QPoint(x, y + (height - size.height()) // 2), size))
            x += size.width() + self.spacing()
