"""Solve many cases at once, on processes of this machine or on any executor, and tell of each what came of it.

A case whose process dies is put aside and tried once more when nothing else runs, because a process may die of what
its neighbours took; if it dies again, that is what came of it. All else goes on.
"""

import os
import signal
import threading
import time
from collections import deque
from collections.abc import Callable, Hashable, Iterable, Iterator
from concurrent.futures import (
    FIRST_COMPLETED,
    BrokenExecutor,
    CancelledError,
    Executor,
    Future,
    ProcessPoolExecutor,
    wait,
)
from contextlib import contextmanager, nullcontext
from dataclasses import dataclass
from typing import Any

from axicfd.case.model import Case
from axicfd.errors import AxicfdError
from axicfd.mesh.build import Family
from axicfd.results.result import Nested, Result
from axicfd.results.uncertainty import Floor

SOLVED, NOT_CONVERGED, REFUSED, FAILED = STATUSES = "solved", "not converged", "refused", "failed"

# Each process solves alone; threads of its libraries would only wait for each other.
ONE_THREAD = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "NUMBA_NUM_THREADS")
AT_ONCE_ELSEWHERE = 500  # cases handed to an executor at a time: enough to keep a cluster busy
STARTS = 3  # of a process that dies before it has begun
GUARD = 'A script puts its statements under `if __name__ == "__main__":`.'
LOOK_EVERY = 1.0  # seconds; waiting without an end could not be interrupted on every system


@dataclass(frozen=True)
class Job:
    """A case to solve. key : names it to the caller        like : meshes it takes over, as in `pipeline.solve`"""

    key: Hashable
    case: Case
    like: Family | None = None


@dataclass(frozen=True)
class Outcome:
    """What came of a job.

    status  : one of STATUSES        message : why, where it is not solved, else empty
    answer  : what `keep` made of the Result; None where there is no Result
    seconds : wall time in its process
    """

    key: Hashable
    status: str
    message: str
    answer: Any
    seconds: float


@dataclass(frozen=True)
class Answer:
    """What differences and tables need of a Result, small enough to travel: its headline, in full and per mesh."""

    summary: dict[str, Any]
    nested: tuple[Nested, ...]
    floor: Floor


def headline(result: Result) -> Answer:
    """The default of `keep`: curves and fields stay behind."""
    return Answer(result.summary, tuple(Nested(nested.tree, {}) for nested in result.nested), result.floor)


def run(
    jobs: Iterable[Job],
    on_done: Callable[[Outcome], Any],
    *,
    keep: Callable[[Result], Any] = headline,
    workers: int | None = None,
    executor: Callable[[], Executor] | None = None,
) -> None:
    """Solve the jobs in any order; `on_done` is called here, in the caller's process, with each outcome.

    keep     : function of a module, called in the worker; what it returns travels back
    workers  : processes on this machine, by default one per core; each lives until the end
    executor : makes an executor to use instead of processes of this machine
    An interruption ends the processes and leaves nothing behind but the outcomes told of so far.
    """
    waiting = deque(jobs)
    if not waiting:
        return
    if executor is None:
        refuse_within_a_worker()
        warm_up()
        lanes = [_Lane(_own_process, 1) for _ in range(min(workers or usable_cores(), len(waiting)))]
    else:
        lanes = [_Lane(executor, AT_ONCE_ELSEWHERE, own=False)]
    try:
        for lane in lanes:
            lane.begin()
        died: list[Job] = []
        _work(lanes, waiting, keep, on_done, lambda job, why: died.append(job))
        for job in died:
            _work(lanes[:1], deque([job]), keep, on_done, lambda job, why: on_done(_dead(job, why)))
    except BaseException:
        for lane in lanes:
            lane.kill()
        raise
    finally:
        for lane in lanes:
            lane.end()


def usable_cores() -> int:
    """Cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def warm_up() -> None:
    """Compile the kernels once here, before several processes would each compile them."""
    from axicfd.solver.warm_up import warm_up

    warm_up()


def refuse_within_a_worker() -> None:
    """A script that starts processes outside `if __name__ == "__main__":` starts itself again in each of them."""
    from multiprocessing import parent_process

    if parent_process() is not None:
        raise AxicfdError(
            "many cases are solved on processes of their own, and this script would start them again within each. "
            + GUARD
        )


# ------------------------------------------------------------------------------------------- in the worker


def solved(job: Job, keep: Callable[[Result], Any]) -> Outcome:
    """Solve one job; whatever goes wrong is an outcome."""
    from axicfd.pipeline import solve

    begun = time.perf_counter()
    status, message, answer = SOLVED, "", None
    try:
        result = solve(job.case, like=job.like)
        if result.summary.get("refused"):
            status, message = REFUSED, str(result.summary["refused"])
        elif not result.converged:
            residual, iterations = result.summary["residual"], result.summary["iterations"]
            status, message = NOT_CONVERGED, f"residual {residual:.1e} after {iterations} iterations"
        answer = keep(result)
    except AxicfdError as why:
        status, message = REFUSED, str(why)
    except MemoryError:
        status, message = FAILED, "not enough memory for its mesh"
    except Exception as fault:
        status, message = FAILED, f"{type(fault).__name__}: {fault}"
    return Outcome(job.key, status, message, answer, time.perf_counter() - begun)


def _ready() -> int:
    """Load what a solve needs; the process's number."""
    import axicfd.pipeline  # noqa: F401

    return os.getpid()


def _settle() -> None:
    """The caller alone answers to an interruption, and a process whose caller was killed ends too."""
    from multiprocessing import connection, parent_process

    signal.signal(signal.SIGINT, signal.SIG_IGN)
    caller = parent_process()
    if caller is not None:

        def end_with(sentinel: int) -> None:
            connection.wait([sentinel])
            os._exit(1)

        threading.Thread(target=end_with, args=(caller.sentinel,), daemon=True).start()


# ------------------------------------------------------------------------------------------- in the caller


@dataclass
class _Lane:
    """An executor and how many jobs it has at a time. A process of our own is one lane, so that its death is known
    to be that of its job.
    """

    make: Callable[[], Executor]
    at_once: int
    own: bool = True
    running: int = 0
    _executor: Executor | None = None
    _ready: Future | None = None

    def begin(self) -> None:
        """Start the executor, without waiting for it."""
        with _one_thread() if self.own else nullcontext():
            self._executor = self.make()
            self._ready = self._executor.submit(_ready) if self.own else None

    def submit(self, *work: Any) -> Future:
        """Hand out work; a process that died with nothing to do is replaced."""
        future = self._submitted(*work)
        self.running += 1
        return future

    def _submitted(self, *work: Any) -> Future:
        if self._ready is not None:
            self._wait_until_ready()
        assert self._executor is not None
        try:
            return self._executor.submit(*work)
        except BrokenExecutor:
            if not self.own:
                raise
            self.mend()
            return self._submitted(*work)

    def mend(self) -> None:
        """Another process in place of a dead one."""
        if self.own:
            self.end()
            self.begin()

    def kill(self) -> None:
        """End what runs at once."""
        if self.own and self._ready is not None and self._ready.done() and self._ready.exception() is None:
            try:
                os.kill(self._ready.result(), signal.SIGTERM)
            except OSError:
                pass  # it is gone already

    def end(self) -> None:
        if self._executor is not None:
            self._executor.shutdown(wait=self.own)  # an executor of a cluster then gives up what still runs there
            self._executor = None

    def _wait_until_ready(self) -> None:
        """Until the process has loaded what it needs; one that dies before is replaced a few times."""
        for attempt in range(STARTS):
            assert self._ready is not None
            try:
                self._ready.result()
                return
            except BrokenExecutor as why:
                if attempt == STARTS - 1:
                    raise AxicfdError(f"no process to solve on could be started: {why} {GUARD}") from None
            self.mend()


def _own_process() -> Executor:
    """One process started afresh: a copy of this one would inherit the threads of its libraries."""
    from multiprocessing import get_context

    return ProcessPoolExecutor(1, mp_context=get_context("spawn"), initializer=_settle)


def _work(
    lanes: list[_Lane],
    waiting: deque[Job],
    keep: Callable[[Result], Any],
    on_done: Callable[[Outcome], Any],
    on_death: Callable[[Job, BaseException], Any],
) -> None:
    """Keep the lanes busy until nothing waits and nothing runs."""
    running: dict[Future, tuple[_Lane, Job]] = {}

    def hand_out() -> None:
        for lane in lanes:
            while waiting and lane.running < lane.at_once:
                job = waiting.popleft()
                running[lane.submit(solved, job, keep)] = lane, job

    hand_out()
    while running:
        ended, _ = wait(running, timeout=LOOK_EVERY, return_when=FIRST_COMPLETED)
        outcomes = []
        for future in ended:
            lane, job = running.pop(future)
            lane.running -= 1
            why = _fault(future)
            if why is None:
                outcomes.append(future.result())
            else:
                lane.mend()
                on_death(job, why)
        hand_out()  # before the outcomes are told: nobody waits for the caller
        for outcome in outcomes:
            on_done(outcome)


def _fault(future: Future) -> BaseException | None:
    """Of the process or of the way there and back: a solve itself raises nothing."""
    try:
        return future.exception()
    except CancelledError:  # never asked for here
        raise AxicfdError(
            "what solves the cases gave up: the cluster may be gone. What it solved until then is kept; run again to "
            "go on."
        ) from None


def _dead(job: Job, why: BaseException) -> Outcome:
    reason = f"its process ended before the solve did, twice ({type(why).__name__})"
    return Outcome(job.key, FAILED, f"{reason}: killed, or out of memory", None, 0.0)


@contextmanager
def _one_thread() -> Iterator[None]:
    """Processes started meanwhile use one thread each."""
    before = {name: os.environ.get(name) for name in ONE_THREAD}
    os.environ.update(dict.fromkeys(ONE_THREAD, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                os.environ.pop(name, None)
            else:
                os.environ[name] = value
