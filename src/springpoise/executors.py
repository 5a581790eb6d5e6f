"""Work in chunks, done here or by the workers of an executor, with the same result."""

from __future__ import annotations

import pickle
from collections import deque
from collections.abc import Callable
from concurrent.futures import Executor, Future
from functools import lru_cache
from typing import Any, Protocol, TypeVar

import numpy as np

from springpoise.errors import InputTypeError

__all__ = ["Job", "check_executor", "run"]

WORKERS = 8
"""How many workers there are where an executor does not say."""

LONGEST, AHEAD = 16, 256
"""Chunks of a task at the most, since one that has begun is not interrupted; tasks that are handed in ahead."""

_Part = TypeVar("_Part")


class Job(Protocol[_Part]):
    """What the workers do: pickles, and depends on nothing but itself and the chunk's number."""

    def chunk(self, index: int) -> _Part:
        """The result of one chunk."""
        ...

    def joined(self, parts: list[_Part]) -> _Part:
        """The results of several chunks, in order, as one; however they are grouped on the way."""
        ...


def check_executor(executor: Any) -> None:
    """Refuse what is no executor.

    Raises
    ------
    InputTypeError
        Neither None nor an executor with the interface of ``concurrent.futures``.
    """
    if executor is not None and (isinstance(executor, type) or not callable(getattr(executor, "submit", None))):
        raise InputTypeError(f"executor must be an executor of concurrent.futures or None, got {executor!r}")


def run(
    job: Job[_Part], chunks: int, executor: Executor | None, report: Callable[[int], object] = lambda done: None
) -> _Part:
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
    report
        Is told how many chunks are done, now and then.

    Raises
    ------
    InputTypeError
        Something that is no executor.
    """
    check_executor(executor)
    workers = getattr(executor, "_max_workers", WORKERS)  # the pools of the standard library have it
    bounds = _tasks(chunks, workers)
    parts: list[_Part] = []

    def done(part: _Part) -> None:
        parts.append(part)
        report(bounds[len(parts) - 1][1])

    if executor is None:
        for first, last in bounds:
            done(_part(job, first, last))
        return job.joined(parts)
    payload = pickle.dumps(job)
    ahead: deque[Future[Any]] = deque()
    try:
        for first, last in bounds:
            # One result for each task, whoever computed it and however often it was begun. Only so many are
            # handed in at a time: an interrupt while a pool takes one in can leave the pool waiting for ever.
            if len(ahead) >= AHEAD:
                done(ahead.popleft().result())
            ahead.append(executor.submit(_work, payload, first, last))
        while ahead:
            done(ahead.popleft().result())
    except BaseException:  # also an interrupt: what has not begun is not begun any more
        for future in ahead:
            future.cancel()
        raise
    return job.joined(parts)


def _tasks(chunks: int, workers: int) -> list[tuple[int, int]]:
    """First chunk of each task and the chunk behind its last: long ones, then shorter ones, so that all end together."""
    bounds = []
    first = 0
    while first < chunks:
        share = -(-(chunks - first) // (2 * workers))
        last = min(first + min(share, LONGEST), chunks)
        bounds.append((first, last))
        first = last
    return bounds


@lru_cache(maxsize=2)
def _loaded(payload: bytes) -> Any:
    """The job of a payload, so that a worker compiles its program once."""
    # A large array, made and dropped, teaches the C library's allocator to keep what is given back.
    # Otherwise the arrays of each chunk come back from the system page by page, a fifth of all time.
    np.empty(2**21)
    return pickle.loads(payload)


def _work(payload: bytes, first: int, last: int) -> Any:
    """Chunks ``first`` to ``last - 1`` of a job, on a worker."""
    return _part(_loaded(payload), first, last)


def _part(job: Job[_Part], first: int, last: int) -> _Part:
    return job.joined([job.chunk(index) for index in range(first, last)])
