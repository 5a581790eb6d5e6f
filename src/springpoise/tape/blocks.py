"""Run generated code over arrays, block by block."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from itertools import product
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError

__all__ = ["BLOCK", "Compiled", "run_blocks"]

BLOCK = 16384
"""Elements in a block: the handful of buffers in use, 128 KiB each, fit the second-level cache."""

# Rows shorter than this are not worth NumPy's loop over rows: everything is spread out instead.
SHORT = 16


@attrs.frozen
class Compiled:
    """A pair of generated functions, and what they write to."""

    shared: Callable[..., list[NDArray[Any]]]
    block: Callable[..., None]
    outputs: int
    numbers: int
    """Scratch buffers for floats."""
    conditions: int
    """Scratch buffers for bools."""


def run_blocks(
    sources: list[NDArray[Any]], masks: list[int], version: Callable[[tuple[bool, ...]], Compiled]
) -> list[Any]:
    """Results of a program, each of the sources' common shape; floats when that is ().

    Parameters
    ----------
    sources
        Inputs and array constants.
    masks
        Sets of sources that the program's parts depend on, as bits.
    version
        Gives the code for which of the masks are as large as the result.
    """
    full: tuple[int, ...] = sources[0].shape if sources else ()
    shape: tuple[int, ...]
    if all(source.shape == full for source in sources):
        size = math.prod(full)
        shape, sources = (size,), [source.reshape(size) for source in sources]
        code = version((True,) * len(masks))
    else:
        full = _common_shape(sources)
        shape, sources = _merged_axes(full, sources)
        size = math.prod(shape)
        code = version(tuple(_size_of(mask, shape, sources) == size for mask in masks))
    results = [np.empty(shape) for _ in range(code.outputs)]
    if size:
        with np.errstate(all="ignore"):
            _fill(results, code, sources, shape)
    if full == ():
        return [float(result[0]) for result in results]
    return [result.reshape(full) for result in results]


def _common_shape(sources: list[NDArray[Any]]) -> tuple[int, ...]:
    try:
        return np.broadcast_shapes(*(source.shape for source in sources))
    except ValueError:
        shapes = ", ".join(str(source.shape) for source in sources)
        raise InputError(f"inputs and array constants must broadcast against each other, got shapes {shapes}") from None


def _fill(results: list[NDArray[Any]], code: Compiled, sources: list[NDArray[Any]], shape: tuple[int, ...]) -> None:
    values = code.shared(*sources)
    size = math.prod(shape)
    if len(shape) > 1 and shape[-1] < SHORT:
        values = [value if value.size == 1 else np.broadcast_to(value, shape).reshape(-1) for value in values]
        results = [result.reshape(-1) for result in results]
        values = [value.reshape(-1) for value in values]
        shape = (size,)
    # Per call, so that several threads may run the same function.
    numbers = np.empty((code.numbers, min(size, BLOCK)))
    conditions = np.empty((code.conditions, min(size, BLOCK)), dtype=bool)
    if size <= BLOCK:
        code.block(*values, *results, *_shaped(numbers, shape), *_shaped(conditions, shape))
        return
    scratch: list[NDArray[Any]] = []
    scratch_shape: tuple[int, ...] = ()
    # Those that the slices have to be fitted to, because they are shorter along some axis.
    spread = [value.shape != shape for value in values]
    for where in _slices(shape):
        here = [_part(value, where) if odd else value[where] for value, odd in zip(values, spread, strict=True)]
        outputs = [result[where] for result in results]
        if outputs[0].shape != scratch_shape:
            scratch_shape = outputs[0].shape
            scratch = [*_shaped(numbers, scratch_shape), *_shaped(conditions, scratch_shape)]
        code.block(*here, *outputs, *scratch)


def _part(value: NDArray[Any], where: tuple[slice, ...]) -> NDArray[Any]:
    if value.size == 1:
        return value
    return value[tuple(part if length > 1 else slice(None) for part, length in zip(where, value.shape, strict=True))]


def _shaped(scratch: NDArray[Any], shape: tuple[int, ...]) -> list[NDArray[Any]]:
    size = math.prod(shape)
    return [buffer[:size].reshape(shape) for buffer in scratch]


def _size_of(mask: int, shape: tuple[int, ...], sources: list[NDArray[Any]]) -> int:
    """Number of elements of what depends on the sources in ``mask``."""
    shapes = [source.shape for bit, source in enumerate(sources) if mask >> bit & 1]
    return math.prod(length for axis, length in enumerate(shape) if any(own[axis] == length for own in shapes))


def _slices(shape: tuple[int, ...]) -> Iterator[tuple[slice, ...]]:
    """Index by index along the leading axes, in chunks along the next, whole along the others."""
    axis, inner = len(shape) - 1, 1
    while axis > 0 and inner * shape[axis] <= BLOCK:
        inner *= shape[axis]
        axis -= 1
    step = max(1, BLOCK // inner)
    chunks = [[slice(i, i + 1) for i in range(length)] for length in shape[:axis]]
    chunks.append([slice(i, i + step) for i in range(0, shape[axis], step)])
    rest = (slice(None),) * (len(shape) - axis - 1)
    for index in product(*chunks):
        yield index + rest


def _merged_axes(shape: tuple[int, ...], sources: list[NDArray[Any]]) -> tuple[tuple[int, ...], list[NDArray[Any]]]:
    """The same data with as few axes as possible, at least one, in the shape and in each source.

    Neighbouring axes become one where each source either has both or is spread along both.
    """
    padded = [(1,) * (len(shape) - source.ndim) + source.shape for source in sources]
    groups: list[tuple[tuple[bool, ...], list[int]]] = []
    for axis, length in enumerate(shape):
        if length == 1:
            continue
        has = tuple(own[axis] == length for own in padded)
        if groups and groups[-1][0] == has:
            groups[-1][1].append(axis)
        else:
            groups.append((has, [axis]))
    if not groups:
        return (1,), [source.reshape(1) for source in sources]
    lengths = tuple(math.prod(shape[axis] for axis in axes) for _, axes in groups)
    merged = [
        source.reshape([length if has[i] else 1 for (has, _), length in zip(groups, lengths, strict=True)])
        for i, source in enumerate(sources)
    ]
    return lengths, merged
