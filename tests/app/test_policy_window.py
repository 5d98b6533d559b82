"""The policy in the window: every rule to read, a file's faults by line, putting it in force, and the notice."""

from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app.operations import policy
from app.policy.view import PolicyDialog
from app.policy.words import LIMITS, rules
from app.telling.finding_names import marker_name
from app.window.main import MainWindow
from app.words import Reader
from core.judgement.policy import policy_hash, read_policy, shipped_policy, shipped_text
from core.judgement.policy_check import check
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled, until

WARD = (
    shipped_text()
    .replace('name = "Shipped policy"', 'name = "Ward 7"')
    .replace("limits = { ph = 7.25 }", "limits = { ph = 7.2 }", 1)
    .replace('[markers.agitation]\n', '[markers.agitation]\non = false\n')
)  # fmt: skip


@pytest.fixture
def store(tmp_path: Path) -> Path:
    return make_store(tmp_path / "ward.luffmark")


@pytest.fixture
def ward_file(tmp_path: Path) -> Path:
    path = tmp_path / "ward7.toml"
    path.write_text(WARD, "utf-8")
    return path


def shown(qtbot: QtBot, window: MainWindow) -> PolicyDialog:
    window.actions_by_key["policy"].trigger()
    until(qtbot, lambda: window.doers.policy.shown is not None)
    found = window.doers.policy.shown
    assert found is not None
    return found


def texts(dialog: PolicyDialog) -> list[str]:
    items = (dialog.tree.topLevelItem(n) for n in range(dialog.tree.topLevelItemCount()))
    return [" | ".join(i.text(c).strip() for c in range(6)) for i in items]


def test_every_number_of_a_rule_has_its_words() -> None:
    found = shipped_policy()
    every = (*found.markers.values(), *found.due.values())
    assert {n for rule in every for n in rule.limits} <= set(LIMITS)
    assert {n for rule in found.markers.values() for n in rule.pressures} <= set(LIMITS)


def test_every_rule_is_told_with_source_and_certainty() -> None:
    found = shipped_policy()
    told = {r.path: r for r in rules(found, ())}
    assert {f"markers.{k}" for k in found.markers} | {f"due.{k}" for k in found.due} <= set(told)
    assert all(r.source for r in told.values())
    assert told["markers.paco2_rising"].limits.startswith("PaCO2 above 45 mmHg / 6.0 kPa")
    assert "146 mmHg / 19.5 kPa" in told["markers.pf_low_at_1h"].limits
    assert told["markers.ph_below_715"].limits == "pH below 7.15"
    assert told["markers.hacor_8_or_more"].limits.startswith("points above 7")
    assert told["markers.rr_above_30"].limits.startswith("respiratory rate at or above 30/min")
    assert told["markers.pf_below_150_ards"].limits.startswith("P/F at or below 150 mmHg")
    assert "respiratory rate below 25/min" in told["markers.weaning_ready"].limits
    assert told["state.hypercapnia_mmHg"].limits == "45 mmHg / 6.0 kPa"
    assert told["noise.paco2_mmHg"].limits == "3.3 mmHg / 0.44 kPa"


def test_what_differs_stands_at_its_rule() -> None:
    told = {r.path: r for r in rules(read_policy(WARD), check(WARD).differences)}
    (change,) = told["markers.ph_below_severe"].differs
    assert change.sentence == "pH: 7.2 (shipped 7.25)"
    assert not told["markers.agitation"].on
    assert [d.what for d in told["markers.agitation"].differs] == ["on"]
    assert sum(bool(r.differs) for r in told.values()) == 2


def test_the_page_shows_all_and_what_is_chosen(qtbot: QtBot, store: Path) -> None:
    with Store.open(store) as opened:
        policy.put(opened, "CD", NOW, WARD)
    with open_window(qtbot, store) as window:
        dialog = shown(qtbot, window)
        assert dialog.title.text() == "Ward 7, version 1"
        assert "28-Mar-2026 05:30 by CD" in dialog.put_by.text()
        assert policy_hash(WARD)[:16] in dialog.put_by.text()
        assert not dialog.notice.isVisible()
        everything = texts(dialog)
        assert any(
            t.startswith("* pH below 7.20 | concern | pH below 7.20 | everyone | confirmed") for t in everything
        )
        dialog.shown.button("off").click()
        assert [t.partition(" | ")[0] for t in texts(dialog) if "off" in t] == ["* Agitation"]
        dialog.shown.button("differs").click()
        assert len([t for t in texts(dialog) if t.startswith("*")]) == 2
        assert "Differs: pH: 7.2 (shipped 7.25)" in dialog.detail.text()
        dialog.close()


def test_a_file_with_faults_cannot_be_put_in_force(qtbot: QtBot, store: Path, tmp_path: Path) -> None:
    bad = tmp_path / "bad.toml"
    bad.write_text(shipped_text().replace("limits = { ph = 7.25 }", "limits = { ph = 72.5 }", 1), "utf-8")
    with open_window(qtbot, store) as window:
        dialog = shown(qtbot, window)
        window.doers.policy.look_at(bad)
        asking = window.doers.policy.asking
        assert asking is not None
        assert not asking.go.isEnabled()
        line = next(n for n, text in enumerate(bad.read_text("utf-8").splitlines(), 1) if "72.5" in text)
        assert asking.table.item(0, 0).text() == str(line)
        assert "72.5" in asking.table.item(0, 1).text()
        assert "The policy in force stays" in asking.head.text()
        asking.reject()
        window.doers.policy.look_at(tmp_path / "not-there.toml")
        assert "not-there.toml" in window.strip.said.text()
        dialog.close()


def test_a_good_file_is_put_in_force_and_judges_at_once(qtbot: QtBot, store: Path, ward_file: Path) -> None:
    with open_window(qtbot, store) as window:
        assert "ph_below_severe" in {f.marker for f in window.feed.answers["bed-7"].figures.flags}
        dialog = shown(qtbot, window)
        window.doers.policy.look_at(ward_file)
        asking = window.doers.policy.asking
        assert asking is not None
        rows = [[asking.table.item(r, c).text() for c in range(3)] for r in range(asking.table.rowCount())]
        assert ["name", "Shipped policy", "Ward 7"] in rows
        assert any(r[0].endswith(", pH") and r[1:] == ["7.25", "7.2"] for r in rows)
        asking.submit()
        until(qtbot, lambda: dialog.title.text() == "Ward 7, version 1")
        settled(qtbot, window)
        assert window.model.session.policy.name == "Ward 7"
        standing = {f.marker for f in window.feed.answers["bed-7"].figures.flags if f.ended_at is None}
        assert "ph_below_severe" not in standing
        assert marker_name("ph_below_severe", Reader()) == "pH below 7.20"
        dialog.close()
    with Store.open(store, read_only=True) as opened:
        assert policy.show(opened, "", NOW, None).value.by == "AB"


def test_the_policy_is_saved_as_it_is_kept(qtbot: QtBot, store: Path, tmp_path: Path) -> None:
    with open_window(qtbot, store) as window:
        dialog = shown(qtbot, window)
        window.doers.policy.save(tmp_path / "mine.toml")
        assert (tmp_path / "mine.toml").read_text("utf-8") == shipped_text()
        assert check((tmp_path / "mine.toml").read_text("utf-8")).usable
        dialog.close()


def test_one_that_cannot_be_read_is_said_in_the_window_until_another_is_put(qtbot: QtBot, store: Path) -> None:
    with Store.open(store) as opened:
        policy.put(opened, "CD", NOW, WARD)
        opened.put_policy("not = [toml", policy_hash("not = [toml"), "EF", NOW)
    with open_window(qtbot, store) as window:
        said = window.keeping.notices.said
        assert said.isVisible()
        assert "cannot be read" in said.text()
        assert "Ward 7, version 1, stays in force" in said.text()
        assert window.model.session.policy.name == "Ward 7"
        dialog = shown(qtbot, window)
        assert "cannot be read" in dialog.notice.text()
        dialog.close()
        window.model.ask(policy.put, shipped_text())
        until(qtbot, lambda: window.model.session.policy.name == "Shipped policy")
        settled(qtbot, window)
        assert not said.isVisible()
