"""The list of message keys is whole: the words of the window are made from it."""

from pathlib import Path

from core.judgement.markers.evidence import KEYS

ROOM = Path(__file__).parents[4] / "core" / "judgement"


def test_every_key_of_the_list_is_used_and_no_other():
    source = "".join(p.read_text("utf-8") for p in (*ROOM.glob("markers/*.py"), *ROOM.glob("due*.py"),
                     ROOM / "concern.py", ROOM / "flags.py") if p.name != "evidence.py")  # fmt: skip
    made = source + (ROOM / "markers" / "evidence.py").read_text("utf-8").partition("def value_is")[2]
    unused = [k for k in KEYS if f'"{k}"' not in made and not k.startswith(("due.mask_check", "due.oxygen_review"))]
    assert unused == []
