"""Long studies that are stopped, killed or robbed of a worker end in the same table when they are run again."""

import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import pandas as pd
import pytest
from click.testing import CliRunner
from studied import STACK_FILE

from optics.cli import main

CALL = [sys.executable, "-c", "from optics.cli import main; main(prog_name='photonfate')"]
VARY = ["--vary", "film.thickness_nm = 100 to 400 step 2", "--vary", "glass.material = float-glass, sapphire"]
POINTS = 302
ROUNDS = 3
unix = pytest.mark.skipif(not Path("/proc/self/stat").exists(), reason="needs signals and a list of processes")


@pytest.fixture
def stack_file(tmp_path):
    path = tmp_path / "stack.toml"
    path.write_text(STACK_FILE, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def undisturbed(tmp_path_factory):
    """The table of a run that nobody stops."""
    folder = tmp_path_factory.mktemp("undisturbed")
    (folder / "stack.toml").write_text(STACK_FILE, encoding="utf-8")
    assert CliRunner().invoke(main, ["sweep", str(folder / "stack.toml"), *VARY]).exit_code == 0
    return (folder / "stack-sweep" / "sweep.csv").read_bytes()


def interruptible():
    # A child of a shell's background job may ignore Ctrl-C; a person at a terminal does not.
    signal.signal(signal.SIGINT, signal.default_int_handler)


def begun(stack_file, *options):
    return subprocess.Popen(
        [*CALL, "sweep", str(stack_file), *VARY, *options],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        preexec_fn=interruptible if hasattr(os, "fork") else None,
    )


def answers(stack_file):
    file = stack_file.with_name("stack-sweep.unfinished") / "answers.jsonl"
    return file.read_bytes().count(b"\n") if file.exists() else 0


def wait_for(stack_file, count, run):
    while answers(stack_file) < count and run.poll() is None:
        time.sleep(0.005)


@unix
@pytest.mark.parametrize("options", [(), ("--workers", "2")], ids=["one process", "two workers"])
def test_killed_at_random_moments_and_run_again_the_table_is_the_same(options, stack_file, undisturbed):
    lots = random.Random(7)
    kept = kills = 0
    for _ in range(ROUNDS):
        run = begun(stack_file, *options)
        wait_for(stack_file, kept + lots.randint(1, POINTS // (3 * ROUNDS)), run)
        time.sleep(0.02 * lots.random())
        run.send_signal(signal.SIGKILL)
        run.communicate()
        if run.returncode == 0:
            break  # a fast machine was done before the signal came
        kills += 1
        assert answers(stack_file) >= kept  # nothing that was there is lost
        kept = answers(stack_file)
    assert kills > 0
    last = begun(stack_file, *options)
    _, said = last.communicate()
    assert last.returncode == 0, said
    assert kills < ROUNDS or "going on" in said
    assert (stack_file.parent / "stack-sweep" / "sweep.csv").read_bytes() == undisturbed
    assert not stack_file.with_name("stack-sweep.unfinished").exists()


@unix
def test_workers_end_with_the_process_that_started_them(stack_file):
    run = begun(stack_file, "--workers", "2")
    wait_for(stack_file, 3, run)
    workers = [int(pid) for pid in _children(run.pid)]
    assert workers
    run.send_signal(signal.SIGKILL)
    run.communicate()
    limit = time.monotonic() + 10
    while any(_alive(pid) for pid in workers) and time.monotonic() < limit:
        time.sleep(0.05)
    assert not [pid for pid in workers if _alive(pid)]


@unix
def test_a_worker_killed_in_the_pool_costs_nothing(stack_file, undisturbed):
    run = begun(stack_file, "--workers", "2")
    wait_for(stack_file, 5, run)
    for pid in _children(run.pid)[-1:]:
        os.kill(int(pid), signal.SIGKILL)
    _, said = run.communicate()
    assert run.returncode == 0, said
    assert (stack_file.parent / "stack-sweep" / "sweep.csv").read_bytes() == undisturbed


@unix
def test_stopped_by_the_user_it_says_what_is_kept_and_goes_on(stack_file, undisturbed):
    run = begun(stack_file)
    wait_for(stack_file, 10, run)
    run.send_signal(signal.SIGINT)
    _, said = run.communicate()
    assert run.returncode == 130, said
    assert "points are kept; the same command goes on" in said
    assert "Traceback" not in said
    assert not (stack_file.parent / "stack-sweep").exists()
    last = begun(stack_file)
    _, said = last.communicate()
    assert last.returncode == 0, said
    assert (stack_file.parent / "stack-sweep" / "sweep.csv").read_bytes() == undisturbed


@unix
@pytest.mark.parametrize("what", ["stack file", "what is varied"])
def test_an_unfinished_study_of_something_else_is_refused_in_one_line_and_kept(what, stack_file):
    run = begun(stack_file)
    wait_for(stack_file, 10, run)
    run.send_signal(signal.SIGKILL)
    run.communicate()
    kept = answers(stack_file)
    options = list(VARY)
    if what == "stack file":
        stack_file.write_text(STACK_FILE.replace("k = 0.02", "k = 0.03"), encoding="utf-8")
    else:
        options[1] = options[1].replace("step 2", "step 4")
    refused = CliRunner().invoke(main, ["sweep", str(stack_file), *options])
    assert refused.exit_code == 2
    assert what in refused.stderr
    assert "has changed since" in refused.stderr
    assert refused.stderr.count("\n") == 1
    assert answers(stack_file) == kept
    again = CliRunner().invoke(main, ["sweep", str(stack_file), *options, "--restart"])
    assert again.exit_code == 0, again.stderr


def test_a_changed_table_is_noticed(tmp_path):
    table = tmp_path / "film.csv"
    table.write_text("wavelength_nm,n,k\n700,2.4,0.02\n900,2.3,0.02\n", encoding="utf-8")
    stack_file = tmp_path / "stack.toml"
    stack_file.write_text(STACK_FILE.replace("{ n = 2.4, k = 0.02 }", '"film.csv"'), encoding="utf-8")
    from optics.stackfile import read_stack
    from optics.study.basis import basis

    before = basis(read_stack(stack_file), stack_file=stack_file)
    table.write_text("wavelength_nm,n,k\n700,2.4,0.02\n900,2.3,0.03\n", encoding="utf-8")
    after = basis(read_stack(stack_file), stack_file=stack_file)
    assert [name for name in before if before[name] != after[name]] == ["the table of film"]


@unix
def test_a_worker_killed_on_a_cluster_costs_nothing(stack_file, undisturbed):
    distributed = pytest.importorskip("distributed")
    with _cluster(distributed) as cluster:
        run = begun(stack_file, "--cluster", cluster.scheduler_address)
        wait_for(stack_file, 5, run)
        os.kill(cluster.workers[0].process.process.pid, signal.SIGKILL)
        _, said = run.communicate(timeout=120)
        assert run.returncode == 0, said
    assert (stack_file.parent / "stack-sweep" / "sweep.csv").read_bytes() == undisturbed


def _cluster(distributed):
    return distributed.LocalCluster(n_workers=2, threads_per_worker=1, processes=True, dashboard_address=None)


def _children(pid):
    """Return the worker processes that a process has started."""
    found = []
    for place in Path("/proc").glob("[0-9]*"):
        try:
            parent = (place / "stat").read_text(encoding="utf-8").rsplit(")", 1)[1].split()[1]
            line = (place / "cmdline").read_text(encoding="utf-8")
        except OSError:
            continue
        if parent == str(pid) and "spawn_main" in line:
            found.append(place.name)
    return found


def _alive(pid):
    try:
        return Path(f"/proc/{pid}/stat").read_text(encoding="utf-8").rsplit(")", 1)[1].split()[0] != "Z"
    except OSError:
        return False


def test_the_tables_of_a_sweep_are_what_the_notebook_finds(stack_file, undisturbed):
    import io

    import optics
    from optics.study.sweep import sweep

    table = pd.read_csv(io.BytesIO(undisturbed))
    assert len(table) == POINTS
    own = sweep(optics.read_stack(stack_file), {"film.thickness_nm": [100.0, 102.0]}).table
    pd.testing.assert_series_equal(table["trapped"][[0, 2]], own["trapped"], check_index=False, rtol=0, atol=1e-11)
