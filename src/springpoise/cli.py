"""The ``springpoise`` command: thin, over ``springpoise.guard``."""

from __future__ import annotations

import argparse
import contextlib
import json
import os
import sys
import traceback
import warnings
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any, NamedTuple, NoReturn

__all__ = ["main"]

HOLDS, FAILS, UNREADABLE, INTERRUPTED = 0, 1, 2, 130

SUFFIX = ".poise.toml"
WRITTEN_BY_DESIGN = "Solved by springpoise design from "
"""How a solved file begins; only such a file is ever written over."""

DESCRIPTION = "Balance gravity-loaded arms with springs: find what a mechanism file leaves open, and judge its limits."

EXIT_CODES = """\
exit codes:
  0  all limits hold
  1  a limit fails, or nothing fits what the file asks for
  2  a file cannot be read or written, or states nothing to judge
"""

DESIGN = """\
Find the springs and mounts that FILE leaves open in its [design] table, print a report to build
from, and write the complete mechanism to NAME.solved.poise.toml beside FILE. FILE itself is never
changed. A design that breaks a limit is written too, and the exit code says so.
"""

CHECK = """\
Judge every limit that each FILE states. A file without limits counts as unreadable, so that a
check that checks nothing does not pass by mistake; --allow-empty lets it pass.
"""


class _Answer(NamedTuple):
    """What a command has to say."""

    code: int
    text: str
    data: dict[str, Any]
    complaints: tuple[str, ...] = ()


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command.

    Parameters
    ----------
    argv
        Arguments without the program's name; None for those of the process.

    Returns
    -------
    int
        0 where all limits hold, 1 where one fails or nothing fits, 2 where a file cannot be read
        or written or states nothing to judge, 130 where the user interrupts.

    Raises
    ------
    SystemExit
        Wrong arguments (code 2), ``--help`` and ``--version`` (code 0), as usual with argparse.
    """
    for stream in (sys.stdout, sys.stderr):
        with contextlib.suppress(AttributeError, OSError):
            stream.reconfigure(errors="replace")  # type: ignore[union-attr]
    arguments = _parser().parse_args(argv)
    try:
        with _warnings_told():
            answer: _Answer = arguments.run(arguments)
    except KeyboardInterrupt:
        answer = _refusal("interrupted", INTERRUPTED)
    except Exception as error:  # a person gets a message, never a traceback
        answer = _refusal(_explained(error), UNREADABLE)
    return _told(answer, as_json=arguments.json)


def _design(arguments: argparse.Namespace) -> _Answer:
    from springpoise import guard
    from springpoise.guard.files import text_of
    from springpoise.writing import write_whole

    source = Path(arguments.file)
    document = guard.load(source)
    target = Path(arguments.output) if arguments.output is not None else _solved_name(source)
    _check_target(source, target)
    found = guard.design(document, progress=False if arguments.json else None)
    lines = [str(found)]
    if found.solved is not None:
        opening = f"{WRITTEN_BY_DESIGN}{source.name}. Solving again writes over this file."
        write_whole(text_of(found.solved, opening, target.parent), target)
        lines.append(f"Written: {target}. Judge it with: springpoise check {target}")
    else:
        lines.append("Nothing was written.")
    data = {"file": str(source), "solved_file": str(target) if found.solved is not None else None, **found.to_dict()}
    return _Answer(HOLDS if found.success else FAILS, "\n\n".join(lines), data)


def _check(arguments: argparse.Namespace) -> _Answer:
    from springpoise import guard
    from springpoise.errors import SpringpoiseError

    code, texts, files, complaints = HOLDS, [], [], []
    for name in arguments.files:
        try:
            report = guard.check(name)
        except (SpringpoiseError, OSError) as error:
            code = UNREADABLE
            complaints.append(_explained(error))
            files.append({"file": name, "holds": False, "error": _explained(error)})
            continue
        texts.append(str(report))
        files.append({"file": name, **report.to_dict()})
        if report.failures:
            code = max(code, FAILS)
        elif not report.verdicts and not arguments.allow_empty:
            code = UNREADABLE
            complaints.append(f"{name}: {report.status}; give it [[limits]], or pass --allow-empty")
    data = {"holds": code == HOLDS, "files": files}
    return _Answer(code, "\n\n".join(texts), data, tuple(complaints))


def _solved_name(source: Path) -> Path:
    stem = source.name.removesuffix(SUFFIX) if source.name.endswith(SUFFIX) else source.stem
    return source.with_name(f"{stem}.solved{SUFFIX}")


def _check_target(source: Path, target: Path) -> None:
    """Whether the solved file may be written there: never over the original or a file of other origin."""
    from springpoise.errors import PoiseFileError

    if not target.exists():
        return
    if os.path.samefile(source, target):
        raise PoiseFileError(
            f"{target}: is the file to be solved, which is never written over; choose another --output"
        )
    first = ""
    if target.is_file():
        with open(target, encoding="utf-8", errors="replace") as stream:
            first = stream.readline(200)
    if WRITTEN_BY_DESIGN not in first:
        raise PoiseFileError(
            f"{target}: is there already and was not written by springpoise design; choose another --output or remove it"
        )


# ------------------------------------------------------------------------------------------------
# telling


def _refusal(text: str, code: int) -> _Answer:
    return _Answer(code, "", {"error": text}, (text,))


def _explained(error: BaseException) -> str:
    """What went wrong, for a person."""
    from springpoise.errors import SpringpoiseError

    if isinstance(error, SpringpoiseError):
        return str(error)
    if isinstance(error, OSError):
        where = f"{error.filename}: " if error.filename else ""
        return f"{where}{error.strerror or error}"
    last = traceback.extract_tb(error.__traceback__)[-1]
    place = f"{Path(last.filename).name}, line {last.lineno}" if last else "an unknown place"
    return f"unexpected {type(error).__name__} in {place}: {error}; this is a defect of springpoise, please report it"


def _told(answer: _Answer, *, as_json: bool) -> int:
    try:
        if as_json:
            print(json.dumps({"exit_code": answer.code, **answer.data}, indent=2, allow_nan=False))
        else:
            if answer.text:
                print(_printable(answer.text))
            sys.stdout.flush()
            for complaint in answer.complaints:
                print(_printable(f"springpoise: {complaint}"), file=sys.stderr)
        sys.stdout.flush()
    except BrokenPipeError:  # whoever read has seen enough
        with contextlib.suppress(OSError, ValueError):
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    return answer.code


@contextlib.contextmanager
def _warnings_told() -> Iterator[None]:
    """What springs warn of while a file is read, in words and not with a line of code; each once."""
    from springpoise.springs import SpringWarning

    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always", SpringWarning)
        try:
            yield
        finally:
            springs = [one for one in caught if issubclass(one.category, SpringWarning)]
            others = [one for one in caught if one not in springs]
    for text in dict.fromkeys(str(one.message) for one in springs):
        print(_printable(f"springpoise: warning: {text}"), file=sys.stderr)
    for one in others:
        warnings.warn_explicit(one.message, one.category, one.filename, one.lineno)


def _printable(text: str) -> str:
    """A file's own text without what would steer a terminal."""
    return "".join(c if c.isprintable() or c == "\n" else "?" for c in text)


# ------------------------------------------------------------------------------------------------
# arguments


class _Version(argparse.Action):
    """``--version``, which looks the version up only when asked."""

    def __init__(self, option_strings: Sequence[str], dest: str, **others: Any) -> None:
        super().__init__(option_strings, dest, nargs=0, help="print the version and leave")

    def __call__(self, parser: argparse.ArgumentParser, *_: Any) -> NoReturn:
        from importlib.metadata import PackageNotFoundError, version

        try:
            print(f"springpoise {version('springpoise')}")
        except PackageNotFoundError:
            print("springpoise, not installed")
        parser.exit()


def _parser() -> argparse.ArgumentParser:
    layout = argparse.RawDescriptionHelpFormatter
    parser = argparse.ArgumentParser(
        prog="springpoise", description=DESCRIPTION, epilog=EXIT_CODES, formatter_class=layout
    )
    parser.add_argument("--version", action=_Version)
    commands = parser.add_subparsers(required=True, metavar="COMMAND")

    design = commands.add_parser(
        "design", help="find the springs and mounts that a file leaves open", description=DESIGN, epilog=EXIT_CODES,
        formatter_class=layout,
    )  # fmt: skip
    design.add_argument("file", metavar="FILE", help=f"mechanism file, NAME{SUFFIX}")
    design.add_argument(
        "-o", "--output", metavar="SOLVED", help=f"where to write the solved file (default: NAME.solved{SUFFIX})"
    )
    design.set_defaults(run=_design)

    check = commands.add_parser(
        "check", help="judge the limits that files state", description=CHECK, epilog=EXIT_CODES, formatter_class=layout
    )
    check.add_argument("files", metavar="FILE", nargs="+", help=f"mechanism file, NAME{SUFFIX}")
    check.add_argument("--allow-empty", action="store_true", help="let a file without limits pass")
    check.set_defaults(run=_check)

    for command in (design, check):
        command.add_argument("--json", action="store_true", help="print one JSON document instead of text, errors too")
    return parser
