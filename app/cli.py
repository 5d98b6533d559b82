"""The command line. Exit 0: done. 1: refused, with one clear line on stderr. 2: wrong usage.

The grammar stands here; what a command does stands in `app.commands`, imported only when it is called.
"""

from __future__ import annotations

import argparse
import logging
import sys
from collections.abc import Callable, Sequence
from importlib import import_module
from pathlib import Path
from typing import NoReturn

from app.telling.caution_texts import CAUTION
from core.record.instant import Instant
from core.record.message import RecordError

DONE, REFUSED, WRONG_USAGE = 0, 1, 2


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a command; without one, open the window. Returns the exit code."""
    _speak_utf8()
    logging.getLogger("luffmark").addHandler(logging.NullHandler())  # stderr is for the one clear line
    args = parser().parse_args(arguments)
    from app.commands.context import Context, refused

    context = Context.of(args)
    try:
        return int(import_module(f"app.commands.{args.module}").run(context, args))
    except BrokenPipeError:
        sys.stderr.close()  # whoever read our output has enough
        return DONE
    except KeyboardInterrupt:
        return REFUSED
    except Exception as error:
        return refused(error)


def _speak_utf8() -> None:
    """Units and dashes need UTF-8 whatever the console's page; what it lacks is replaced, never fatal."""
    from io import TextIOWrapper

    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, TextIOWrapper):
            stream.reconfigure(encoding="utf-8", errors="replace")


def parser() -> argparse.ArgumentParser:
    """The grammar of the command line."""
    common = _common()
    top = _Parser(
        prog="luffmark", parents=[common], epilog=CAUTION,
        description="Shift log, response figures, flags and handover for mask ventilation. Without a command the "
        "window opens.",
    )  # fmt: skip
    top.set_defaults(module="window")
    top.add_argument("--version", action=_Version, nargs=0, help="show the program's version and exit")
    commands = top.add_subparsers(title="commands", metavar="COMMAND")

    def command(name: str, help: str, module: str | None = None) -> argparse.ArgumentParser:
        made = commands.add_parser(name, help=help, description=help, parents=[common], epilog=CAUTION)
        made.set_defaults(module=module or name)
        return made

    for add in (_showing, _recording, _printing, _safety, _files, _running_the_ward):
        add(command)
    return top


Command = Callable[..., argparse.ArgumentParser]


def _showing(command: Command) -> None:
    command("demo", "open the window on the sample shift in a throw-away store")
    figures = command("figures", "computed figures of one episode or of all")
    figures.add_argument("episode", nargs="?", help="an episode's key; all when left out")
    _moments(figures)

    statistics = command("statistics", "shift figures of the ward over any span, as text, CSV or JSON")
    statistics.add_argument("--from", dest="start", type=moment, required=True, metavar="T", help="the span's start")
    statistics.add_argument("--to", dest="end", type=moment, required=True, metavar="T", help="the span's end")
    statistics.add_argument("--csv", type=Path, metavar="FILE", help="write a table; left out: text on the screen")
    _may_replace(statistics)
    statistics.add_argument("--as-known-at", type=moment, metavar="T", help="only what was recorded by then")

    replay = command("replay", "what a policy would have flagged in past episodes, or two policies side by side")
    replay.add_argument("--policy", type=Path, metavar="FILE", help="the policy; left out: the one in force")
    replay.add_argument("--against", type=Path, metavar="FILE", help="a second one; 'shipped' is the shipped one")
    replay.add_argument("--episodes", nargs="+", metavar="E", help="only these; left out: all of the store")
    replay.add_argument("--from", dest="start", type=moment, metavar="T", help="only flags raised from then on")
    replay.add_argument("--to", dest="end", type=moment, metavar="T", help="only what was raised and known before")
    replay.add_argument("--known-when-it-happened", dest="at_once", action="store_true",
                        help="for records whose recording times are lost")  # fmt: skip
    replay.add_argument("--processes", type=int, metavar="N", help="how many processes (default: one for each core)")


def _recording(command: Command) -> None:
    intake = command("intake", "take files into the store, each whole or not at all: log CSV, tables, HL7 v2, FHIR")
    intake.add_argument("files", nargs="+", type=Path, metavar="FILE")
    _about_files(intake)
    intake.add_argument("--keep-recording-times", action="store_true",
                        help="make the new store an imported one: recorded_at of the files stands")  # fmt: skip
    log = command("log", 'log one line as typed in the window, e.g. luffmark log N4-07 "14:20 16/6 35"')
    log.add_argument("episode")
    log.add_argument("line")
    log.add_argument("--yes", action="store_true", help="answer yes to the line's questions")
    log.add_argument("--new", action="store_true", help="begin the episode if the store does not know it")
    log.add_argument("--at", type=moment, metavar="T", help="its moment, for a line that names no time")
    correct = command("correct", "correct, withdraw or move an entry; the old one stays visible")
    correct.add_argument("episode")
    correct.add_argument("entry", nargs="?", help="an entry's id or its beginning; left out: list the entries")
    what = correct.add_mutually_exclusive_group()
    what.add_argument("--value", help="the right value")
    what.add_argument("--withdraw", action="store_true", help="the entry must not count")
    what.add_argument("--move-to", metavar="EPISODE", help="the entry belongs to another episode")
    what.add_argument("--leave-out", metavar="CHANNELS", help="device samples that do not count; with --span")
    what.add_argument("--move-by", metavar="CHANNELS:MIN",
                      help="device samples that belong so many minutes later; with --span")  # fmt: skip
    correct.add_argument("--span", nargs=2, type=moment, metavar=("FROM", "TO"), help="which device samples")
    correct.add_argument("--unit", default="", help="the unit of --value")
    correct.add_argument("--at", type=moment, metavar="T", help="the right time")
    correct.add_argument("--reason", default="", help="why")
    correct.add_argument("--only", action="store_true", help="only this value, not the whole gas it belongs to")
    correct.add_argument("--yes", action="store_true", help="answer yes to what is asked")


def _about_files(intake: argparse.ArgumentParser) -> None:
    """What a person says of files that are not the log CSV."""
    intake.add_argument("--episode", default="", metavar="E", help="whose the file is, where it does not say")
    intake.add_argument("--patient", action="append", type=pair, default=[], metavar="ID=E",
                        help="the episode of one identifier of a file of results, or of one name in the "
                        "column of episodes of a table; may be repeated")  # fmt: skip
    intake.add_argument("--code", action="append", type=code, default=[], metavar="CODE=CHANNEL",
                        help="what a sender's own code measures (none: not wanted), kept for every later file; "
                        "may be repeated (see: luffmark channels)")  # fmt: skip
    intake.add_argument("--mapping", default="", metavar="NAME", help="how a table is read (see: luffmark mapping)")
    intake.add_argument("--leak", default="", metavar="WHAT", help="what leak means: unintentional, total, not known")
    intake.add_argument("--clock-shift", type=float, default=0.0, metavar="S",
                        help="seconds to add to every time of a device whose clock is off")  # fmt: skip
    _about_writing(intake)
    intake.add_argument("--leave-out-refused", action="store_true",
                        help="take the file without its refused rows; which ones is recorded")  # fmt: skip


def _about_writing(command: argparse.ArgumentParser) -> None:
    """How a table is written; a mapping keeps what is said here."""
    command.add_argument("--sheet", default="", help="the sheet of a spreadsheet; the first when left out")
    command.add_argument("--encoding", default="", help="how a table's text is encoded; found when left out")
    command.add_argument("--delimiter", default="", metavar="C",
                         help="what a table's columns are apart by: one character, or comma, semicolon, tab, bar, "
                         "space, colon; found when left out")  # fmt: skip
    command.add_argument("--header-line", type=int, default=0, metavar="N",
                         help="the line of a table's header; found when left out")  # fmt: skip


def pair(text: str) -> tuple[str, str]:
    """An identifier and its episode.

    >>> pair("WARD-7|0042=N4-07")
    ('WARD-7|0042', 'N4-07')
    """
    identifier, mark, episode = text.rpartition("=")
    if not (identifier and mark and episode):
        raise argparse.ArgumentTypeError(f"'{text}' is no pair. Accepted: IDENTIFIER=EPISODE")
    return identifier, episode


def code(text: str) -> tuple[str, str]:
    """A sender's own code and its channel, "" where it is not wanted.

    >>> code("L|GLU=none"), code("3150-6=gas_fio2")
    (('L|GLU', ''), ('3150-6', 'gas_fio2'))
    """
    key, mark, channel = text.rpartition("=")
    if not (key and mark and channel):
        raise argparse.ArgumentTypeError(f"'{text}' is no code. Accepted: CODE=CHANNEL, or CODE=none")
    return key, "" if channel.casefold() == "none" else channel


def _printing(command: Command) -> None:
    handover = command("handover", "the handover sheet of a shift, as PDF or as plain text")
    handover.add_argument("--from", dest="start", type=moment, metavar="T", help="the shift's start")
    handover.add_argument("--to", dest="end", type=moment, metavar="T", help="the shift's end")
    handover.add_argument("--out", type=Path, metavar="FILE", help=".pdf or .txt; left out: text on the screen")
    _may_replace(handover)
    handover.add_argument("--text", action="store_true", help="plain text, on the screen or into --out")
    handover.add_argument("--paper", choices=("A4", "Letter"), default="A4")
    handover.add_argument("--given-by", default="", metavar="NAME")
    handover.add_argument("--taken-by", default="", metavar="NAME")
    handover.add_argument("--as-known-at", type=moment, metavar="T", help="only what was recorded by then")
    handover.add_argument("--close", action="store_true", help="keep it in the ledger as printed, never altered")
    handover.add_argument("--blank", action="store_true", help="the empty form, to fill in by hand")
    handovers = command("handovers", "the closed handovers; with an id, one of them as it was printed")
    handovers.add_argument("id", nargs="?", help="a closed handover's id")
    handovers.add_argument("--out", type=Path, metavar="FILE", help="where its PDF goes")
    _may_replace(handovers)
    picture = command("picture", "an episode's panels or acid-base map, or a comparison, as a picture")
    picture.add_argument("episode", nargs="+", help="one; two to eight for a comparison")
    picture.add_argument("--what", choices=("panels", "map", "compare"), default="panels")
    picture.add_argument("--out", type=Path, required=True, metavar="FILE", help=".png, .svg or .pdf")
    _may_replace(picture)
    picture.add_argument("--panels", default="", metavar="NAME", help="a set of panels by name, or its .toml file")
    picture.add_argument("--size", type=size, metavar="WxH", help="in pixels of 1/96 inch (1280x800)")
    picture.add_argument("--theme", choices=("light", "dark"), default="light")
    _moments(picture)
    screens = command("screens", "a PNG of each screen of the window, of the sample shift unless --store is given")
    screens.add_argument("--out", type=Path, required=True, metavar="FOLDER")


def _safety(command: Command) -> None:
    verify = command("verify", "check the store: file, chain, safeguards, rules")
    verify.add_argument("--witness", type=Path, metavar="FILE",
                        help="check that every head this file was given is still there")  # fmt: skip
    verify.add_argument("--add-witness", type=Path, metavar="FILE",
                        help="if the store is sound, add its head to this file")  # fmt: skip
    backup = command("backup", "write a backup while others go on working", "backup")
    backup.add_argument("file", type=Path)
    restore = command("restore", "make a new store of a backup; nothing is overwritten", "restore")
    restore.add_argument("file", type=Path, help="the backup")
    restore.add_argument("--against", type=Path, metavar="OLD", help="say what this old store holds beyond it")
    salvage = command("salvage", "save what can be read of a damaged store into a new one")
    salvage.add_argument("old", type=Path, help="the damaged store; it is not changed")
    salvage.add_argument("new", type=Path, help="the store to make")


def _files(command: Command) -> None:
    export = command("export", "write entries and device samples as a log file (CSV) that intake takes")
    export.add_argument("--out", type=Path, required=True, metavar="FILE")
    _may_replace(export)
    export.add_argument("--format", choices=("csv", "fhir"), default="", help="log CSV, or FHIR R4 (for .json)")
    export.add_argument("--episode", action="append", default=[], help="only this one; may be repeated")
    export.add_argument("--channel", action="append", default=[], help="only this one, e.g. ph; may be repeated")
    export.add_argument("--from", dest="start", type=moment, metavar="T", help="only values from then on")
    export.add_argument("--to", dest="end", type=moment, metavar="T", help="only values up to then")
    export.add_argument("--as-known-at", type=moment, metavar="T", help="only what was recorded by then")
    export.add_argument("--dictionary", action="store_true", help="write the data dictionary beside it")
    export.add_argument("--deidentified", action="store_true",
                        help="without labels, texts, names and true dates; says what remains")  # fmt: skip
    taken = command("taken", "the files that were taken in; withdraw one whole")
    taken.add_argument("--withdraw", default="", metavar="ID", help="withdraw all that this file brought")
    channels = command("channels", "the channels that a line, a file or a mapping may name, with units and limits")
    channels.add_argument("word", nargs="?", default="", help="only those whose key, name or choices hold it")
    mapping = command("mapping", "how tables are read: propose for a file, put, list, show, forget")
    mapping.add_argument("what", choices=("list", "show", "propose", "put", "forget"))
    mapping.add_argument("subject", nargs="?", help="a file (propose, put) or a name (show, forget)")
    mapping.add_argument("--name", default="", help="the name to keep it by")
    _about_writing(mapping)


def _running_the_ward(command: Command) -> None:
    archive = command("archive", "ended episodes: list, copy into an archive, remove after the retention time")
    archive.add_argument("what", choices=("list", "write", "remove", "retention"))
    archive.add_argument(
        "subjects",
        nargs="*",
        help="write: FILE EPISODE...; remove: EPISODE... (none: closed handovers past their time alone); "
        "retention: DAYS",
    )
    people = command("people", "who may sign in: list, add, retire, give a new PIN")
    people.add_argument("what", choices=("list", "add", "retire", "pin"))
    people.add_argument("initials", nargs="?", default="", help="whom it concerns")
    people.add_argument("--lead", action="store_true", help="add as ward lead: policy, people, restore, removal")
    people.add_argument("--new-pin-fd", type=int, metavar="N", help="read the new PIN from this descriptor")
    people.add_argument("--recovery-fd", type=int, metavar="N",
                        help="pin: the store's recovery code, where every ward lead forgot theirs")  # fmt: skip
    policy = command("policy", "show the policy in force, or check or put in force a policy file")
    policy.add_argument("what", choices=("show", "check", "put", "history"))
    policy.add_argument("file", nargs="?", type=Path)


class _Parser(argparse.ArgumentParser):
    """Says what was wrong on one line: six lines of usage would push it out of sight."""

    def error(self, message: str) -> NoReturn:
        print(f"luffmark: {message} ({self.prog} --help tells more)", file=sys.stderr)
        self.exit(WRONG_USAGE)


def _common() -> _Parser:
    """What may stand before or after any command."""
    common = _Parser(add_help=False, argument_default=argparse.SUPPRESS)
    group = common.add_argument_group("everywhere")
    group.add_argument("--store", type=Path, metavar="PATH", help="the store's file (default: your data folder)")
    group.add_argument("--by", type=initials, metavar="INITIALS", help="who does it (default: your login name)")
    group.add_argument("--passphrase-fd", type=int, metavar="N", help="read the passphrase from this descriptor")
    group.add_argument("--pin-fd", type=int, metavar="N", help="read the PIN of --by from this descriptor")
    group.add_argument("--json", action="store_true", help="answer in JSON")
    group.add_argument("--gas-unit", choices=("mmHg", "kPa"), help="unit of gas pressures in text")
    group.add_argument("--zone", metavar="ZONE", help="time zone of wall-clock times (default: this computer's)")
    return common


def _may_replace(command: argparse.ArgumentParser) -> None:
    command.add_argument("--replace", action="store_true", help="write over a file that is there already")


def _moments(command: argparse.ArgumentParser) -> None:
    command.add_argument("--as-of", type=moment, metavar="T", help="ignore what happened later (default: now)")
    command.add_argument("--as-known-at", type=moment, metavar="T", help="ignore what was recorded later")


def moment(text: str) -> Instant:
    """An instant as ISO 8601 with offset.

    >>> moment("1970-01-01T00:00:00Z")
    Traceback (most recent call last):
    argparse.ArgumentTypeError: The time '1970-01-01T00:00:00Z' is out of range. Accepted: years 1990 to 2099.
    """
    from app.words import sentence
    from core.record.instant import parse

    try:
        return parse(text)
    except RecordError as error:
        raise argparse.ArgumentTypeError(sentence(error.message)) from None


def initials(text: str) -> str:
    """Who does it: never nobody.

    >>> initials(" AB ")
    'AB'
    """
    if not text.strip():
        raise argparse.ArgumentTypeError(f"'{text}' names nobody. Accepted: initials, e.g. AB")
    return text.strip()


def size(text: str) -> tuple[int, int]:
    """A picture's width and height in pixels.

    >>> size("1280x800")
    (1280, 800)
    """
    width, _, height = text.lower().partition("x")
    if not (width.isdigit() and height.isdigit() and 200 <= int(width) <= 20000 and 200 <= int(height) <= 20000):
        raise argparse.ArgumentTypeError(f"'{text}' is no size. Accepted: WIDTHxHEIGHT, 200 to 20000 each")
    return int(width), int(height)


class _Version(argparse.Action):
    """Looks the version up only when it is asked for: that is slow."""

    def __call__(self, parser: argparse.ArgumentParser, *_: object) -> None:
        from importlib.metadata import PackageNotFoundError, version

        try:
            print(f"luffmark {version('luffmark')}")
        except PackageNotFoundError:
            print("luffmark (not installed)")
        parser.exit(DONE)


if __name__ == "__main__":
    sys.exit(main())
