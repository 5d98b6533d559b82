"""Every text that a person reads passes through translation: no widget is given a bare string of words."""

import ast
import re
from pathlib import Path

APP = Path(__file__).parents[2] / "app"
NOT_SHOWN = ("commands", "operations", "words", "chart", "sheet")
"""Rooms without a widget: the command line stays as written, sentences and print pass through `language`."""
PLAIN_TEXT = ("cli.py", "plain.py")
SETTERS = {
    "setText", "setPlaceholderText", "setToolTip", "setWindowTitle", "setAccessibleName", "setAccessibleDescription",
    "setStatusTip", "setWhatsThis", "setTitle", "addItem", "addTab", "setHorizontalHeaderLabels", "setHeaderLabels",
    "say", "QLabel", "QPushButton", "QCheckBox", "QToolButton", "QGroupBox", "refuse", "field", "set_name",
    "Cell", "card", "add_line",
}  # fmt: skip
NAMES = {"Luffmark", "luffmark", "-"}
WORDS = re.compile(r"[A-Za-z]{2,}")


def files():
    found = [p for p in APP.rglob("*.py") if p.relative_to(APP).parts[0] not in NOT_SHOWN]
    return sorted(p for p in found if p.name not in PLAIN_TEXT)


def bare(call):
    for argument in call.args:
        for node in _parts(argument):
            if isinstance(node, ast.Constant) and isinstance(node.value, str) and WORDS.search(node.value):
                yield node.value


def _parts(node):
    """The strings that reach the screen: the constant parts of a joined string count, calls do not."""
    if isinstance(node, ast.JoinedStr):
        return [v for v in node.values if isinstance(v, ast.Constant)]
    if isinstance(node, ast.List | ast.Tuple):
        return [p for element in node.elts for p in _parts(element)]
    return [node]


def test_no_bare_words_on_a_widget():
    assert len(files()) > 150, "the rooms are not where this test looks"
    found = []
    for path in files():
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.Call):
                name = getattr(node.func, "attr", getattr(node.func, "id", ""))
                is_message_key = isinstance(node.func, ast.Name) and name == "refuse"
                if name in SETTERS and not is_message_key:
                    found += [(path.name, node.lineno, text) for text in bare(node) if text.strip() not in NAMES
                              and not text.strip().startswith(("<", "&nbsp;"))]  # fmt: skip
    assert found == []


def test_the_check_sees_what_it_should():
    call = ast.parse('label.setText("Two words")').body[0].value
    assert list(bare(call)) == ["Two words"]
    assert list(bare(ast.parse('label.setText(self.tr("Two words"))').body[0].value)) == []
