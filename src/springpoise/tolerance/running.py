"""Runs a study's builds chunk by chunk, here or on the workers of an executor, with the same result."""

from __future__ import annotations

import pickle
from collections import deque
from concurrent.futures import Executor, Future
from functools import lru_cache
from itertools import pairwise
from typing import Any, Protocol, TypeVar

import numpy as np

from springpoise.errors import InputError, InputTypeError

__all__ = ["CHUNK", "Job", "checked_builds", "checked_seed", "chunk_bounds", "chunk_count", "run"]

CHUNK = 2048
"""Builds in a chunk. It is fixed, because the draws of a build depend on the chunk that it is in."""

TASKS, LONGEST, AHEAD = 24, 16, 256
"""Tasks that a run is cut into, so that workers finish together; more where one had more chunks than the second.

A task that has begun is not interrupted, so that it must not be long. The third is how many are
handed in ahead of their results.
"""

_Part = TypeVar("_Part")


class Job(Protocol[_Part]):
    """What the workers do: pickles, and depends on nothing but itself and the chunk's number."""

    def chunk(self, index: int) -> _Part:
        """The result of one chunk."""
        ...

    def joined(self, parts: list[_Part]) -> _Part:
        """The results of several chunks, in order, as one; however they are grouped on the way."""
        ...


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


def run(job: Job[_Part], chunks: int, executor: Executor | None) -> _Part:
    """All chunks of a job.

    Parameters
    ----------
    job
        What to do.
    chunks
        How many chunks there are.
    executor
        Any executor with the interface of ``concurrent.futures``, of threads, processes or
        machines; None for here and now.

    Raises
    ------
    InputTypeError
        Something that is no executor.
    """
    if executor is None:
        return job.joined([job.chunk(index) for index in range(chunks)])
    if not callable(getattr(executor, "submit", None)) or isinstance(executor, type):
        raise InputTypeError(f"executor must be an executor of concurrent.futures or None, got {executor!r}")
    payload = pickle.dumps(job)
    tasks = max(min(chunks, TASKS), -(-chunks // LONGEST))
    bounds = [chunks * task // tasks for task in range(tasks + 1)]
    ahead: deque[Future[Any]] = deque()
    parts: list[_Part] = []
    try:
        for first, last in pairwise(bounds):
            # One result for each task, whoever computed it and however often it was begun. Only so many are
            # handed in at a time: an interrupt while a pool takes one in can leave the pool waiting for ever.
            if len(ahead) >= AHEAD:
                parts.append(ahead.popleft().result())
            ahead.append(executor.submit(_work, payload, first, last))
        while ahead:
            parts.append(ahead.popleft().result())
    except BaseException:  # also an interrupt: what has not begun is not begun any more
        for future in ahead:
            future.cancel()
        raise
    return job.joined(parts)


@lru_cache(maxsize=2)
def _loaded(payload: bytes) -> Any:
    """The job of a payload, so that a worker compiles its program once."""
    # A large array, made and dropped, teaches the C library's allocator to keep what is given back.
    # Otherwise the arrays of each chunk come back from the system page by page, a fifth of all time.
    np.empty(2**21)
    return pickle.loads(payload)


def _work(payload: bytes, first: int, last: int) -> Any:
    """Chunks ``first`` to ``last - 1`` of a job, on a worker."""
    job = _loaded(payload)
    return job.joined([job.chunk(index) for index in range(first, last)])
