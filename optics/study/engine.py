"""Where work runs: in this process, in local processes, on a cluster or on any executor; nothing else decides that.

Work comes in points, numbered, some of which are best done together, and is handed out in chunks that take about a
second, so that handing out stays far below 5 % and a stop loses little. A worker that dies takes its chunks with it;
they are handed out again, and what kills worker after worker is named at the end.
"""

import os
import signal
import threading
import time
from collections import deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, CancelledError, Executor, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import Any

from optics.errors import InputError

CHUNK_S = 1.0
"""How long a chunk shall take: handing one out costs some milliseconds, and a stop loses no more than this."""

CHUNK_HERE_S = 0.4
ATTEMPTS = 4
"""Times that a point is tried: in a chunk, with those it goes together with, and twice alone."""

THREADS = (
    "OMP_NUM_THREADS",
    "OPENBLAS_NUM_THREADS",
    "MKL_NUM_THREADS",
    "BLIS_NUM_THREADS",
    "VECLIB_MAXIMUM_THREADS",
    "NUMEXPR_NUM_THREADS",
)

Pack = Callable[[Sequence[int]], Any]
"""Turns points into what a worker needs for them; what it returns can be pickled."""

Unit = tuple[int, ...]
"""Points that are always done together, so that the last digits of their answers do not depend on what ran when."""

Work = Callable[[Any], list[Any]]
"""A function of a module: takes what was packed and returns an answer a point."""


@dataclass(frozen=True)
class Place:
    """Where work runs.

    Parameters
    ----------
    workers
        Processes on this machine; 1 is this process alone.
    cluster
        Address of a Dask scheduler that runs already; needs the extra ``cluster``.
    executor
        Any executor of `concurrent.futures`; it is not shut down.
    """

    workers: int = 1
    cluster: str = ""
    executor: Executor | None = None

    def __post_init__(self) -> None:
        if isinstance(self.workers, bool) or not isinstance(self.workers, int) or self.workers < 1:
            raise InputError(f"workers: found {self.workers!r}, expected a whole number from 1")
        if sum((self.workers > 1, bool(self.cluster), self.executor is not None)) > 1:
            raise InputError("found more than one of workers, cluster and executor, expected one")


class UnfinishedError(Exception):
    """Some points have no answer, because whatever worked on them died again and again.

    Attributes
    ----------
    missing
        The points.
    """

    def __init__(self, missing: Sequence[int], reason: str) -> None:
        self.missing = tuple(sorted(missing))
        shown = ", ".join(map(str, self.missing[:10])) + (", ..." if len(self.missing) > 10 else "")
        super().__init__(f"{len(self.missing)} points have no answer ({shown}): {reason}")


@dataclass
class _Chunk:
    units: Sequence[Unit]
    attempts: int = 0

    @property
    def points(self) -> list[int]:
        return [point for unit in self.units for point in unit]


@dataclass
class _Queue:
    """Units that wait, chunks that came back without an answer, and points given up."""

    waiting: deque[Unit]
    slots: int
    chunk_s: float = CHUNK_S
    again: list[_Chunk] = field(default_factory=list)
    given_up: list[int] = field(default_factory=list)
    point_s: float = 0.0

    def __bool__(self) -> bool:
        return bool(self.waiting or self.again)

    def take(self) -> _Chunk:
        """Return the next chunk: one unit until the pace is known, and never so many that a worker is left idle."""
        if self.again:
            return self.again.pop()
        most = self.chunk_s / self.point_s if self.point_s else 1.0
        fair = max(1, len(self.waiting) // (2 * self.slots)) if self.slots > 1 else len(self.waiting)
        units = [self.waiting.popleft()]
        while len(units) < fair and sum(map(len, units)) + len(self.waiting[0]) <= most:
            units.append(self.waiting.popleft())
        return _Chunk(units)

    def learn(self, seconds: float, points: int) -> None:
        """Take note of the pace; the newest counts half, since points differ."""
        pace = max(seconds / points, 1e-6)
        self.point_s = 0.5 * (self.point_s + pace) if self.point_s else pace

    def return_chunk(self, chunk: _Chunk) -> None:
        """Hand a chunk that found no answer out once more, unit by unit, then point by point, or give it up."""
        attempts = chunk.attempts + 1
        if attempts >= ATTEMPTS:
            self.given_up += chunk.points
            return
        units = chunk.units if attempts == 1 else [(point,) for point in chunk.points]
        self.again += [_Chunk([unit], attempts) for unit in units]


def run(
    work: Work, pack: Pack, points: Sequence[int], place: Place, *, units: Sequence[Unit] = ()
) -> Iterator[tuple[Sequence[int], list[Any]]]:
    """Yield points and their answers, a chunk at a time, in the order in which they are finished.

    Parameters
    ----------
    work, pack
        See `Work` and `Pack`.
    points
        What is to be done.
    place
        Where.
    units
        Points that go together; if none are given, each goes by itself.

    Raises
    ------
    UnfinishedError
        At the end, when some points were given up.
    InputError
        When a point is refused by the work itself.
    """
    wanted = set(points)
    waiting = deque(unit for unit in units or [(point,) for point in points] if not wanted.isdisjoint(unit))
    here = place.workers == 1 and not place.cluster and place.executor is None
    for done, answers in _here(work, pack, waiting) if here else _elsewhere(work, pack, waiting, place):
        kept = [(point, answer) for point, answer in zip(done, answers, strict=True) if point in wanted]
        yield [point for point, _ in kept], [answer for _, answer in kept]


def _here(work: Work, pack: Pack, waiting: deque[Unit]) -> Iterator[tuple[Sequence[int], list[Any]]]:
    queue = _Queue(waiting, slots=1, chunk_s=CHUNK_HERE_S)
    while queue:
        chunk = queue.take()
        seconds, answers = timed(work, pack(chunk.points))
        queue.learn(seconds, len(chunk.points))
        yield chunk.points, answers


def timed(work: Work, packed: Any) -> tuple[float, list[Any]]:
    """Return how long the work took [s] and its answers."""
    start = time.perf_counter()
    answers = work(packed)
    return time.perf_counter() - start, answers


def _elsewhere(work: Work, pack: Pack, waiting: deque[Unit], place: Place) -> Iterator[tuple[Sequence[int], list[Any]]]:
    queue = _Queue(waiting, slots=max(place.workers, 1))
    reason = "their workers died"
    while queue:
        with _executor(place) as (executor, slots):
            queue.slots = slots
            yield from _drain(work, pack, queue, executor)
        if place.executor is not None and queue:
            reason = "the executor broke down"
            break
    left = [_Chunk(queue.waiting), *queue.again]
    missing = [*queue.given_up, *(point for chunk in left for point in chunk.points)]
    if missing:
        raise UnfinishedError(missing, reason)


def _drain(work: Work, pack: Pack, queue: _Queue, executor: Executor) -> Iterator[tuple[Sequence[int], list[Any]]]:
    """Keep an executor busy until nothing waits or it has broken down."""
    flying: dict[Future[tuple[float, list[Any]]], _Chunk] = {}
    broken = False
    try:
        while flying or (queue and not broken):
            # what may have killed a worker flies alone, so that it takes nothing with it and is known for it
            while queue and not broken and len(flying) <= (0 if queue.again else queue.slots):
                chunk = queue.take()
                try:
                    flying[executor.submit(timed, work, pack(chunk.points))] = chunk
                except (BrokenProcessPool, RuntimeError):  # it broke down between two chunks
                    queue.again.append(chunk)
                    broken = True
            done, _ = wait(flying, return_when=FIRST_COMPLETED)
            for future in done:
                chunk = flying.pop(future)
                error = _death(future)
                if error is not None:
                    broken |= isinstance(error, BrokenProcessPool)
                    queue.return_chunk(chunk)
                    continue
                seconds, answers = future.result()
                queue.learn(seconds, len(chunk.points))
                yield chunk.points, answers
    finally:
        for future in flying:
            future.cancel()


def _death(future: "Future[Any]") -> BaseException | None:
    """Return why a chunk came back without an answer when its worker is to blame; what the work raised is raised."""
    if future.cancelled():
        return CancelledError()
    error = future.exception()
    if error is None or isinstance(error, BrokenProcessPool | CancelledError):
        return error
    if type(error).__module__.partition(".")[0] == "distributed":  # KilledWorker, a lost connection
        return error
    raise error


@contextmanager
def _executor(place: Place) -> Iterator[tuple[Executor, int]]:
    """Give an executor and how many chunks it works on at a time."""
    if place.executor is not None:
        yield place.executor, int(getattr(place.executor, "_max_workers", None) or os.cpu_count() or 1)
    elif place.cluster:
        with _cluster(place.cluster) as given:
            yield given
    else:
        from multiprocessing import get_context

        pool = None
        with one_thread_each():
            try:
                pool = ProcessPoolExecutor(place.workers, mp_context=get_context("spawn"), initializer=_begin_worker)
                # all start now: a process that starts while the pool breaks would be waited for in vain
                for _ in range(place.workers):
                    pool.submit(os.getpid)
                yield pool, place.workers
            finally:
                if pool is not None:
                    pool.shutdown(cancel_futures=True)


@contextmanager
def one_thread_each() -> Iterator[None]:
    """Let processes that start meanwhile use one thread of linear algebra each: they share the cores as it is."""
    before = {name: os.environ.get(name) for name in THREADS}
    os.environ.update(dict.fromkeys(THREADS, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                os.environ.pop(name, None)
            else:
                os.environ[name] = value


@contextmanager
def _cluster(address: str) -> Iterator[tuple[Executor, int]]:
    try:
        from distributed import Client
    except ImportError:
        raise InputError('cluster: needs the extra cluster: pip install "photonfate[cluster]"') from None
    try:
        client: Any = Client(address, timeout="10s", set_as_default=False)  # type: ignore[no-untyped-call]
    except (OSError, TimeoutError, ValueError) as error:
        raise InputError(f"cluster: no scheduler answers at {address} ({type(error).__name__})") from None
    with client:
        cores = sum(client.ncores().values())
        if not cores:
            raise InputError(f"cluster: the scheduler at {address} has no workers; start some and run again")
        executor = client.get_executor(pure=False)
        try:
            yield executor, cores
        finally:
            executor.shutdown(wait=False)


def _begin_worker() -> None:
    """Leave Ctrl-C to the process in charge, and end when that one has ended, however it ended."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    from multiprocessing import parent_process

    parent = parent_process()
    if parent is None:
        return

    def follow() -> None:
        parent.join()
        os._exit(1)

    threading.Thread(target=follow, daemon=True).start()
