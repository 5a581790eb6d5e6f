"""A study's builds in chunks, whose draws depend on nothing but the seed and the chunk's number."""

from __future__ import annotations

from typing import Any

import numpy as np

from springpoise.errors import InputError

__all__ = ["CHUNK", "checked_builds", "checked_seed", "chunk_bounds", "chunk_count"]

CHUNK = 2048
"""Builds in a chunk. It is fixed, because the draws of a build depend on the chunk that it is in."""


def chunk_count(builds: int) -> int:
    """How many chunks there are."""
    return -(-builds // CHUNK)


def chunk_bounds(index: int, builds: int) -> tuple[int, int]:
    """The first build of a chunk, and how many it has."""
    first = index * CHUNK
    return first, min(CHUNK, builds - first)


def checked_builds(builds: Any) -> int:
    """A number of builds.

    Raises
    ------
    InputError
        Not a whole number from 1 on.
    """
    if isinstance(builds, bool) or not isinstance(builds, int | np.integer) or builds < 1:
        raise InputError(f"builds must be a whole number >= 1, got {builds!r}")
    return int(builds)


def checked_seed(seed: Any) -> int:
    """A seed.

    Raises
    ------
    InputError
        Not a whole number from 0 on.
    """
    if isinstance(seed, bool) or not isinstance(seed, int | np.integer) or seed < 0:
        raise InputError(f"seed must be a whole number >= 0, got {seed!r}")
    return int(seed)
