"""A ward's policy: every fault with its line and what is accepted; what differs; what is missing stays as shipped."""

import pytest

from core.judgement.policy import policy_hash, read_policy, shipped_policy, shipped_text
from core.judgement.policy_check import check, key_lines
from core.record.message import RecordError

TEXT = shipped_text()


def line_of(text, start):
    return next(i for i, line in enumerate(text.splitlines(), 1) if line.startswith(start))


def faults(text):
    return [(f.path, f.message.key) for f in check(text).findings if f.kind == "error"]


def test_the_shipped_policy_is_whole():
    found = check(TEXT)
    assert found.usable
    assert found.findings == found.differences == ()
    assert found.hash == policy_hash(TEXT) == shipped_policy().hash


@pytest.mark.parametrize(
    ("old", "new", "path", "key"),
    [
        ("window_from_min =", "windw_from_min =", "response.windw_from_min", "policy.unknown_key"),
        ('tier = "escalate"', 'tier = "urgent"', "markers.ph_below_715.tier", "policy.wrong_value"),
        ("value = 7.25,", 'value = "low",', "state.severe_below_ph.value", "policy.wrong_value"),
        ("[markers.arrest]", "[markers.arest]", "markers.arest", "policy.unknown_key"),
        ("limits = { ph = 7.15 }", "limits = { ph = 7.15, pco2 = 60 }", "markers.ph_below_715.limits.pco2",
         "policy.unknown_key"),
        ("limits = { ph = 7.15 }", "", "markers.ph_below_715", "policy.missing"),
        ('source = "Arrest: support ends"', 'source = " "', "markers.arrest.source", "policy.no_source"),
        ('population = "moderate ards"', 'population = "severe ards"', "markers.pf_below_150_ards.population",
         "policy.wrong_value"),
        ("window_from_min = { value = 30,", "window_from_min = { value = 120,", "response.window_to_min",
         "policy.wrong_order"),
        ("pao2 = { mmHg = 60, kpa = 8.0 }", "pao2 = { mmHg = 60, kpa = 8.1 }",
         "markers.pao2_below_60.pressures.pao2", "policy.forms_differ"),
        ("limits = { ph = 7.15 }", "limits = { ph = 71.5 }", "markers.ph_below_715.limits", "policy.out_of_range"),
        ("minutes = 15, of_minutes = 18", "minutes = 19, of_minutes = 18", "markers.spo2_below_range.limits",
         "policy.wrong_order"),
        ("from_min = 180\nuntil_min = 240", "from_min = 250\nuntil_min = 240", "due.skin_check.until_min",
         "policy.wrong_order"),
        ("severe_below_ph = { value = 7.25", "severe_below_ph = { value = 7.36", "state.acidotic_below_ph",
         "policy.wrong_order"),
    ],
)  # fmt: skip
def test_each_fault_is_named_with_its_line(old, new, path, key):
    assert old in TEXT
    text = TEXT.replace(old, new, 1)
    found = check(text)
    assert (path, key) in [(f.path, f.message.key) for f in found.findings]
    assert not found.usable
    fault = next(f for f in found.findings if (f.path, f.message.key) == (path, key))
    changed = [i for i, (a, b) in enumerate(zip(TEXT.splitlines(), text.splitlines(), strict=False), 1) if a != b]
    assert abs(fault.line - changed[0]) <= 8  # at the key, or at the table that holds it
    assert fault.line > 0


def test_all_faults_at_once_and_not_only_the_first():
    text = TEXT.replace("window_from_min", "windw_from_min", 1).replace("[markers.arrest]", "[markers.arest]")
    assert [key for _, key in faults(text)] == ["policy.missing", "policy.unknown_key", "policy.unknown_key"]


def test_what_is_accepted_is_said():
    found = check(TEXT.replace("[markers.arrest]", "[markers.arest]"))
    (fault,) = [f for f in found.findings if f.kind == "error"]
    assert "arrest" in str(fault.message.values["accepted"])
    assert fault.line == line_of(TEXT, "[markers.arrest]")


def test_a_text_that_is_no_toml_says_where():
    found = check("name = 'x'\nversion = \n")
    assert not found.usable
    assert (found.findings[0].line, found.findings[0].message.key) == (2, "policy.unreadable")


def test_differences_from_the_shipped_policy():
    text = TEXT.replace("limits = { ph = 7.15 }", "limits = { ph = 7.14 }", 1)
    (difference,) = check(text).differences
    assert (difference.path, difference.shipped, difference.own) == ("markers.ph_below_715.limits.ph", 7.15, 7.14)


def test_a_marker_that_is_only_missing_stays_as_shipped_and_is_said():
    start, end = TEXT.index("[markers.arrest]"), TEXT.index("[markers.vt_not_trusted]")
    text = TEXT[:start] + TEXT[end:]
    found = check(text)
    assert found.usable
    assert [(f.kind, f.message.values["path"]) for f in found.findings] == [("note", "markers.arrest")]
    policy = read_policy(text)
    assert policy.markers["arrest"] == shipped_policy().markers["arrest"]
    assert policy.hash == policy_hash(text)


def test_a_marker_can_be_switched_off():
    text = TEXT.replace("[markers.arrest]\n", "[markers.arrest]\non = false\n")
    assert check(text).usable
    assert not read_policy(text).markers["arrest"].on


@pytest.mark.parametrize(
    ("old", "new"),
    [("[markers.arrest]", "[markers.arest]"), ("limits = { ph = 7.15 }", ""), ("version = 1", "version = 'one'")],
)
def test_reading_refuses_what_the_code_could_not_use(old, new):
    with pytest.raises(RecordError) as refused:
        read_policy(TEXT.replace(old, new, 1))
    assert refused.value.message.key == "policy.invalid"


def test_lines_of_keys():
    assert key_lines('a = 1\n\n[b]\n"c" = 2\n[b.d]\ne = 3\n') == {"a": 1, "b": 3, "b.c": 4, "b.d": 5, "b.d.e": 6}


def test_line_ends_do_not_change_the_name():
    assert policy_hash(TEXT.replace("\n", "\r\n")) == policy_hash(TEXT)
