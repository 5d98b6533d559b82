"""Statistics, closed handovers, the paper form, exports and pictures from the command line."""

import csv
import io
import json

import pytest
from pypdf import PdfReader

from app.episode.panels import Panel, PanelSet, to_json, to_toml
from app.operations import panel
from storage.store import Store
from tests.support.command_line import run

SPAN = ("--from", "2026-03-27T19:30:00Z", "--to", "2026-03-28T05:30:00Z")
KNOWN = "2026-03-28T02:40:00Z"


def test_statistics_say_the_same_as_text_json_and_csv(capsys, night, tmp_path):
    code, text, _ = run(capsys, "statistics", *SPAN, "--store", night)
    assert code == 0
    assert "Support started: 11" in text
    _, out, _ = run(capsys, "statistics", *SPAN, "--store", night, "--json")
    value = json.loads(out)
    assert (value["episodes"], value["starts"]) == (12, 11)
    assert value["clocks"]["decision_to_start"]["within"] == 11
    assert run(capsys, "statistics", *SPAN, "--store", night, "--csv", tmp_path / "s.csv")[0] == 0
    rows = list(csv.DictReader(io.StringIO((tmp_path / "s.csv").read_text("utf-8"))))
    counted = {r["measure"]: r["value"] for r in rows}
    assert counted["Support started"] == "11"
    assert float(counted["Hours on the mask"]) == pytest.approx(value["hours_on_mask"], rel=1e-4)
    assert {r["from"] for r in rows} == {"2026-03-27T19:30:00+00:00"}


def test_statistics_as_known_then_know_less_and_a_backward_span_is_refused(capsys, night):
    _, now, _ = run(capsys, "statistics", *SPAN, "--store", night, "--json")
    _, then, _ = run(capsys, "statistics", *SPAN, "--store", night, "--json", "--as-known-at", KNOWN)
    assert json.loads(then)["gases"]["total"] < json.loads(now)["gases"]["total"]
    code, _, err = run(capsys, "statistics", "--from", SPAN[3], "--to", SPAN[1], "--store", night)
    assert code == 1
    assert "before it starts" in err


def test_a_handover_is_closed_listed_and_written_again_byte_for_byte(capsys, own, tmp_path):
    code, out, _ = run(capsys, "handover", *SPAN, "--store", own, "--close", "--given-by", "AB", "--taken-by", "CD",
                       "--out", tmp_path / "a.pdf", "--json")  # fmt: skip
    assert code == 0
    made = json.loads(out)
    _, listed, _ = run(capsys, "handovers", "--store", own, "--json")
    (only,) = json.loads(listed)["handovers"]
    assert (only["id"], only["name"]) == (made["id"], made["name"])
    assert run(capsys, "handovers", made["id"], "--store", own, "--out", tmp_path / "b.pdf")[0] == 0
    assert (tmp_path / "a.pdf").read_bytes() == (tmp_path / "b.pdf").read_bytes()
    assert run(capsys, "verify", "--store", own)[0] == 0


def test_what_a_handover_lacks_is_said(capsys, own, tmp_path):
    assert run(capsys, "handover", "--store", own)[0] == 2
    assert run(capsys, "handover", *SPAN, "--store", own, "--close", "--given-by", "AB")[0] == 2
    assert run(capsys, "handovers", "no-such-id", "--store", own, "--out", tmp_path / "x.pdf")[0] == 1
    assert not (tmp_path / "x.pdf").exists()
    assert run(capsys, "handovers", "--store", own)[1].strip() == "No handover was closed yet."


def test_the_paper_form_needs_no_store(capsys, tmp_path):
    assert run(capsys, "handover", "--blank", "--out", tmp_path / "form.pdf", "--paper", "Letter")[0] == 0
    assert len(PdfReader(tmp_path / "form.pdf").pages) == 2
    assert run(capsys, "handover", "--blank")[0] == 2
    code, _, err = run(capsys, "handover", "--blank", "--out", tmp_path / "nowhere" / "form.pdf")
    assert code == 1
    assert "nowhere" in err


def test_exports_keep_to_what_was_asked(capsys, night, tmp_path):
    asked = ("--channel", "ph", *SPAN, "--dictionary")
    code, _, _ = run(capsys, "export", "--store", night, "--out", tmp_path / "v.csv", *asked)
    assert code == 0
    rows = list(csv.DictReader(io.StringIO((tmp_path / "v.csv").read_text("utf-8"))))
    assert {r["channel"] for r in rows} == {"ph"}
    assert len((tmp_path / "v.dictionary.csv").read_text("utf-8").splitlines()) == 2
    assert run(capsys, "export", "--store", night, "--out", tmp_path / "v.csv")[0] == 1


def test_a_deidentified_export_holds_no_label_and_says_what_remains(capsys, night, tmp_path):
    code, out, _ = run(capsys, "export", "--store", night, "--out", tmp_path / "d.csv", "--deidentified")
    assert code == 0
    assert "Remains (rows)" in out
    text = (tmp_path / "d.csv").read_text("utf-8")
    with Store.open(night, read_only=True) as store:
        for key in store.episode_keys():
            record = store.episode(key)
            assert key not in text
            for channel in ("label", "location", "plan", "contact", "note"):
                assert not any(words and words in text for words in record.text(channel).v)
    assert "2026-03-2" not in text
    assert "anonymous" in (tmp_path / "d.about.txt").read_text("utf-8")


@pytest.mark.parametrize(("what", "episodes"), [("panels", 1), ("map", 1), ("compare", 3)])
def test_pictures_of_each_kind(capsys, night, tmp_path, what, episodes):
    with Store.open(night, read_only=True) as store:
        keys = store.episode_keys()[:episodes]
    path = tmp_path / f"{what}.svg"
    code, _, _ = run(capsys, "picture", *keys, "--what", what, "--store", night, "--as-of", SPAN[3], "--out", path)
    assert code == 0
    text = path.read_text("utf-8")
    assert "<image" not in text
    assert "pH" in text


def test_a_picture_of_too_few_or_too_many_is_refused(capsys, night, tmp_path):
    out = ("--out", tmp_path / "x.png", "--store", night)
    assert run(capsys, "picture", "A", "B", "--what", "map", *out)[0] == 2
    assert run(capsys, "picture", "A", "--what", "compare", *out)[0] == 2


def test_any_set_of_panels_is_drawn_by_name_or_file(capsys, own, tmp_path):
    mine = PanelSet((Panel("a", "My own gas", ("ph",)), Panel("b", "Pulse alone", ("hr",))))
    with Store.open(own) as store:
        panel.keep(store, "AB", 0, panel.Layout("panelset.night round", to_json(mine)))
    (tmp_path / "mine.toml").write_text(to_toml(mine))
    drawn = ("picture", "N-0327-04", "--store", own, "--as-of", SPAN[3], "--what", "panels")
    for n, name in enumerate(("night round", tmp_path / "mine.toml")):
        out = tmp_path / f"{n}.svg"
        assert run(capsys, *drawn, "--panels", name, "--out", out)[0] == 0
        text = out.read_text("utf-8")
        assert "My own gas" in text
        assert "Pulse alone" in text
        assert "<image" not in text
    assert run(capsys, *drawn, "--out", tmp_path / "usual.svg")[0] == 0
    assert "My own gas" not in (tmp_path / "usual.svg").read_text("utf-8")
    code, _, err = run(capsys, *drawn, "--panels", "day round", "--out", tmp_path / "x.svg")
    assert code == 1
    assert "night round" in err
    assert not (tmp_path / "x.svg").exists()


@pytest.mark.parametrize(("what", "episodes"), [("panels", 1), ("map", 1), ("compare", 2)])
@pytest.mark.parametrize("suffix", [".png", ".svg", ".pdf"])
def test_pictures_have_their_own_resolution_and_say_whose_they_are(capsys, night, tmp_path, what, episodes, suffix):
    """Vectors stay vectors, text stays text; a PNG has two dots for each pixel of its size."""
    path = tmp_path / f"p{suffix}"
    keys = ("N-0327-04", "N-0327-05")[:episodes]
    asked = ("--as-of", SPAN[3], "--zone", "UTC", "--what", what, "--size", "800x600", "--out", path)
    assert run(capsys, "picture", *keys, "--store", night, *asked)[0] == 0
    data = path.read_bytes()
    if suffix == ".png":
        assert (int.from_bytes(data[16:20], "big"), int.from_bytes(data[20:24], "big")) == (1600, 1200)
        return
    assert b"<image" not in data
    text = data.decode("utf-8") if suffix == ".svg" else PdfReader(path).pages[0].extract_text()
    for words in ("pH", "Bed 4", "28-Mar-2026 05:30", "It is no alarm and no monitor"):
        assert words in " ".join(text.split())
    if suffix == ".pdf":
        (page,) = PdfReader(path).pages
        assert (float(page.mediabox.width), float(page.mediabox.height)) == pytest.approx((600, 450), abs=1)
        assert not page.images
