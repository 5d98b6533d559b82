"""Hand-made cases: a few lines of log each, and the headline, state and reasons they must give.

The files in `cases/` are the table. Below `--` stand the expectations: `anchor KIND@TIME key=value ...` and
`gas TIME of KIND@TIME key=value ...`; spaces in a value are underscores, `none` is None, a time is HH:MM in UTC.
`why=` names reasons that must be among those given.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import pytest

from core.judgement.anchors import find_anchors
from core.judgement.response import judge_responses
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from tests.support.log_cases import at, context

CASES = Path(__file__).parent / "cases"


@dataclass(frozen=True)
class Case:
    name: str
    log: str
    expectations: tuple[str, ...]


def cases() -> list[Case]:
    found = []
    for file in sorted(CASES.glob("*.txt")):
        for block in file.read_text("utf-8").split("=== ")[1:]:
            head, _, tail = block.partition("--\n")
            name, _, log = head.partition("\n")
            found.append(Case(name, log, tuple(line for line in tail.splitlines() if line.strip())))
    return found


def responses(log: str, as_of: str = "d5 00:00") -> tuple[ResponseFigure, ...]:
    ctx = context(log, as_of)
    return judge_responses(ctx, find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy))


def test_there_are_at_least_forty_cases_with_names_of_their_own() -> None:
    names = [c.name for c in cases()]
    assert len(names) >= 40
    assert len(set(names)) == len(names)


@pytest.mark.parametrize("case", cases(), ids=lambda c: c.name)
def test_case(case: Case) -> None:
    as_of = next((line.partition(" ")[2] for line in case.expectations if line.startswith("as_of")), "d5 00:00")
    found = responses(case.log, as_of)
    checked = 0
    for line in case.expectations:
        word, _, rest = line.partition(" ")
        if word == "anchors":
            assert len(found) == int(rest), [(r.anchor, r.anchor_at) for r in found]
        elif word == "anchor":
            name, wanted = _wanted(rest)
            _check(line, _anchor_facts(_response(found, name)), wanted)
        elif word == "gas":
            moment, _, rest = rest.partition(" of ")
            name, wanted = _wanted(rest)
            _check(line, _gas_facts(_gas(_response(found, name), moment)), wanted)
        checked += word != "as_of"
    assert checked, "a case that expects nothing proves nothing"


def _wanted(rest: str) -> tuple[str, dict[str, str]]:
    words = rest.split()
    names = [w for w in words if "=" not in w]
    return " ".join(names), dict(w.split("=", 1) for w in words if "=" in w)


def _response(found: tuple[ResponseFigure, ...], name: str) -> ResponseFigure:
    kind, _, moment = name.partition("@")
    return next(r for r in found if r.anchor == kind and r.anchor_at == at(moment))


def _gas(response: ResponseFigure, moment: str) -> JudgedGas:
    return next(g for g in response.gases if g.at == at(moment))


def _check(line: str, facts: dict[str, object], wanted: dict[str, str]) -> None:
    for key, value in wanted.items():
        got = facts[key]
        if key in ("why", "also", "step"):
            assert set(value.split(",")) <= got, f"{line}: {key} is {got}"  # type: ignore[operator]
        else:
            assert got == value, f"{line}: {key} is {got}"


def _word(value: object) -> str:
    return "none" if value is None else str(value).replace(" ", "_")


def _clock(moment: int | None) -> str:
    if moment is None:
        return "none"
    minutes = (moment - at("00:00")) // 60_000_000
    return f"{minutes // 60:02d}:{minutes % 60:02d}"


def _yes(value: bool) -> str:
    return "yes" if value else "no"


def _anchor_facts(r: ResponseFigure) -> dict[str, object]:
    return {
        "first": _clock(r.first_at), "effects": ",".join(r.effects) or "none", "base": _clock(r.baseline_at),
        "baseph": _word(r.baseline_ph), "early": _yes(r.baseline_early), "headline": _word(r.headline),
        "state": _word(r.state), "gas": _clock(r.headline_gas_at), "co2_active": _yes(r.co2_arm_active),
        "oxygen_active": _yes(r.oxygen_arm_active), "why": {m.key.removeprefix("response.") for m in r.why},
        "step": {f"{s.channel}:{_g(s.before)}:{_g(s.after)}" for s in r.steps},
    }  # fmt: skip


def _g(value: object) -> str:
    return f"{value:g}" if isinstance(value, float) else _word(value)


def _gas_facts(g: JudgedGas) -> dict[str, object]:
    return {
        "minutes": f"{g.minutes:g}", "timing": g.timing, "verdict": _word(g.verdict), "co2": _word(g.co2_arm),
        "oxygen": _word(g.oxygen_arm), "state": _word(g.state), "attributable": _yes(g.attributable),
        "since": _word(g.since_start.verdict), "lost": _yes(g.since_start.gain_lost),
        "also": {s.channel for s in g.also_changed}, "n_also": str(len(g.also_changed)),
        "dpf": _word(g.delta_pf_mmHg),
        "why": {m.key.removeprefix("response.") for m in g.why},
    }  # fmt: skip
