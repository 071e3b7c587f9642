"""The two example models: they read exported files alone, and keep their conservation laws."""

import ast
import importlib.util
import json
import shutil
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from click.testing import CliRunner

from optics.cli import main

FOLDER = Path(__file__).resolve().parents[2] / "examples" / "models"
SCRIPTS = ("carriers_on_a_line", "decay")
ROUNDING = 1e-12
"""Sums of a few hundred doubles."""
SOLVER = 1e-4
"""The solver of the line keeps each density to 1e-6 a step; hundreds of steps may add up."""
CLOSE_SOLVER = 1e-8
"""The decay is solved with a relative tolerance of 1e-10 a step."""
WRITTEN = 1e-11
"""A bundle holds twelve digits."""


def script(name):
    spec = importlib.util.spec_from_file_location(name, FOLDER / f"{name}.py")
    module = importlib.util.module_from_spec(spec)
    sys.modules[name] = module  # dataclasses look there for the names in annotations
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def bundle(tmp_path_factory):
    """The bundle of the stack that lies beside the models."""
    home = tmp_path_factory.mktemp("models")
    shutil.copytree(FOLDER, home / "models")
    done = CliRunner().invoke(main, ["handoff", str(home / "models" / "stack.toml"), "--to", str(home / "bundle")])
    assert done.exit_code == 0, done.output
    return home / "bundle"


@pytest.fixture(scope="module")
def line():
    return script("carriers_on_a_line")


@pytest.fixture(scope="module")
def decays():
    return script("decay")


@pytest.mark.parametrize("name", SCRIPTS)
def test_a_model_knows_the_exported_files_and_not_the_tool(name):
    tree = ast.parse((FOLDER / f"{name}.py").read_text(encoding="utf-8"))
    names = {alias.name for node in ast.walk(tree) if isinstance(node, ast.Import) for alias in node.names}
    names |= {node.module for node in ast.walk(tree) if isinstance(node, ast.ImportFrom)}
    ours = {each.split(".")[0] for each in names}
    assert ours <= {"argparse", "dataclasses", "matplotlib", "numpy", "pandas", "pathlib", "scipy"}


@pytest.mark.parametrize(("name", "files"), [("carriers_on_a_line", "profiles"), ("decay", "decays")])
def test_a_model_runs_from_the_command_line_and_leaves_table_and_figure(name, files, bundle, tmp_path, monkeypatch):
    monkeypatch.setattr(sys, "argv", [name, str(bundle), "--to", str(tmp_path / "out")])
    script(name).main()
    assert {path.name for path in (tmp_path / "out").iterdir()} == {f"{files}.csv", f"{files}.png"}
    assert len(pd.read_csv(tmp_path / "out" / f"{files}.csv")) > 100


def test_the_stack_beside_the_models_says_that_it_is_invented():
    assert "invented" in (FOLDER / "stack.toml").read_text(encoding="utf-8")
    for name in SCRIPTS:
        assert "invented" in (FOLDER / f"{name}.py").read_text(encoding="utf-8")


def test_the_kernel_that_is_read_takes_back_what_the_ledger_of_the_bundle_says(line, bundle):
    numbers = pd.read_csv(bundle / "data" / "numbers.csv").set_index("name")["value"]
    optics = line.Optics.read(bundle)
    # What lies beyond the grid of 10 cm is named in the numbers too.
    assert optics.taken_back == pytest.approx(numbers["taken_back"] - numbers["inplane_beyond_grid"], abs=1e-6)


def test_light_born_in_a_cell_lands_in_a_cell_or_beyond_the_last(line, bundle):
    optics, edges = line.Optics.read(bundle), line.edges_um()
    share, width = line.transfer(optics, edges), np.diff(line.edges_um())
    # There and back the same amount passes between two cells evenly filled: the kernel is even.
    np.testing.assert_allclose(share * width, (share * width).T, rtol=0, atol=ROUNDING)
    assert (share >= 0.0).all()
    assert (share.sum(axis=0) < optics.taken_back).all()
    # From the middle cell the rest lands beyond the ends of the line; the kernel says how much that is.
    beyond = optics.taken_back - np.interp(line.HALF_WIDTH_UM, optics.within_um, optics.cumulative)
    middle = share.sum(axis=0)[line.CELLS // 2]
    # Straight lines between the kernel's distances here, monotone cubics in the model.
    assert optics.taken_back - middle == pytest.approx(beyond, abs=2e-4)


@pytest.mark.parametrize("recycling", [False, True])
def test_no_carrier_is_lost_from_the_count(line, bundle, recycling):
    done = line.run(line.Optics.read(bundle), line.stripe(), recycling=recycling)
    counted = done.left + done.dark + done.light + done.beyond
    np.testing.assert_allclose(counted, counted[0], rtol=1e-9)
    assert done.left[-1] < 0.6 * done.left[0]


def test_what_the_counts_say_was_lost_without_light_is_what_the_profiles_lost(line, bundle):
    times = tuple(np.linspace(0.0, 100.0, 401))
    done = line.run(line.Optics.read(bundle), line.stripe(), recycling=True, times_ns=times)
    by_profile = np.trapezoid(done.left / line.LIFETIME_NS, times)
    # Trapezoid rule over quarters of a nanosecond; the decay has a time constant of tens.
    assert done.dark[-1] == pytest.approx(by_profile, rel=1e-3)


def test_without_light_a_stripe_spreads_as_diffusion_says_and_dies_by_its_lifetime(line, bundle):
    dark = replace(line.Optics.read(bundle), rate_cm3_per_ns=0.0)
    done = line.run(dark, line.stripe(), recycling=True, times_ns=(0.0, 100.0, 300.0))
    middle = 0.5 * (done.edges[1:] + done.edges[:-1])
    weight = done.density * np.diff(done.edges)[:, None]
    spread = (middle**2) @ weight / weight.sum(axis=0)
    grown = 2.0 * line.DIFFUSION_CM2_PER_S * line.NS_CM2_PER_S * done.times_ns
    # Cells of unequal width spread a little more than the continuum: under 1 % at these widths.
    np.testing.assert_allclose(spread - spread[0], grown, rtol=1e-2)
    np.testing.assert_allclose(done.left, done.left[0] * np.exp(-done.times_ns / line.LIFETIME_NS), rtol=SOLVER)


def test_an_even_profile_without_recycling_follows_the_closed_form(line, bundle):
    optics = line.Optics.read(bundle)
    first = np.full(line.CELLS, 2e17)
    done = line.run(optics, first, recycling=False, lifetime_ns=np.inf, times_ns=(0.0, 50.0, 200.0))
    exact = 2e17 / (1.0 + optics.rate_cm3_per_ns * 2e17 * done.times_ns)
    np.testing.assert_allclose(done.density, np.broadcast_to(exact, done.density.shape), rtol=SOLVER)


def test_light_that_is_taken_back_on_the_spot_lowers_the_rate_by_its_share_alone(line, bundle):
    optics = line.Optics.read(bundle)
    near = replace(optics, within_um=optics.within_um * 1e-9)
    first = np.full(line.CELLS, 2e17)
    done = line.run(near, first, recycling=True, lifetime_ns=np.inf, times_ns=(0.0, 50.0, 200.0))
    net = optics.rate_cm3_per_ns * (1.0 - optics.taken_back)
    exact = 2e17 / (1.0 + net * 2e17 * done.times_ns)
    np.testing.assert_allclose(done.density[line.CELLS // 2], exact, rtol=SOLVER)


def test_recycling_keeps_carriers_and_widens_the_stripe(line, bundle):
    optics = line.Optics.read(bundle)
    without, with_it = (line.run(optics, line.stripe(), recycling=each) for each in (False, True))
    assert with_it.left[-1] > 1.5 * without.left[-1]
    middle = 0.5 * (with_it.edges[1:] + with_it.edges[:-1])
    wide = [middle**2 @ (each.density[:, -1] * np.diff(each.edges)) / each.left[-1] for each in (without, with_it)]
    assert wide[1] > 4.0 * wide[0]


def test_no_carrier_is_lost_from_the_count_of_a_decay(decays, bundle):
    for light in decays.read(bundle).values():
        done = decays.decay(light)
        counted = done.left + done.dark + done.auger + done.out + done.lost
        np.testing.assert_allclose(counted, decays.FIRST_DENSITY_PER_CM3, rtol=CLOSE_SOLVER)


def test_the_net_rate_is_what_leaves_and_what_is_lost(decays, bundle):
    for light in decays.read(bundle).values():
        assert light.net == pytest.approx(light.out + light.lost, rel=10 * WRITTEN)


def test_a_decay_by_light_alone_follows_the_closed_form_and_lets_out_p_e_of_what_is_not_taken_back(decays, bundle):
    readings = pd.read_csv(bundle / "data" / "readings.csv").set_index("reading")
    for name, light in decays.read(bundle).items():
        done = decays.decay(light, lifetime_ns=np.inf, auger_cm6_per_s=0.0)
        first = decays.FIRST_DENSITY_PER_CM3
        np.testing.assert_allclose(done.left, first / (1.0 + light.net * first * done.time_ns), rtol=1e-6)
        if name == "none":
            continue
        p_r, p_e = readings.loc[name, ["p_r", "p_e"]]
        # At an internal yield of one the external yield is p_e/(1 - p_r), whatever the time (Richter et al. 2016).
        assert done.out[-1] / (first - done.left[-1]) == pytest.approx(p_e / (1.0 - p_r), rel=1e-8)


def test_a_bundle_without_a_coefficient_is_refused_in_a_line(decays, line, bundle, tmp_path):
    copy = shutil.copytree(bundle, tmp_path / "copy")
    table = pd.read_csv(copy / "data" / "radiative.csv")
    table.assign(coefficient_cm3_per_s=np.nan).to_csv(copy / "data" / "radiative.csv", index=False)
    for read in (decays.read, line.Optics.read):
        with pytest.raises(SystemExit, match="n_i_per_cm3"):
            read(copy)


def test_the_columns_that_the_models_read_are_described_in_the_package(bundle):
    package = json.loads((bundle / "datapackage.json").read_text(encoding="utf-8"))
    fields = {
        each["name"]: {field["name"]: field for field in each["schema"]["fields"]} for each in package["resources"]
    }
    assert fields["kernel"]["line_cumulative"]["description"]
    assert fields["kernel"]["radius_to_um"]["unit"] == "um"
    assert fields["radiative"]["coefficient_cm3_per_s"]["unit"] == "cm3/s"
