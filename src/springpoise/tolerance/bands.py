"""Quantiles of the torque at each pose, counted in bins so that no build has to be kept."""

from __future__ import annotations

from collections.abc import Sequence

import attrs
import numpy as np
from numpy.typing import NDArray

__all__ = ["Bins", "Counts"]

Array = NDArray[np.float64]

BINS = 512
"""Bins for each pose. Quantiles are interpolated inside their bin."""

EXTENSION = 0.5
"""How far the bins reach beyond the first builds' range, on each side, over that range [1]."""


@attrs.frozen(eq=False)
class Bins:
    """Equal bins for each pose; what lies outside counts into the first or last."""

    low: Array
    """Lower end of the first bin, shape (p,)."""
    width: Array
    """Width of a bin, shape (p,), >= 0."""

    @classmethod
    def around(cls, torques: Array) -> Bins:
        """Bins that suit the first builds, shape (n, p)."""
        low, high = np.min(torques, axis=0), np.max(torques, axis=0)
        margin = EXTENSION * (high - low)
        return cls(low - margin, (high - low + 2.0 * margin) / BINS)

    def part(self, poses: slice) -> Bins:
        """The bins of some of the poses."""
        return Bins(self.low[poses], self.width[poses])

    def count(self, torques: Array, scratch: Array) -> Counts:
        """Counts of builds of shape (p, n), all finite; ``scratch`` is an array of that shape to write to."""
        poses = self.low.size
        scale = np.divide(1.0, self.width, out=np.zeros(poses), where=self.width > 0.0)
        place = np.subtract(torques, self.low[:, None], out=scratch)
        place *= scale[:, None]
        np.clip(place, 0.0, BINS - 1.0, out=place)
        index = place.astype(np.intp)
        index += BINS * np.arange(poses)[:, None]
        counts = np.bincount(index.ravel(), minlength=poses * BINS).reshape(poses, BINS)
        least, greatest = np.min(torques, axis=1, initial=np.inf), np.max(torques, axis=1, initial=-np.inf)
        return Counts(counts.astype(np.int32), least, greatest)


@attrs.frozen(eq=False)
class Counts:
    """How many builds fall into each bin of each pose."""

    counts: NDArray[np.int32]
    """Shape (p, bins)."""
    least: Array
    """Least value at each pose, shape (p,)."""
    greatest: Array
    """Greatest value at each pose, shape (p,)."""

    @classmethod
    def side_by_side(cls, parts: Sequence[Counts]) -> Counts:
        """Those of some poses, then those of the next."""
        return cls(
            np.concatenate([part.counts for part in parts]),
            np.concatenate([part.least for part in parts]),
            np.concatenate([part.greatest for part in parts]),
        )

    @classmethod
    def total(cls, parts: Sequence[Counts]) -> Counts:
        """All together; whole numbers and extremes, so in whatever order."""
        return cls(
            np.asarray(np.sum([part.counts for part in parts], axis=0, dtype=np.int32)),
            np.min([part.least for part in parts], axis=0),
            np.max([part.greatest for part in parts], axis=0),
        )

    def quantiles(self, bins: Bins, levels: Sequence[float]) -> Array:
        """Quantiles at each pose, shape (levels, p), from the least (level 0) to the greatest (level 1); NaN of none."""
        poses = bins.low.size
        if not np.any(self.counts):
            return np.full((len(levels), poses), np.nan)
        edges = bins.low[:, None] + bins.width[:, None] * np.arange(BINS + 1)
        edges[:, 0], edges[:, -1] = self.least, self.greatest
        edges = np.clip(edges, self.least[:, None], self.greatest[:, None])
        below = np.concatenate([np.zeros((poses, 1)), np.cumsum(self.counts, axis=1, dtype=np.int64)], axis=1)
        found = np.empty((len(levels), poses))
        for pose in range(poses):
            total = below[pose, -1]
            wanted = np.asarray(levels) * total
            filled = np.concatenate([[True], np.diff(below[pose]) > 0])
            # Empty bins have no slope; a level between two builds takes the end of the lower bin.
            found[:, pose] = np.interp(wanted, below[pose][filled], edges[pose][filled])
        return found
