"""Stock search: candidates a second, how time grows, and a hundred million candidates on several processes.

    python tests/benchmarks/stock.py

prints these rows alone. Nothing is asserted here.
"""

from __future__ import annotations

import time
from collections.abc import Iterator
from concurrent.futures import Executor, ProcessPoolExecutor
from typing import Any

import numpy as np
from rows import Row, show

from springpoise import Arm, Body, Mechanism, balance
from springpoise.balance.stock.scoring import worst_residuals

ARM = Mechanism(Arm(Body(2.0, (0.35, 0.0))), travel=(-1.0, 1.0))
POSES = ARM.poses(61)
LIMIT = 0.05 * 2.0 * 9.80665 * 0.35
"""Five per cent of the peak gravity torque [N·m]."""


HARDEST = {"over": None, "pulley": balance.PulleyRoute(radius=0.012, spring_end=(-0.03, -0.45))}


def fitting_list(parts: int, longest: float) -> balance.Stock:
    """A made-up list of short springs; with a generous longest length every part fits everywhere."""
    random = np.random.default_rng(1)
    rate, free = random.uniform(200.0, 3000.0, parts), random.uniform(0.02, 0.05, parts)
    return balance.Stock(
        parts=[f"part {i}" for i in range(parts)],
        rate=rate,
        free_length=free,
        initial_tension=rate * free * random.uniform(0.0, 0.8, parts),
        longest=free + longest,
    )


def broad_list(parts: int) -> balance.Stock:
    """A made-up list as a maker's catalogue is: from short to long, each stretched to some multiple of its length."""
    random = np.random.default_rng(2)
    rate, free = np.exp(random.uniform(np.log(50.0), np.log(5000.0), parts)), random.uniform(0.02, 0.30, parts)
    longest = free * random.uniform(1.5, 3.5, parts)
    return balance.Stock(
        parts=[f"part {i}" for i in range(parts)],
        rate=rate,
        free_length=free,
        initial_tension=rate * (longest - free) * random.uniform(0.05, 0.3, parts),
        longest=longest,
    )


def grid(steps: int) -> dict[str, Any]:
    """So many values in each of the four directions of a mount."""
    return {
        "attach_radii": np.linspace(0.04, 0.16, steps),
        "anchor_heights": np.linspace(0.06, 0.30, steps),
        "anchor_angles": np.linspace(1.2, 1.9, steps),
        "attach_skews": np.linspace(-0.35, 0.35, steps),
    }


def seconds(stock: balance.Stock, mounts: dict[str, Any], repeats: int = 1, **options: Any) -> tuple[float, Any]:
    """Best time of a few searches [s], and what the last one found."""
    best, found = float("inf"), None
    for _ in range(repeats):
        began = time.perf_counter()
        found = balance.search_stock(ARM, stock, refine=0, progress=False, **mounts, **{"over": POSES, **options})
        best = min(best, time.perf_counter() - began)
    return best, found


def search_rows(parts: int = 2000, mounts: int = 40, repeats: int = 5) -> Iterator[Row]:
    """Candidates a second on one core over 61 poses; and the inner loop alone, which computes each at all of them."""
    radii, heights = np.linspace(0.05, 0.09, mounts), np.linspace(0.14, 0.20, max(1, mounts // 2))
    random = np.random.default_rng(3)
    base, pull, lever = random.normal(size=(3, 61))
    rate, offset = random.normal(size=(2, 100 * parts))
    best = float("inf")
    for _ in range(repeats):
        began = time.perf_counter()
        worst_residuals(base, pull, lever, rate, offset)
        best = min(best, time.perf_counter() - began)
    millions = rate.size / best / 1e6
    yield Row(
        "worst residual of a candidate over all poses: a second", f"{millions:.1f} million", "3 million", millions >= 3
    )
    for name, longest in (("all of them feasible", 0.5), ("some of them feasible", 0.165)):
        took, found = seconds(fitting_list(parts, longest), {"attach_radii": radii, "anchor_heights": heights}, repeats)
        millions = found.considered / took / 1e6
        yield Row(f"stock search, {name}: candidates a second", f"{millions:.1f} million", "3 million", millions >= 3)


def growth_rows(parts: int = 1000, steps: int = 6, repeats: int = 3) -> Iterator[Row]:
    """Time of a search in four directions as the list and the grid grow."""
    for many in (parts, 4 * parts, 16 * parts):
        took, found = seconds(broad_list(many), grid(steps), repeats, residual_limit=LIMIT)
        yield _growth(f"{many} springs x 2 counts x {steps**4} mounts", took, found)
    for finer in (steps + 2, steps + 4):
        took, found = seconds(broad_list(parts), grid(finer), repeats, residual_limit=LIMIT)
        yield _growth(f"{parts} springs x 2 counts x {finer**4} mounts", took, found)


def _growth(what: str, took: float, found: Any) -> Row:
    at_all_poses = found.considered - sum(found.rejected.values())
    return Row(
        f"stock search, {what}",
        f"{took:.2f} s, {1e6 * took / found.considered:.4f} s a million, {100 * at_all_poses / found.considered:.2f} % fit",
        "",
        None,
    )


def large_rows(parts: int = 5000, steps: int = 10, repeats: int = 5) -> Iterator[Row]:
    """A hundred million candidates on one core, on two processes, and on a cluster of two workers.

    The hardest case: springs behind a pulley, the usual 181 poses, and no limit that would rule any out.
    """
    stock, mounts = broad_list(parts), grid(steps)
    alone, found = seconds(stock, mounts, repeats, **HARDEST)
    millions = found.considered / 1e6
    yield Row(
        f"{millions:.0f} million candidates, one core", f"{alone:.1f} s, {alone / millions:.4f} s a million", "", None
    )
    with ProcessPoolExecutor(2) as pool:
        yield _shared("two processes", pool, stock, mounts, alone, found, repeats)
    from distributed import Client, LocalCluster

    with (
        LocalCluster(n_workers=2, threads_per_worker=1, dashboard_address=None, silence_logs=50) as cluster,
        Client(cluster) as client,
    ):
        yield _shared("a cluster of two workers", client.get_executor(), stock, mounts, alone, found, repeats)


def _shared(
    what: str, executor: Executor, stock: balance.Stock, mounts: Any, alone: float, found: Any, repeats: int
) -> Row:
    seconds(stock, grid(2), executor=executor, **HARDEST)  # the workers load what they need
    took, same = seconds(stock, mounts, repeats, executor=executor, **HARDEST)
    assert str(same) == str(found)
    millions = found.considered / 1e6
    return Row(
        f"  the same on {what}",
        f"{took:.1f} s, {took / millions:.4f} s a million, {alone / took:.2f} times faster",
        "1.7" if isinstance(executor, ProcessPoolExecutor) else "",
        alone / took >= 1.7 if isinstance(executor, ProcessPoolExecutor) else None,
    )


def stock_rows() -> Iterator[Row]:
    """All of them."""
    yield from search_rows()
    yield from growth_rows()
    yield from large_rows()


if __name__ == "__main__":
    show(stock_rows)
