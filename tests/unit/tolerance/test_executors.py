"""Scattered builds on executors: the same bits, no build twice, nothing left behind."""

from __future__ import annotations

import os
import pickle
import signal
import subprocess
import sys
import time
from concurrent.futures import Executor, ProcessPoolExecutor
from pathlib import Path

import numpy as np
import pytest

from springpoise import Arm, Body, ExtensionSpring, Mechanism, Point, SpringMount, Straight
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


def _same(executor):
    alone, shared = (
        scatter(_arm(), SPREADS, builds=BUILDS, over=[0.1, 0.7], seed=3, executor=e) for e in (None, executor)
    )
    assert shared.worst.shape == (BUILDS,)
    assert np.array_equal(alone.worst, shared.worst)
    assert np.array_equal(alone.bands, shared.bands)
    assert str(alone) == str(shared)


def test_processes_give_the_same_bits():
    with ProcessPoolExecutor(2) as processes:
        _same(processes)
        one, other = (
            adjusters(_arm(), SPREADS, "springs[0].path.first.at[1]", builds=CHUNK + 9, over=[0.1, 0.7], executor=e)
            for e in (None, processes)
        )
    assert np.array_equal(one.rows[0].moves, other.rows[0].moves)


def test_what_is_sent_is_small_and_holds_no_mechanism():
    sent = []

    class Here(Executor):
        def submit(self, fn, /, *args, **kwargs):
            from concurrent.futures import Future

            sent.append(args[0])
            future = Future()
            future.set_result(fn(*args, **kwargs))
            return future

    _same(Here())
    assert len(set(sent)) == 1
    assert len(sent[0]) < 40_000
    assert b"Mechanism" not in sent[0]
    assert not isinstance(pickle.loads(sent[0]), Mechanism)


@pytest.mark.parametrize("executor", [2, "processes", ProcessPoolExecutor])
def test_no_executor(executor):
    with pytest.raises(InputTypeError, match=r"executor must be an executor of concurrent\.futures or None, got"):
        scatter(_arm(), SPREADS, builds=10, executor=executor)


def test_the_first_error_of_a_worker_comes_through_and_the_rest_is_not_begun():
    begun = []

    class Failing(Executor):
        def submit(self, fn, /, *args, **kwargs):
            from concurrent.futures import Future

            future = Future()
            begun.append(future)
            if len(begun) == 1:
                future.set_exception(OSError("disk full"))
            return future

    with pytest.raises(OSError, match="disk full"):
        scatter(_arm(), SPREADS, builds=BUILDS, over=[0.1], executor=Failing())
    assert all(future.cancelled() for future in begun[1:])


# ------------------------------------------------------------------------------------ interrupting

LONG_RUN = """
import sys
from concurrent.futures import ProcessPoolExecutor
sys.path.insert(0, {folder!r})
from test_executors import SPREADS, _arm
from springpoise.tolerance import scatter

if __name__ == "__main__":
    with ProcessPoolExecutor(2) as processes:
        processes.submit(int).result()
        print("begun", flush=True)
        scatter(_arm(), SPREADS, builds=200_000_000, executor=processes)
"""


@pytest.mark.skipif(not hasattr(os, "killpg"), reason="process groups and SIGINT are POSIX")
@pytest.mark.parametrize("to_all", [False, True], ids=["to the program", "to all, as a terminal does"])
def test_an_interrupt_leaves_no_process_behind(tmp_path, to_all):
    script = tmp_path / "long_run.py"
    script.write_text(LONG_RUN.format(folder=str(Path(__file__).parent)))
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
        yield client


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


@pytest.mark.filterwarnings("ignore")
def test_a_cluster_of_threads_gives_the_same_bits():
    distributed, cluster = _cluster(False)
    with cluster, distributed.Client(cluster) as client:
        _same(client.get_executor())


@pytest.mark.filterwarnings("ignore")
def test_a_cluster_of_processes_gives_the_same_bits(worker_processes):
    _same(worker_processes.get_executor())


@pytest.mark.filterwarnings("ignore")
def test_a_worker_that_dies_is_replaced_and_nothing_counts_twice(worker_processes, tmp_path):
    worker_processes.run(sys.path.insert, 0, str(Path(__file__).parent))
    flag = str(tmp_path / "died")
    _same(Mortal(worker_processes.get_executor(), flag))
    assert os.path.exists(flag)
