"""Files written whole or not at all."""

from __future__ import annotations

import contextlib
import os
import stat
import tempfile
from pathlib import Path

from springpoise.errors import PoiseFileError

__all__ = ["write_whole"]


def write_whole(text: str, path: str | os.PathLike[str]) -> None:
    """Write a text to a file in one step: into a new file beside it, which then takes its place.

    Raises
    ------
    PoiseFileError
        It cannot be written; what was there before is untouched.
    """
    target = Path(os.path.realpath(path))
    beside: str | None = None
    try:
        try:
            mode = stat.S_IMODE(os.stat(target).st_mode)
        except FileNotFoundError:
            mask = os.umask(0)
            os.umask(mask)
            mode = 0o666 & ~mask
        handle, beside = tempfile.mkstemp(prefix=f".{target.name[:80]}.", dir=target.parent)
        with os.fdopen(handle, "w", encoding="utf-8", newline="\n") as stream:
            stream.write(text)
            stream.flush()
            os.fsync(stream.fileno())
        os.chmod(beside, mode)
        os.replace(beside, target)
        beside = None
    except OSError as error:
        raise PoiseFileError(f"{os.fspath(path)}: cannot be written: {error.strerror or error}") from error
    finally:
        if beside is not None:
            with contextlib.suppress(OSError):
                os.unlink(beside)
