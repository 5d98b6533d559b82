"""The command line as a person meets it: what it answers, what it says on stderr, and its exit code; and the log of
one bed that it takes in."""

from collections.abc import Callable
from pathlib import Path

import pytest

from app.cli import main

HEADER = "episode,at,channel,value,unit,by,note\n"
ROWS = (
    "N4,2026-03-27T20:00:00+00:00,label,Bed 4,,AB,\n"
    "N4,2026-03-27T20:00:00+00:00,indication,copd,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,site,arterial,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,ph,7.26,,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,paco2,68,mmHg,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,pao2,60,mmHg,AB,\n"
    "N4,2026-03-27T20:10:00+00:00,gas_fio2,28,%,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,mode,BPAP-ST,,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,ipap,16,cmH2O,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,epap,5,cmH2O,AB,\n"
    "N4,2026-03-27T20:20:00+00:00,fio2,28,%,AB,\n"
    "N4,2026-03-27T21:25:00+00:00,site,arterial,,AB,\n"
    "N4,2026-03-27T21:25:00+00:00,ph,7.33,,AB,\n"
    "N4,2026-03-27T21:25:00+00:00,paco2,57,mmHg,AB,\n"
)

Run = Callable[..., tuple[int, str, str]]
"""Runs a command; gives exit code, stdout and stderr."""


def run(capsys: pytest.CaptureFixture[str], *arguments: object) -> tuple[int, str, str]:
    """One command: its exit code, stdout and stderr."""
    capsys.readouterr()
    try:
        code = main([str(a) for a in arguments])
    except SystemExit as ended:
        code = int(ended.code or 0)
    out, err = capsys.readouterr()
    return code, out, err


def on_store(store: Path, capsys: pytest.CaptureFixture[str], *always: str) -> Run:
    """What runs commands on one store, each with the options that are always given."""
    return lambda *arguments: run(capsys, "--store", store, *always, *arguments)
