"""The command line as a person meets it: what it answers, what it says on stderr, and its exit code."""

from app.cli import main


def run(capsys, *arguments: object) -> tuple[int, str, str]:
    code = main([str(a) for a in arguments])
    out, err = capsys.readouterr()
    return code, out, err
