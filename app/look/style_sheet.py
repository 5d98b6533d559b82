"""The style sheet of widgets: soft raised cards, one-pixel lines, generous targets, focus always visible.

A widget asks for a look by a dynamic property: `card` on a frame, `role` on a label or a button
(title, emphasis, quiet, caption; primary, plain). Properties and not class names, so that one look
serves many widgets.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtGui import QColor, QPalette
from PySide6.QtWidgets import QApplication

if TYPE_CHECKING:
    from app.look.theme import Theme

_SHEET = """
* {{ color: {ink}; }}
QMainWindow, QDialog, QMessageBox {{ background: {ground}; }}
QToolTip {{ background: {ink}; color: {raised}; border: 0; padding: {g2}px {g3}px; }}
QFrame[card="true"] {{ background: {raised}; border: 1px solid {line}; border-radius: {radius}px; }}
QLabel {{ background: transparent; border: 0; }}
QLabel[role="display"] {{ font-size: {display}px; font-weight: 600; }}
QLabel[role="title"] {{ font-size: {title}px; font-weight: 600; }}
QLabel[role="emphasis"] {{ font-size: {emphasis}px; font-weight: 600; }}
QLabel[role="strong"] {{ font-weight: 600; }}
QFrame[banner="true"] {{ background: {wash}; border: 0; border-bottom: 2px solid {accent}; }}
QLabel[pill="true"] {{
    background: {wash}; border: 1px solid {accent}; border-radius: {radius}px; padding: {g1}px {g2}px;
    font-weight: 600;
}}
QFrame[fact="true"] {{ background: transparent; border: 2px solid transparent; border-radius: {radius}px; }}
QFrame[fact="true"]:hover {{ background: {wash}; }}
QFrame[fact="true"]:focus {{ border-color: {accent}; background: {wash}; }}
QLabel[role="quiet"] {{ color: {ink_quiet}; }}
QLabel[role="caption"] {{ color: {ink_quiet}; font-size: {caption}px; }}
QLabel[role="mark"] {{ font-size: {caption}px; font-weight: 600; }}

QPushButton, QToolButton {{
    background: {raised}; border: 1px solid {edge}; border-radius: {radius}px;
    padding: {g2}px {g4}px; min-height: {target}px;
}}
QPushButton:hover, QToolButton:hover {{ background: {wash}; }}
QPushButton:pressed, QToolButton:pressed, QPushButton:checked, QToolButton:checked {{
    background: {wash}; border-color: {accent};
}}
QPushButton:focus, QToolButton:focus {{ border: 2px solid {accent}; padding: {g2_1}px {g4_1}px; }}
QPushButton:disabled, QToolButton:disabled {{ color: {edge}; border-color: {line}; }}
QPushButton[role="primary"] {{ background: {accent}; color: {on_accent}; border-color: {accent}; }}
QPushButton[role="primary"]:hover {{ background: {support_edge}; }}
QPushButton[role="primary"]:focus {{ border: 2px solid {ink}; }}
QPushButton[role="primary"]:disabled {{ background: {sunken}; color: {ink_quiet}; border-color: {line}; }}
QPushButton[role="plain"], QToolButton[role="plain"] {{ border-color: transparent; background: transparent; }}
QToolButton[role="tab"] {{
    border-color: transparent; background: transparent; padding: {g1}px {tab}px; min-height: {choice}px;
}}
QToolButton[role="tab"]:hover {{ background: {wash}; }}
QToolButton[role="tab"]:checked {{ background: {wash}; border-color: {accent}; font-weight: 600; }}
QToolButton[role="tab"]:focus {{ border: 2px solid {accent}; padding: {g1_1}px {tab_1}px; }}
QToolButton[role="why"] {{
    padding: 0px {g2}px; min-height: 0px; font-size: {caption}px; border-color: {edge};
}}
QPushButton[role="small"] {{ padding: {g1}px {g3}px; min-height: {choice}px; }}
QPushButton[role="small"]:focus {{ border: 2px solid {accent}; padding: {g1_1}px {g3_1}px; }}
QPushButton[role="step"] {{
    padding: 0px; font-size: {title}px; font-weight: 600;
    min-height: {glove_button}px; min-width: {glove_button}px;
}}
QPushButton[role="step"]:focus {{ padding: 0px; }}
QAbstractSpinBox[role="large"] {{ min-height: {glove_field}px; }}
QPushButton[role="answer"] {{ padding: {g1}px {g3}px; min-height: {choice}px; }}
QPushButton[role="answer"]:checked {{ background: {accent}; color: {on_accent}; border-color: {accent}; }}
QPushButton[role="answer"]:focus {{ border: 2px solid {ink}; padding: {g1_1}px {g3_1}px; }}
QAbstractSpinBox QLineEdit {{ border: 0; background: transparent; padding: 0px; min-height: 0px; }}
QToolButton[role="choice"] {{
    border-color: transparent; background: transparent; padding: {g1}px {g3}px; min-height: {choice}px;
}}
QToolButton[role="choice"]:hover {{ background: {wash}; }}
QToolButton[role="choice"]:checked {{ background: {wash}; border-color: {accent}; font-weight: 600; }}
QToolButton[role="choice"]:focus {{ border: 2px solid {accent}; padding: {g1_1}px {g3_1}px; }}
QPushButton[role="plain"]:hover, QToolButton[role="plain"]:hover {{ background: {wash}; }}
QPushButton[role="plain"]:checked, QToolButton[role="plain"]:checked {{
    background: {wash}; border-color: {accent}; font-weight: 600;
}}
QPushButton[role="plain"]:focus, QToolButton[role="plain"]:focus {{ border: 2px solid {accent}; }}

QLineEdit, QPlainTextEdit, QTextEdit, QAbstractSpinBox, QComboBox {{
    background: {raised}; border: 1px solid {edge}; border-radius: {radius}px;
    padding: {g1}px {g3}px; min-height: {target}px;
    selection-background-color: {accent}; selection-color: {on_accent};
}}
QLineEdit:focus, QPlainTextEdit:focus, QTextEdit:focus, QAbstractSpinBox:focus, QComboBox:focus {{
    border: 2px solid {accent}; padding: {g1_1}px {g3_1}px;
}}
QLineEdit:disabled, QAbstractSpinBox:disabled, QComboBox:disabled {{
    background: {sunken}; color: {ink_quiet}; border-color: {line};
}}
QLineEdit, QPlainTextEdit, QTextEdit {{ placeholder-text-color: {ink_quiet}; }}
QComboBox::drop-down {{ border: 0; width: {g6}px; }}
QComboBox::down-arrow {{ image: url("{arrow}"); width: {g4}px; height: {g4}px; }}
QComboBox QAbstractItemView {{ background: {raised}; border: 1px solid {line}; outline: 0; }}

QCheckBox, QRadioButton {{ spacing: {g2}px; min-height: {target}px; background: transparent;
    border: 2px solid transparent; }}
QCheckBox::indicator, QListView::indicator, QTreeView::indicator, QTableView::indicator {{
    width: {g4}px; height: {g4}px; background: {raised}; border: 1px solid {edge}; border-radius: {g1}px;
}}
QCheckBox::indicator:checked, QListView::indicator:checked, QTreeView::indicator:checked,
QTableView::indicator:checked {{
    background: {accent}; border: 1px solid {accent}; image: url("{tick}"); }}
QSlider:horizontal {{ min-height: {g6}px; }}
QSlider::groove:horizontal {{ height: {g1}px; background: {line}; border-radius: 2px; }}
QSlider::sub-page:horizontal {{ background: {accent}; border-radius: 2px; }}
QSlider::handle:horizontal {{
    width: {g4}px; margin: -{g2}px 0; background: {raised}; border: 1px solid {edge}; border-radius: {g1}px;
}}
QSlider::handle:horizontal:focus {{ border: 2px solid {accent}; }}
QCheckBox::indicator:disabled {{ border-color: {line}; }}
QCheckBox:focus, QRadioButton:focus {{ border: 2px solid {accent}; border-radius: {g1}px; }}

QListView, QTreeView, QTableView {{
    background: {raised}; alternate-background-color: {sunken}; border: 1px solid {line};
    border-radius: {radius}px; padding: 1px; gridline-color: {line}; outline: 0;
    selection-background-color: {wash}; selection-color: {ink};
}}
QListView:focus, QTreeView:focus, QTableView:focus {{ border: 2px solid {accent}; padding: 0px; }}
QListView::item, QTreeView::item {{ padding: {g2}px; min-height: {target}px; }}
QTableView::item {{ padding: {g1}px {g2}px; }}
QListView::item:selected, QTreeView::item:selected, QTableView::item:selected {{
    background: {wash}; color: {ink};
}}
QHeaderView {{ background: transparent; }}
QHeaderView::section {{
    background: transparent; color: {ink_quiet}; border: 0; border-bottom: 1px solid {line};
    padding: {g2}px {g2_3}px; font-size: {caption}px; text-align: left;
}}
QTableCornerButton::section {{ background: {raised}; border: 0; }}

QMenuBar {{ background: {ground}; border-bottom: 1px solid {line}; spacing: 2px; }}
QMenuBar::item {{ padding: {menu}px {menu_side}px; background: transparent; }}
QMenuBar::item:selected {{ background: {wash}; }}
QMenu {{ background: {raised}; border: 1px solid {line}; padding: {g1}px; }}
QMenu::item {{ padding: {g2}px {g6}px {g2}px {g4}px; border-radius: {g1}px; }}
QMenu::item:selected {{ background: {wash}; }}
QMenu::item:disabled {{ color: {edge}; }}
QMenu::separator {{ height: 1px; background: {line}; margin: {g1}px {g2}px; }}

QTabBar::tab {{
    background: transparent; color: {ink_quiet}; border: 0; border-bottom: 2px solid transparent;
    padding: {g2}px {g4}px; min-height: {target}px;
}}
QTabBar::tab:selected {{ color: {ink}; border-bottom: 2px solid {accent}; font-weight: 600; }}
QTabBar::tab:hover {{ background: {wash}; }}
QTabBar:focus {{ border: 2px solid {accent}; border-radius: {g1}px; }}
QTabWidget::pane {{ border: 0; }}

QGroupBox {{ border: 1px solid {line}; border-radius: {radius}px; margin-top: {g5}px; padding: {g3}px; }}
QGroupBox::title {{ subcontrol-origin: margin; left: {g3}px; color: {ink_quiet}; }}
QStatusBar {{ background: {ground}; border-top: 1px solid {line}; color: {ink_quiet}; }}
QStatusBar::item {{ border: 0; }}
QSplitter::handle {{ background: {line}; }}
QSplitter::handle:horizontal {{ width: 1px; }}
QSplitter::handle:vertical {{ height: 1px; }}
QProgressBar {{
    background: {sunken}; border: 1px solid {line}; border-radius: {g1}px; height: {g2}px; text-align: center;
}}
QProgressBar::chunk {{ background: {accent}; border-radius: {g1}px; }}

QScrollArea {{ border: 0; background: transparent; }}
QScrollArea[keys="true"] {{ border: 2px solid transparent; border-radius: {radius}px; }}
QScrollArea[keys="true"]:focus {{ border: 2px solid {accent}; }}
QScrollBar {{ background: transparent; border: 0; margin: 0; }}
QScrollBar:vertical {{ width: {g3}px; }}
QScrollBar:horizontal {{ height: {g3}px; }}
QScrollBar::handle {{ background: {edge}; border-radius: {bar}px; margin: 3px; }}
QScrollBar::handle:vertical {{ min-height: {g8}px; }}
QScrollBar::handle:horizontal {{ min-width: {g8}px; }}
QScrollBar::handle:hover {{ background: {ink_quiet}; }}
QScrollBar::add-line, QScrollBar::sub-line {{ width: 0; height: 0; }}
QScrollBar::add-page, QScrollBar::sub-page {{ background: transparent; }}
"""

_LOOK = Path(__file__).parent
_CELL_MARGIN = 3
"""Pixels that the style puts before the words of a cell, and not before those of its heading."""
_SURFACES = ("ground", "raised", "sunken", "line", "edge", "wash")
_INKS = ("ink", "ink_quiet", "accent", "on_accent", "support_edge")


def sheet(theme: Theme) -> str:
    """The style sheet with the theme's colours, and sizes at its text scale."""
    c, t = theme.colours, theme.type
    distances = {f"g{n}": theme.px(4 * n) for n in range(1, 9)}
    # Focus thickens a border by one pixel: the padding gives it back, so that nothing jumps.
    inner = {f"g{n}_1": max(distances[f"g{n}"] - 1, 0) for n in range(1, 5)}
    sizes = {name: theme.px(getattr(t, name)) for name in ("caption", "body", "emphasis", "title", "display")}
    colours = {name: getattr(c, name) for name in _SURFACES + _INKS}
    targets = {"target": theme.px(24), "choice": theme.px(20), "menu": theme.px(10)}
    targets |= {"glove_button": theme.px(44) - 2, "glove_field": theme.px(44) - 2 - 2 * theme.px(4)}
    targets |= {"menu_side": theme.px(8), "tab": theme.px(5), "tab_1": theme.px(5) - 1}
    drawn = {n: (_LOOK / f"{n}-{'dark' if theme.dark else 'light'}.svg").as_posix() for n in ("tick", "arrow")}
    targets["g2_3"] = theme.px(8) + _CELL_MARGIN
    return _SHEET.format(radius=8, bar=3, **drawn, **targets, **distances, **inner, **sizes, **colours)


def palette_of(theme: Theme) -> QPalette:
    """The Qt palette of the theme, for what a style sheet does not reach."""
    c = theme.colours
    role = QPalette.ColorRole
    pairs = {
        role.Window: c.ground,
        role.WindowText: c.ink,
        role.Base: c.raised,
        role.AlternateBase: c.sunken,
        role.Text: c.ink,
        role.Button: c.raised,
        role.ButtonText: c.ink,
        role.ToolTipBase: c.ink,
        role.ToolTipText: c.raised,
        role.PlaceholderText: c.ink_quiet,
        role.Highlight: c.accent,
        role.HighlightedText: c.on_accent,
        role.Link: c.accent,
        role.LinkVisited: c.accent,
        role.Accent: c.accent,
    }
    palette = QPalette()
    for which, colour in pairs.items():
        palette.setColor(which, QColor(colour))
    for which in (role.WindowText, role.Text, role.ButtonText):
        palette.setColor(QPalette.ColorGroup.Disabled, which, QColor(c.edge))
    return palette


def style_sheet(theme: Theme) -> str:
    """The application's style sheet."""
    return sheet(theme)


def apply_theme(app: QApplication, theme: Theme) -> None:
    """Dresses the whole application."""
    app.setStyle("Fusion")  # the one style that is the same on every platform
    app.setPalette(palette_of(theme))
    app.setFont(theme.font())
    app.setStyleSheet(style_sheet(theme))
