"""`luffmark people list|add|retire|pin`: who may sign in to the store."""

from __future__ import annotations

import argparse
import getpass
import sys

from app.commands.context import Context, line_of
from app.look.formats import day
from app.operations import people as operations
from core.record.instant import iso
from core.record.message import refuse
from storage.people import LEAD, STAFF, check_initials


def run(context: Context, args: argparse.Namespace) -> int:
    """Do it; what changes people asks for a ward lead's PIN once there is one."""
    if args.what == "list":
        return _list(context)
    initials = check_initials(args.initials)
    by_code = line_of(args.recovery_fd) or ""
    with context.open(read_only=False, proven=bool(by_code)) as store:
        who, now = context.by, context.now()
        if args.what == "add":
            request = operations.NewPerson(initials, _new_pin(args, initials), LEAD if args.lead else STAFF)
            operations.add(store, who, now, request)
            text = f"{initials} was added as {request.role}."
        elif args.what == "retire":
            operations.retire(store, who, now, initials)
            text = f"{initials} can no longer sign in. What {initials} recorded stays."
        else:
            operations.set_pin(store, who, now, operations.NewPin(initials, _new_pin(args, initials), by_code))
            text = f"{initials} has a new PIN."
    context.answer(text, {"person": initials, "done": args.what})
    return 0


def _list(context: Context) -> int:
    with context.open(read_only=True) as store:
        found = operations.listed(store, context.by, context.now(), None).value
    lines = [f"{p.initials}  {p.role}{', retired' if p.retired else ''}, since {day(p.since, context.local_zone())}"
             for p in found]  # fmt: skip
    value = [{"initials": p.initials, "role": p.role, "retired": p.retired, "since": iso(p.since)} for p in found]
    context.answer("\n".join(lines) or "Nobody was added: initials alone are asked for.", {"people": value})
    return 0


def _new_pin(args: argparse.Namespace, initials: str) -> str:
    """The new PIN, from its descriptor or typed twice.

    Raises:
        RecordError: `people.bad_pin` where it was not given, or the two differ.
    """
    given = line_of(args.new_pin_fd)
    if given is None and sys.stdin.isatty():
        given = getpass.getpass(f"New PIN of {initials}: ")
        if given != getpass.getpass("Once more: "):
            raise refuse("people.bad_pin", accepted="the same PIN twice")
    if given is None:
        raise refuse("people.bad_pin", accepted="--new-pin-fd N")
    return given
