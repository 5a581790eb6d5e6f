"""What the library raises, and nothing else.

Every message about a value reads ``Class.field must be <rule> <unit>, got <value>; hint``.
"""

from __future__ import annotations

__all__ = [
    "InputError",
    "InputTypeError",
    "NoSolution",
    "PoiseFileError",
    "SpringpoiseError",
    "UnitError",
]


class SpringpoiseError(Exception):
    """Base of everything that this library raises on purpose."""


class InputError(SpringpoiseError, ValueError):
    """A value that cannot be meant: out of range, not finite, or at odds with another value."""


class InputTypeError(SpringpoiseError, TypeError):
    """A value of a kind that cannot be read at all, such as a list where a number belongs."""


class UnitError(InputError):
    """A value whose unit is missing, unknown, misspelt or of the wrong dimension."""


class NoSolution(SpringpoiseError):
    """Raised by ``result.require()`` when a solver found nothing that meets its requirements."""


class PoiseFileError(InputError):
    """A ``.poise.toml`` or stock file that cannot be read as it stands; names the file and the key."""
