"""Work shared by executors: the same bits, nothing done twice, nothing left behind."""

from __future__ import annotations

import os
import pickle
import signal
import subprocess
import sys
import time
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from pathlib import Path

import numpy as np
import pytest

from springpoise import Arm, Body, ExtensionSpring, Mechanism, Point, SpringMount, Straight, balance, executors
from springpoise.balance.stock import mounts
from springpoise.errors import InputTypeError
from springpoise.tolerance import Spread, adjusters, scatter
from springpoise.tolerance.chunks import CHUNK

BUILDS = 5 * CHUNK + 17
SPREADS = {
    "springs[0].spring.rate": Spread.normal("5 %"),
    "springs[0].path.first.at[1]": Spread.uniform("1 mm"),
    "linkage.bodies[0].mass": Spread.samples([1.9, 2.0, 2.2]),
}


def _arm():
    path = Straight(Point("ground", (0, 0.1)), Point("arm", (0.08, 0)))
    spring = ExtensionSpring(1200, free_length=0.05, initial_tension=10)
    return Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(spring, path), travel=(-1, 1))


def _stock(parts):
    random = np.random.default_rng(4)
    rate, free = random.uniform(200, 3000, parts), random.uniform(0.02, 0.2, parts)
    return balance.Stock(
        parts=[f"p{i}" for i in range(parts)],
        rate=rate,
        free_length=free,
        initial_tension=0.4 * rate * free,
        longest=free * random.uniform(1.5, 4, parts),
        others=[{"shelf": str(i)} for i in range(parts)],
    )


def _search(executor, parts=150, steps=6, **options):
    return balance.search_stock(
        Mechanism(Arm(Body(2, (0.35, 0.01))), travel=(-1, 1)),
        _stock(parts),
        attach_radii=np.linspace(0.04, 0.15, steps),
        anchor_heights=np.linspace(0.08, 0.3, steps),
        anchor_angles=np.linspace(1.3, 1.8, 3),
        attach_skews=(-0.2, 0.0, 0.2),
        executor=executor,
        progress=False,
        **options,
    )


def _same_scatter(executor):
    alone, shared = (
        scatter(_arm(), SPREADS, builds=BUILDS, over=[0.1, 0.7], seed=3, executor=e) for e in (None, executor)
    )
    assert shared.worst.shape == (BUILDS,)
    assert np.array_equal(alone.worst, shared.worst)
    assert np.array_equal(alone.bands, shared.bands)
    assert str(alone) == str(shared)


def _same_search(executor):
    for options in ({}, {"residual_limit": "2 N*m"}, {"residual_limit": "1e-6 N*m"}, {"least_margin": "2 m"}):
        alone, shared = (_search(e, **options) for e in (None, executor))
        assert str(alone) == str(shared)
        assert alone.rejected == shared.rejected
        for one, other in zip(
            (*alone.candidates, *alone.pareto, alone.nearest_miss),
            (*shared.candidates, *shared.pareto, shared.nearest_miss),
            strict=True,
        ):
            assert repr(one) == repr(other)  # floats to the last bit


def _pulled_straight(height, radius):
    spring = ExtensionSpring(1000, free_length=0.05, longest=0.2)
    path = Straight(Point("ground", (0, height)), Point("arm", (radius, 0)))
    return Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(spring, path), travel=(-1, 1))


def _place(executor, **options):
    bounds = {"height": (0.05, 0.2), "radius": (0.05, 0.12)}
    return balance.place(_pulled_straight, knobs=bounds, fit="rate", executor=executor, **{"starts": 3, **options})


def _same_place(executor):
    alone, shared = _place(None), _place(executor)
    assert repr(alone) == repr(shared)


def _die_once(flag, work, *arguments):
    """Ends the worker's process in the middle of its first task."""
    try:
        os.close(os.open(flag, os.O_CREAT | os.O_EXCL))
    except FileExistsError:
        return work(*arguments)
    os._exit(1)


class Mortal(Executor):
    """Another executor, one of whose workers dies."""

    def __init__(self, inner, flag):
        self.inner, self.flag = inner, flag

    def submit(self, fn, /, *args, **kwargs):
        return self.inner.submit(_die_once, self.flag, fn, *args)


STUDIES = pytest.mark.parametrize("same", [_same_scatter, _same_search, _same_place])


@pytest.fixture(autouse=True)
def _many_chunks(monkeypatch):
    monkeypatch.setattr(mounts, "CANDIDATES", 1500)


@STUDIES
@pytest.mark.parametrize("pool", [ThreadPoolExecutor, ProcessPoolExecutor])
def test_pools_give_the_same_bits(pool, same):
    with pool(2) as workers:
        same(workers)


def test_adjusters_give_the_same_bits():
    with ProcessPoolExecutor(2) as processes:
        one, other = (
            adjusters(_arm(), SPREADS, "springs[0].path.first.at[1]", builds=CHUNK + 9, over=[0.1, 0.7], executor=e)
            for e in (None, processes)
        )
    assert np.array_equal(one.rows[0].moves, other.rows[0].moves)


@pytest.mark.parametrize("candidates", [1, 700, 10**9])
def test_a_search_is_the_same_however_it_is_cut(monkeypatch, candidates):
    whole = _search(None)
    monkeypatch.setattr(mounts, "CANDIDATES", candidates)
    assert repr(_search(None)) == repr(whole)


class Here(Executor):
    """Does all at once, and remembers what it was sent."""

    def __init__(self):
        self.sent = []

    def submit(self, fn, /, *args, **kwargs):
        self.sent.append(args[0])
        future = Future()
        future.set_result(fn(*args, **kwargs))
        return future


def test_what_a_scatter_sends_is_small_and_holds_no_mechanism():
    here = Here()
    _same_scatter(here)
    assert len(set(here.sent)) == 1
    assert len(here.sent[0]) < 40_000
    assert b"Mechanism" not in here.sent[0]
    assert not isinstance(pickle.loads(here.sent[0]), Mechanism)


def test_tasks_are_handed_in_only_so_far_ahead_of_their_results(monkeypatch):
    monkeypatch.setattr(executors, "AHEAD", 2)
    here = Here()
    _same_search(here)
    assert len(here.sent) > 2

    class Waiting(Executor):
        """Begins a task when its result is asked for, and knows how many were handed in and not yet asked for."""

        def __init__(self):
            self.waiting, self.most = 0, 0

        def submit(self, fn, /, *args, **kwargs):
            self.waiting += 1
            self.most = max(self.most, self.waiting)
            future = Future()

            def result(timeout=None):
                self.waiting -= 1
                return fn(*args, **kwargs)

            future.result = result
            return future

    lazy = Waiting()
    assert str(_search(lazy)) == str(_search(None))
    assert (lazy.waiting, lazy.most) == (0, 2)


def test_what_a_search_sends_is_small_and_holds_no_names_or_prices():
    here = Here()
    _search(here)
    assert len(set(here.sent)) == 1
    assert len(here.sent) > executors.WORKERS
    assert len(here.sent[0]) < 40_000
    assert b"p149" not in here.sent[0]
    assert b"shelf" not in here.sent[0]


@pytest.mark.parametrize("study", [_same_scatter, _same_search, _same_place])
def test_a_worker_that_dies_breaks_a_process_pool_and_the_study_says_so(tmp_path, study):
    with ProcessPoolExecutor(2) as pool, pytest.raises(BrokenProcessPool):
        study(Mortal(pool, str(tmp_path / "died")))
    with ProcessPoolExecutor(2) as pool:  # another try is no other study
        study(Mortal(pool, str(tmp_path / "died")))


@pytest.mark.parametrize("executor", [2, "processes", ProcessPoolExecutor])
def test_no_executor(executor):
    message = r"executor must be an executor of concurrent\.futures or None, got"
    with pytest.raises(InputTypeError, match=message):
        scatter(_arm(), SPREADS, builds=10, executor=executor)
    with pytest.raises(InputTypeError, match=message):
        _search(executor)
    with pytest.raises(InputTypeError, match=message):
        _place(executor)


class Failing(Executor):
    """Fails at its first task, and never gets to the others."""

    def __init__(self):
        self.begun = []

    def submit(self, fn, /, *args, **kwargs):
        future = Future()
        self.begun.append(future)
        if len(self.begun) == 1:
            future.set_exception(OSError("disk full"))
        return future


@pytest.mark.parametrize(
    "study",
    [lambda e: scatter(_arm(), SPREADS, builds=BUILDS, over=[0.1], executor=e), _search, _place],
    ids=["scatter", "search", "place"],
)
def test_the_first_error_of_a_worker_comes_through_and_the_rest_is_not_begun(study):
    failing = Failing()
    with pytest.raises(OSError, match="disk full"):
        study(failing)
    assert len(failing.begun) > 1
    assert all(future.cancelled() for future in failing.begun[1:])


@pytest.mark.parametrize("workers", [1, 2, 8, 500])
@pytest.mark.parametrize("chunks", [1, 2, 49, 5000])
def test_tasks_take_every_chunk_once_and_grow_no_longer(chunks, workers):
    tasks = executors._tasks(chunks, workers)
    assert [chunk for first, last in tasks for chunk in range(first, last)] == list(range(chunks))
    lengths = [last - first for first, last in tasks]
    assert lengths == sorted(lengths, reverse=True)
    assert max(lengths) <= executors.LONGEST


def test_progress_counts_candidates_and_ends_with_all_of_them():
    for executor in (None, Here()):
        told = []
        found = balance.search_stock(
            _arm().with_springs([]), _stock(150), attach_radii=np.linspace(0.04, 0.15, 7), anchor_heights=[0.1, 0.2, 0.3],
            counts=(1, 2, 3), executor=executor, progress=lambda done, total, told=told: told.append((done, total)),
        )  # fmt: skip
        assert [total for _, total in told] == [found.considered] * len(told)
        assert [done for done, _ in told] == sorted({done for done, _ in told})
        assert told[-1] == (150 * 7 * 3 * 3,) * 2


# ------------------------------------------------------------------------------------ interrupting

LONG_RUN = """
import signal
import sys
signal.signal(signal.SIGINT, signal.default_int_handler)  # a shell may have started the tests with it ignored
from concurrent.futures import ProcessPoolExecutor
sys.path.insert(0, {folder!r})
from test_executors import SPREADS, _arm, _place, _search
from springpoise.tolerance import scatter

if __name__ == "__main__":
    with ProcessPoolExecutor(2) as processes:
        processes.submit(int).result()
        print("begun", flush=True)
        {study}
"""
LONG_STUDIES = [
    "scatter(_arm(), SPREADS, builds=200_000_000, executor=processes)",
    "_search(processes, parts=3000, steps=500)",
    "_place(processes, starts=3000)",
]


@pytest.mark.skipif(not hasattr(os, "killpg"), reason="process groups and SIGINT are POSIX")
@pytest.mark.parametrize("to_all", [False, True], ids=["to the program", "to all, as a terminal does"])
@pytest.mark.parametrize("study", LONG_STUDIES, ids=["scatter", "search", "place"])
def test_an_interrupt_leaves_no_process_behind(tmp_path, to_all, study):
    script = tmp_path / "long_run.py"
    script.write_text(LONG_RUN.format(folder=str(Path(__file__).parent), study=study))
    program = subprocess.Popen(
        [sys.executable, str(script)], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True
    )
    try:
        assert program.stdout is not None
        assert program.stdout.readline() == "begun\n"
        time.sleep(0.7)
        (os.killpg if to_all else os.kill)(program.pid, signal.SIGINT)
        _, errors = program.communicate(timeout=20)
        assert program.returncode != 0
        assert "KeyboardInterrupt" in errors
        with pytest.raises(ProcessLookupError):  # nobody of the program's group is left
            for _ in range(20):
                os.killpg(program.pid, 0)
                time.sleep(0.1)
    finally:
        if program.poll() is None:
            os.killpg(program.pid, signal.SIGKILL)


# --------------------------------------------------------------------------------------- dask


def _cluster(processes):
    distributed = pytest.importorskip(
        "distributed", reason="needs dask's distributed, one of the engines it can do without"
    )
    return distributed, distributed.LocalCluster(
        n_workers=2, threads_per_worker=1, processes=processes, dashboard_address=None, silence_logs=50
    )


@pytest.fixture(scope="module")
def worker_processes():
    distributed, cluster = _cluster(True)
    with cluster, distributed.Client(cluster) as client:
        client.run(sys.path.insert, 0, str(Path(__file__).parent))
        yield client


@STUDIES
@pytest.mark.filterwarnings("ignore")
def test_a_cluster_of_threads_gives_the_same_bits(same):
    distributed, cluster = _cluster(False)
    with cluster, distributed.Client(cluster) as client:
        same(client.get_executor())


@STUDIES
@pytest.mark.filterwarnings("ignore")
def test_a_cluster_of_processes_gives_the_same_bits(worker_processes, same):
    same(worker_processes.get_executor())


@STUDIES
@pytest.mark.filterwarnings("ignore")
def test_a_worker_that_dies_is_replaced_and_nothing_counts_twice(worker_processes, tmp_path, same):
    flag = str(tmp_path / "died")
    same(Mortal(worker_processes.get_executor(), flag))
    assert os.path.exists(flag)
