"""Many cases on several processes: whatever happens to one leaves the others alone."""

import os
import pickle
import signal
import sys
import time
from concurrent.futures import Executor, Future, ThreadPoolExecutor

import pytest

import axicfd
from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.errors import AxicfdError
from axicfd.mesh.build import family
from axicfd.variants import runner
from axicfd.variants.runner import FAILED, NOT_CONVERGED, REFUSED, SOLVED, Job

BASE = Case(
    stream={"water": {"fluid": "water", "inlet_temperature": 300.0, "reynolds": 50.0}},
    layer=[
        {"stream": "water", "diameter": 0.01},
        {"name": "tube", "solid": "stainless steel 316", "thickness": 0.001},
    ],
    section=[{"name": "all", "length": 0.1, "outside": {"heat_flux": 100.0}}],
    mesh={"radial": 16, "axial": 32},
)


def titled(title: str, **changes) -> Job:
    return Job(title, BASE.replace({"title": title, **changes}))


def outlet(result) -> float:
    return result["stream.water.outlet_temperature_K"]


def dies_if_deadly(result) -> str:
    if result.case.title.startswith("deadly"):
        os.kill(os.getpid(), signal.SIGKILL)
    return result.case.title


def dies_once(result) -> str:
    """The title names a file that tells whether it has died before."""
    if result.case.title.startswith("/") and not os.path.exists(result.case.title):
        with open(result.case.title, "w"):
            pass
        os.kill(os.getpid(), signal.SIGKILL)
    return result.case.title


def cannot_travel(result):
    return (row for row in ())


def gathered(jobs, **options):
    found = {}
    runner.run(jobs, lambda outcome: found.update({outcome.key: outcome}), **options)
    return found


def test_a_family_and_a_result_travel_between_processes():
    meshes = family(BASE, layout(BASE))
    assert pickle.loads(pickle.dumps(meshes)) == meshes
    result = axicfd.solve(BASE)
    again = pickle.loads(pickle.dumps(result))
    assert again.summary == result.summary and again.meshes == meshes


def test_every_kind_of_end_is_told():
    jobs = [
        titled("good"),
        titled("turbulent", **{"stream.water.reynolds": 9000.0}),
        titled("stubborn", **{"solve.stop_below": 1e-13, "mesh.radial": 8, "mesh.axial": 8}),
    ]
    found = gathered(jobs, executor=lambda: ThreadPoolExecutor(1))
    assert {key: outcome.status for key, outcome in found.items()} == {
        "good": SOLVED,
        "turbulent": REFUSED,
        "stubborn": NOT_CONVERGED,
    }
    assert found["good"].message == "" and found["good"].answer.nested[-1].curves == {}
    assert "9000" in found["turbulent"].message and found["turbulent"].answer is None
    assert "residual" in found["stubborn"].message and found["stubborn"].answer is not None


def test_processes_give_what_a_solve_here_gives():
    found = gathered([titled("one"), titled("two", **{"stream.water.reynolds": 80.0})], keep=outlet, workers=2)
    assert found["one"].answer == outlet(axicfd.solve(BASE))
    assert found["two"].answer == outlet(axicfd.solve(BASE.replace({"stream.water.reynolds": 80.0})))
    assert found["one"].seconds > 0.0


@pytest.mark.slow
@pytest.mark.skipif(sys.platform == "win32", reason="no kill -9 there")
def test_a_killed_process_costs_its_own_case_only(tmp_path):
    once = str(tmp_path / "died")
    deadly = gathered([titled(name) for name in ("a", "deadly", "b", "c")], keep=dies_if_deadly, workers=2)
    assert [deadly[name].status for name in ("a", "deadly", "b", "c")] == [SOLVED, FAILED, SOLVED, SOLVED]
    assert "twice" in deadly["deadly"].message
    spared = gathered([titled(name) for name in ("a", once, "b")], keep=dies_once, workers=2)
    assert {outcome.status for outcome in spared.values()} == {SOLVED}
    assert spared[once].answer == once


@pytest.mark.slow
@pytest.mark.skipif(sys.platform == "win32", reason="no kill -9 there")
def test_a_process_killed_with_nothing_to_do_is_replaced():
    lane = runner._Lane(runner._own_process, 1)
    lane.begin()
    try:
        first = lane.submit(os.getpid).result()
        os.kill(first, signal.SIGKILL)
        time.sleep(1.0)  # until its executor knows
        assert lane.submit(os.getpid).result() != first
    finally:
        lane.end()


@pytest.mark.slow
def test_an_answer_that_cannot_travel_fails_alone():
    found = gathered([titled("one")], keep=cannot_travel, workers=1)
    assert found["one"].status == FAILED


@pytest.mark.slow
def test_what_the_caller_raises_ends_the_processes():
    def stop(outcome):
        raise KeyboardInterrupt

    begun = time.monotonic()
    with pytest.raises(KeyboardInterrupt):
        runner.run([titled("one"), titled("two"), titled("three")], stop, workers=2)
    assert time.monotonic() - begun < 60.0


def test_an_unguarded_script_is_told_what_to_write(monkeypatch):
    monkeypatch.setattr("multiprocessing.parent_process", lambda: object())
    with pytest.raises(AxicfdError, match="__main__"):
        runner.run([titled("one")], print)


def test_an_executor_that_gives_up_is_told():
    class Lost(Executor):
        def submit(self, *work):
            future = Future()
            future.cancel()
            future.set_running_or_notify_cancel()
            return future

    with pytest.raises(AxicfdError, match="the cluster may be gone"):
        gathered([titled("one")], executor=Lost)


def test_nothing_to_do_starts_nothing(monkeypatch):
    monkeypatch.setattr(runner, "_own_process", None)
    assert gathered([]) == {}


def test_threads_of_libraries_are_set_for_the_processes_only(monkeypatch):
    monkeypatch.setenv("OMP_NUM_THREADS", "7")
    monkeypatch.delenv("MKL_NUM_THREADS", raising=False)
    with runner._one_thread():
        assert os.environ["OMP_NUM_THREADS"] == os.environ["MKL_NUM_THREADS"] == "1"
    assert os.environ["OMP_NUM_THREADS"] == "7" and "MKL_NUM_THREADS" not in os.environ
