"""Files by the command line: a mapping proposed and used, patients named, files listed and withdrawn, FHIR out."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from app.cli import DONE, REFUSED, WRONG_USAGE
from tests.support.command_line import Run, on_store
from tests.support.hl7_messages import gas, message, obx

GASES = "Sampled;pH;pCO2;pO2 (kPa)\n28.03.2026 01:10;7,31;8,1;7,9\n28.03.2026 02:10;7,33;7,6;8,0\n"


@pytest.fixture
def run(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Run:
    return on_store(tmp_path / "w.luffmark", capsys, "--zone", "Europe/Oslo")


@pytest.fixture
def gases(tmp_path: Path) -> Path:
    path = tmp_path / "gases.csv"
    path.write_text(GASES)
    return path


def test_from_a_proposal_to_the_record(run: Run, gases: Path, tmp_path: Path) -> None:
    code, out, _ = run("mapping", "propose", gases, "--name", "analyser")
    assert code == DONE
    proposal = json.loads(out)
    assert any("pCO2" in q for q in proposal["questions"])
    code, _, err = run("intake", gases, "--episode", "E1")
    assert (code, "analyser" not in err) == (REFUSED, True)
    assert "No mapping that is kept fits gases.csv" in err
    for column in proposal["mapping"]["columns"]:
        column["unit"] = "kPa" if column["column"] == "pCO2" else column["unit"]
    answered = tmp_path / "analyser.json"
    answered.write_text(json.dumps(proposal))
    assert run("mapping", "put", answered)[0] == DONE
    assert "analyser" in run("mapping", "list")[1]
    assert json.loads(run("mapping", "show", "analyser")[1])["decimal"] == ","
    code, _, err = run("intake", gases)
    assert (code, "Whose values are these?" in err) == (REFUSED, True)
    code, out, _ = run("intake", gases, "--episode", "E1")
    assert (code, "6 entries" in out) == (DONE, True), "recognised by its header"
    code, out, _ = run("intake", gases, "--episode", "E1", "--mapping", "analyser")
    assert "0 entries" in out
    assert "6 were in the store already" in out
    assert run("mapping", "forget", "analyser")[0] == DONE
    assert run("intake", gases, "--mapping", "analyser")[0] == REFUSED


def test_refused_rows_are_left_out_only_on_demand(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "a.hl7"
    path.write_text(message([*gas(), obx("lactate", ">^9", kind="SN")]))
    code, _, err = run("intake", path, "--episode", "E1")
    assert code == REFUSED
    assert "line 7, OBX-5 '>^9'" in err
    code, out, _ = run("intake", path, "--episode", "E1", "--leave-out-refused", "--json")
    (taken,) = json.loads(out)["taken"]
    assert (code, taken["entries"], len(taken["left_out"])) == (DONE, 5, 1)


def test_patients_are_named_by_identifier(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "a.hl7"
    path.write_text(message(gas()) + message(gas(), patient="0043^^^WARD-7^MR", order="F2"))
    assert run("intake", path, "--episode", "E1")[0] == REFUSED
    code, out, _ = run("intake", path, "--patient", "WARD-7|0042=E1", "--patient", "WARD-7|0043=E2")
    assert (code, "2 episodes" in out) == (DONE, True)
    assert run("intake", path, "--patient", "no pair")[0] == WRONG_USAGE


def test_a_file_is_listed_withdrawn_and_may_come_again(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "a.hl7"
    path.write_text(message(gas()))
    run("intake", path, "--episode", "E1")
    code, out, _ = run("taken", "--json")
    (taken,) = json.loads(out)["taken"]
    assert (code, taken["kind"], taken["entries"]) == (DONE, "hl7v2", 5)
    listed = run("taken")[1]
    moment = r"\d\d-[A-Z][a-z]{2}-\d{4} \d\d:\d\d"
    assert re.search(rf"{moment}  \S+  HL7 v2  .*: 5 entries, 0 device samples", listed), listed
    code, out, _ = run("taken", "--withdraw", taken["id"][:8])
    assert (code, "5 entries" in out) == (DONE, True)
    assert "5 entries, 0 device samples (withdrawn)" in run("taken")[1]
    assert [t["withdrawn"] for t in json.loads(run("taken", "--json")[1])["taken"]] == [True, False]
    assert run("taken", "--withdraw", "zzzz")[0] == REFUSED
    assert "5 entries" in run("intake", path, "--episode", "E1")[1]
    assert run("verify")[0] == DONE


def test_a_refusal_says_what_to_type_next(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "a.hl7"
    path.write_text(message(gas()))
    code, _, err = run("intake", path)
    assert code != DONE
    assert f"luffmark intake --patient 'WARD-7|0042=EPISODE' {path}" in err
    table = tmp_path / "t.csv"
    table.write_text("When;Saettigung\n2026-03-27 20:00;91\n", "utf-8")
    code, _, err = run("intake", table)
    assert code != DONE
    assert "mapping propose" in err


def test_a_device_trend_with_its_answers(run: Run, tmp_path: Path) -> None:
    path = tmp_path / "trend.csv"
    rows = [f"2026-03-28 01:{m:02d},{20 + m},4{m:02d}" for m in range(50)]
    path.write_text("\n".join(["Time,Leak (L/min),Tidal volume (mL)", *rows]))
    proposal = json.loads(run("mapping", "propose", path)[1])
    answered = tmp_path / "m.json"
    answered.write_text(json.dumps(proposal))
    assert run("mapping", "put", answered, "--name", "trend")[0] == DONE
    assert "leak" in run("intake", path, "--episode", "E1")[2]
    code, out, _ = run("intake", path, "--episode", "E1", "--leak", "total", "--clock-shift", "-60")
    assert (code, "100 device samples" in out) == (DONE, True)
    facts = json.loads(run("taken", "--json")[1])["taken"][0]["facts"]
    assert (facts["clock_shift_s"], facts["leak_definition"], facts["mapping"]) == (-60.0, "total", "trend")


def test_fhir_goes_out_and_comes_in(run: Run, tmp_path: Path, gases: Path) -> None:
    path = tmp_path / "a.hl7"
    path.write_text(message(gas(ph="7.40")))
    run("intake", path, "--episode", "E1")
    out_file = tmp_path / "out.json"
    assert run("export", "--out", out_file)[0] == DONE
    assert '"value":7.40,' in out_file.read_text("utf-8")
    code, out, _ = run("intake", out_file)
    assert (code, "0 entries" in out) == (DONE, True)
    code, _, err = run("intake", tmp_path / "none.csv")
    assert (code, "none.csv is not there" in err) == (REFUSED, True)


def test_a_bed_s_name_in_a_table_is_no_key(run: Run, tmp_path: Path) -> None:
    night = tmp_path / "night.csv"
    night.write_text(
        "episode,at,channel,value,unit,by,note\n"
        "B4,2026-03-27T20:00:00Z,label,Bed 4,,AB,\nB4,2026-03-27T20:00:00Z,mode,BPAP-ST,,AB,\n"
    )
    assert run("intake", night)[0] == DONE
    table = tmp_path / "gases.csv"
    table.write_text("Time,Bed,pH\n2026-03-28T01:10:00Z,Bed 4,7.19\n2026-03-28T01:20:00Z,Bed 9,7.31\n")
    proposal = json.loads(run("mapping", "propose", table, "--name", "beds")[1])
    proposal["mapping"]["written_by"] = "person"
    answered = tmp_path / "beds.json"
    answered.write_text(json.dumps(proposal))
    assert run("mapping", "put", answered)[0] == DONE
    code, _, err = run("intake", table)
    assert code == REFUSED
    assert "the ward calls B4 so" in err
    assert f"luffmark intake --patient 'Bed 4=EPISODE' {table}" in err
    code, out, _ = run("intake", table, "--patient", "Bed 4=B4")
    assert code == DONE
    assert "2 entries" in out
    assert "New: Bed 9." in out
    assert json.loads(run("intake", table, "--patient", "Bed 4=B4", "--json")[1])["taken"][0]["new_episodes"] == []
