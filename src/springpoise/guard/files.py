"""Mechanism files on disk: read with every doubt voiced, written whole or not at all."""

from __future__ import annotations

import contextlib
import os
import stat
import tomllib
from pathlib import Path
from typing import Any

from springpoise.errors import InputTypeError, SpringpoiseError
from springpoise.guard.document import PoiseFile
from springpoise.guard.format.place import Place
from springpoise.guard.format.reading import document_of, tables_of
from springpoise.guard.format.rendering import merged, rendered
from springpoise.writing import write_whole

__all__ = ["dump", "load", "read_bytes", "save", "text_of"]

LARGEST_FILE = 1_000_000
"""A mechanism file has at most so many bytes."""

LONGEST_LINE = 10_000
"""A line has at most so many characters: a longer one holds no key that a person wrote."""


def load(path: str | os.PathLike[str]) -> PoiseFile:
    """Read a mechanism file.

    Parameters
    ----------
    path
        Path of a ``.poise.toml`` file.

    Returns
    -------
    PoiseFile

    Raises
    ------
    PoiseFileError
        The file cannot be read as it stands: missing, too large, not TOML, an unknown or missing
        key, a value out of range or without its unit. The message names the file, the path of
        keys (entries of lists counted from 1, such as ``springs[1].spring.rate``) and the value.
    InputTypeError
        ``path`` is no path.

    Examples
    --------
    >>> from springpoise import guard
    >>> guard.load("nowhere.poise.toml")
    Traceback (most recent call last):
        ...
    springpoise.errors.PoiseFileError: nowhere.poise.toml: cannot be read: No such file or directory
    """
    if not isinstance(path, str | os.PathLike):
        raise InputTypeError(f"path must be the path of a file, got {path!r}")
    file = Path(path)
    place = Place(str(path), folder=file.parent)
    raw = read_bytes(file, LARGEST_FILE)
    try:
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise place.error(
            f"is not UTF-8 text: byte {error.start + 1} is {raw[error.start : error.start + 1]!r}"
        ) from error
    return read_text(text, place, path=file)


def read_text(text: str, place: Place, *, path: Path | None = None) -> PoiseFile:
    """The document that a text describes; arguments and errors as :func:`load`."""
    if not text.strip():
        raise place.error("is empty")
    for number, line in enumerate(text.splitlines(), start=1):
        if len(line) > LONGEST_LINE:
            raise place.error(f"line {number} has {len(line)} characters, more than {LONGEST_LINE}")
    try:
        tables = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise place.error(f"is not TOML: {error}") from error
    except RecursionError as error:
        raise place.error("is nested too deeply") from error
    except ValueError as error:  # a number or a date that Python itself refuses
        raise place.error(f"is not TOML: {error}") from error
    try:
        return document_of(tables, place, path=path, source=text)
    except RecursionError as error:
        raise place.error("is nested too deeply") from error


def read_bytes(file: Path, largest: int) -> bytes:
    """The bytes of a regular file that is not too large.

    Raises
    ------
    PoiseFileError
        It is missing, no regular file, too large, or may not be read.
    """
    place = Place(str(file))
    try:
        mode = os.stat(file).st_mode
        raw = b""
        if stat.S_ISREG(mode):  # anything else might never end
            with open(file, "rb") as stream:
                raw = stream.read(largest + 1)
    except OSError as error:
        raise place.error(f"cannot be read: {error.strerror or error}") from error
    except ValueError as error:  # a NUL in the name
        raise place.error(f"cannot be read: {error}") from error
    if not stat.S_ISREG(mode):
        raise place.error("is a folder, not a file" if stat.S_ISDIR(mode) else "is not a regular file")
    if len(raw) > largest:
        raise place.error(f"has more than {largest} bytes")
    return raw


def dump(document: PoiseFile) -> str:
    """The text of a mechanism file that says what a document says.

    Numbers are written so that they read back as exactly the same.

    Raises
    ------
    InputError
        A part of a kind that files do not know, or one with arrays for values.

    Examples
    --------
    >>> from springpoise import Arm, Body, Friction, Mechanism, guard
    >>> lift = Mechanism(Arm(Body("2 kg", (0.35, 0))), friction=Friction("0.2 N*m"), travel=("-60 deg", "75 deg"))
    >>> "travel" in guard.dump(guard.PoiseFile(mechanism=lift))
    True
    """
    return rendered(tables_of(document))


def save(document: PoiseFile, path: str | os.PathLike[str]) -> None:
    """Write a document to a file, whole or not at all.

    Comments and order of the file that the document was read from are kept, also where some of
    its values have changed since.

    Parameters
    ----------
    document
        The document.
    path
        Where to write; a file that is there is replaced in one step.

    Raises
    ------
    InputError
        As :func:`dump`.
    PoiseFileError
        The file cannot be written; what was there before is untouched.
    """
    target = Path(path)
    write_whole(text_of(document, folder=target.parent), target)


def text_of(document: PoiseFile, opening: str = "", folder: Path | None = None) -> str:
    """The text that :func:`save` writes into a folder, with a comment in front where one is given.

    Names of other files stay in it where they mean the same from that folder.
    """
    after = tables_of(document)
    place = Place(document.called, folder=document.folder)
    there = place if folder is None else Place(document.called, folder=folder)
    if document.source is not None:
        with contextlib.suppress(SpringpoiseError):
            before: dict[str, Any] = tables_of(read_text(document.source, place))
            text = merged(document.source, before, after, opening)
            if read_text(text, there) == document:
                return text
    head = "".join(f"# {line}\n" for line in opening.splitlines())
    return f"{head}\n{rendered(after)}" if head else rendered(after)
