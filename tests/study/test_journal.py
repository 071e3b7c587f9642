"""What a study has found outlives it: whole lines are kept, torn ones done again, other inputs refused."""

import json
import os
import subprocess
import sys

import pytest

from optics.errors import InputError
from optics.study.journal import BASIS, JOURNAL, Journal

RESTS_ON = {"the stack file a.toml": "abc", "the version of photonfate": "0.1.0"}


def opened(folder, points=5, **changes):
    return Journal(folder, basis=RESTS_ON | changes, points=points)


def test_answers_come_back_in_the_order_of_the_points(tmp_path):
    with opened(tmp_path / "j") as journal:
        journal.append([3, 1], [{"x": 0.1 + 0.2}, {"x": 1e-300}])
        journal.append([0], [{"x": 7.0}])
    with opened(tmp_path / "j") as journal:
        assert journal.missing() == [2, 4]
        assert list(journal.answers()) == [(0, {"x": 7.0}), (1, {"x": 1e-300}), (3, {"x": 0.1 + 0.2})]


@pytest.mark.parametrize("cut", [1, 5, 12])
def test_a_torn_line_is_done_again_and_what_stands_before_it_kept(cut, tmp_path):
    with opened(tmp_path / "j") as journal:
        journal.append([0, 1], [{"x": 1.0}, {"x": 2.0}])
    file = tmp_path / "j" / JOURNAL
    file.write_bytes(file.read_bytes()[:-cut])
    with opened(tmp_path / "j") as journal:
        assert journal.missing() == [1, 2, 3, 4]
        journal.append([1], [{"x": 2.0}])
    with opened(tmp_path / "j") as journal:
        assert [found["x"] for _, found in journal.answers()] == [1.0, 2.0]


def test_what_has_changed_is_named_and_the_cure_said(tmp_path):
    with opened(tmp_path / "j"):
        pass
    with pytest.raises(InputError) as refusal, opened(tmp_path / "j", **{"the version of photonfate": "0.2.0"}):
        pass
    assert "the version of photonfate has changed since (0.1.0 then, 0.2.0 now)" in str(refusal.value)
    assert "--restart" in str(refusal.value)


def test_a_restart_drops_what_is_there(tmp_path):
    with opened(tmp_path / "j") as journal:
        journal.append([0], [{"x": 1.0}])
    with Journal(tmp_path / "j", basis={"other": 1}, points=5, restart=True) as journal:
        assert journal.done == 0
    assert json.loads((tmp_path / "j" / BASIS).read_text(encoding="utf-8")) == {"other": 1}


@pytest.mark.skipif(sys.platform == "win32", reason="no locks of this kind")
def test_two_runs_at_once_are_refused(tmp_path):
    with opened(tmp_path / "j"), pytest.raises(InputError, match="another run is at work"), opened(tmp_path / "j"):
        pass


FULL = """
import resource, signal, sys
from optics.errors import InputError
from optics.study.journal import Journal
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
with Journal(__import__("pathlib").Path(sys.argv[1]), basis={}, points=100) as journal:
    resource.setrlimit(resource.RLIMIT_FSIZE, (400, 400))
    try:
        for point in range(100):
            journal.append([point], [{"x": point}])
    except InputError as error:
        print(error)
"""


@pytest.mark.skipif(sys.platform == "win32", reason="no limits of this kind")
def test_a_full_disk_is_one_line_and_loses_no_whole_answer(tmp_path):
    run = subprocess.run(
        [sys.executable, "-c", FULL, tmp_path / "j"], capture_output=True, text=True, check=False, env=dict(os.environ)
    )
    assert run.stdout.count("\n") == 1, run.stderr
    assert "are kept: make room and run the same command again" in run.stdout
    with Journal(tmp_path / "j", basis={}, points=100) as journal:
        kept = journal.done
        assert 10 <= kept < 100
        assert journal.missing() == list(range(kept, 100))
        journal.append([kept], [{"x": kept}])
        assert [found["x"] for _, found in journal.answers()] == list(range(kept + 1))
