"""Where work runs makes no difference to what it finds, and dead workers lose nothing in silence."""

import functools
import os
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import engine_work
import pytest

from optics.errors import InputError
from optics.study.engine import Place, UnfinishedError, _Queue, run

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning")
WORKERS = Place(workers=2)


@pytest.fixture(autouse=True)
def _workers_find_the_tests(monkeypatch):
    """Let processes that are started find the module of the work."""
    here = str(Path(engine_work.__file__).parent)
    monkeypatch.setenv("PYTHONPATH", os.pathsep.join([here, *filter(None, [os.environ.get("PYTHONPATH")])]))


def collected(work, place, points=range(40), pack=list):
    found = {}
    for at, answers in run(work, pack, points, place):
        found.update(zip(at, answers, strict=True))
    return found


def test_this_process_local_processes_and_any_executor_find_the_same():
    expected = {number: number * number for number in range(40)}
    assert collected(engine_work.squares, Place()) == expected
    assert collected(engine_work.squares, WORKERS) == expected
    with ThreadPoolExecutor(2) as pool:
        assert collected(engine_work.squares, Place(executor=pool)) == expected
        assert pool.submit(int).result() == 0  # it is left open


def test_a_worker_that_dies_loses_nothing(tmp_path):
    pack = functools.partial(lambda flag, points: (flag, list(points)), str(tmp_path / "died"))
    assert collected(engine_work.dies_once, WORKERS, pack=pack) == {n: n * n for n in range(40)}
    assert (tmp_path / "died").exists()


def test_what_kills_worker_after_worker_is_named_and_the_rest_done():
    found = {}

    def gather():
        for at, answers in run(engine_work.dies_always, list, range(20), WORKERS):
            found.update(zip(at, answers, strict=True))

    with pytest.raises(UnfinishedError) as error:
        gather()
    assert error.value.missing == (7,)
    assert set(found) == set(range(20)) - {7}
    assert "points have no answer" in str(error.value)


def test_units_stay_together_and_only_what_is_wanted_comes_back():
    units = [tuple(range(at, at + 5)) for at in range(0, 20, 5)]
    packed, found = [], {}

    def pack(points):
        packed.extend(points)
        return list(points)

    for at, answers in run(engine_work.squares, pack, [3, 4, 11], Place(), units=units):
        found.update(zip(at, answers, strict=True))
    assert packed == [*range(5), *range(10, 15)]
    assert found == {3: 9, 4: 16, 11: 121}


def test_a_point_that_kills_costs_none_of_those_it_goes_with():
    units = [tuple(range(at, at + 5)) for at in range(0, 20, 5)]
    found = {}

    def gather():
        for at, answers in run(engine_work.dies_always, list, range(20), WORKERS, units=units):
            found.update(zip(at, answers, strict=True))

    with pytest.raises(UnfinishedError) as error:
        gather()
    assert error.value.missing == (7,)
    assert set(found) == set(range(20)) - {7}


def test_workers_leave_the_cores_to_each_other():
    before = os.environ.get("OPENBLAS_NUM_THREADS")
    assert set(collected(engine_work.threads, WORKERS).values()) == {"1"}
    assert os.environ.get("OPENBLAS_NUM_THREADS") == before


def test_chunks_grow_until_handing_out_costs_next_to_nothing():
    from collections import deque

    queue = _Queue(deque((point,) for point in range(100_000)), slots=2)
    assert len(queue.take().points) == 1
    queue.learn(0.01, 1)
    assert len(queue.take().points) == 100  # a second of work: some milliseconds of handing out are below 5 %
    queue.waiting = deque((point,) for point in range(12))
    assert len(queue.take().points) == 3  # nobody is left idle at the end


@pytest.mark.parametrize("asked", [{"workers": 0}, {"workers": 2.5}, {"workers": 2, "cluster": "tcp://x"}])
def test_a_place_that_cannot_be_is_refused(asked):
    with pytest.raises(InputError):
        Place(**asked)


def test_a_scheduler_that_does_not_answer_is_one_line():
    pytest.importorskip("distributed")
    with pytest.raises(InputError, match="no scheduler answers at"):
        list(run(engine_work.squares, list, range(3), Place(cluster="inproc://nowhere")))


def test_what_the_work_refuses_is_refused():
    def refuse(_):
        raise InputError("no")

    with pytest.raises(InputError, match="no"):
        list(run(refuse, list, range(3), Place()))


def test_the_package_says_which_extra_a_cluster_needs(monkeypatch):
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(InputError, match=r"photonfate\[cluster\]"):
        list(run(engine_work.squares, list, range(3), Place(cluster="tcp://127.0.0.1:1")))
