"""Bundles: the same numbers in five formats, opened by what each is usually opened by, and whole or not at all."""

import json
import re
import shutil
import socket

import frictionless
import h5py
import numpy as np
import openpyxl
import pandas as pd
import pytest
from click.testing import CliRunner
from scipy.io import loadmat, whosmat

import optics
from optics.cli import main
from optics.errors import InputError
from optics.output import handoff, handoff_formats
from optics.output.handoff_columns import TITLES, sheet, unit_of
from optics.output.handoff_formats import FORMATS, field_name
from optics.stackfile import read_stack
from optics.transport.handover import hand_over

KINDS = tuple(FORMATS)
LIMIT_BYTES = 5_000_000
ROUNDED = 1e-11
"""Twelve digits are kept."""
GAUSSIAN = 'kind = "gaussian"\npeak_nm = 700\nfwhm_nm = 30'
STACK = """
title = "Invented film under a clear contact, on glass"
above = "air"
below = "air"

[light]
from_nm = 660
to_nm = 740
step_nm = 10

[light.spectrum]
kind = "from-absorption"
n_i_per_cm3 = 9e3

[[layer]]
name = "=contact, clear | thin"
material = { n = 1.8, k = 0.002 }
thickness_nm = 50

[[layer]]
name = "film"
material = "own tables/film.csv"
thickness_nm = 400
emits = true

[[layer]]
name = "glass"
material = "float-glass"
thickness_mm = 1.1
"""


def run(*words):
    return CliRunner().invoke(main, [str(word) for word in words])


@pytest.fixture(scope="module")
def home(tmp_path_factory):
    """A folder with a stack and its table, k an exponential tail."""
    folder = tmp_path_factory.mktemp("handoff")
    (folder / "own tables").mkdir()
    wavelength = np.arange(640.0, 781.0, 5.0)
    k = 0.1 / (1.0 + np.exp((wavelength - 690.0) / 6.0))
    lines = [f"{nm:g},2.45,{value:.5e}" for nm, value in zip(wavelength, k, strict=True)]
    (folder / "own tables" / "film.csv").write_text("\n".join(["wavelength_nm,n,k", *lines]) + "\n", encoding="utf-8")
    (folder / "stack.toml").write_text(STACK, encoding="utf-8")
    return folder


@pytest.fixture(scope="module")
def handed(home):
    return hand_over(read_stack(home / "stack.toml"))


@pytest.fixture(scope="module")
def bundles(home, handed):
    """A bundle of each format."""
    return {
        kind: handoff.write_handoff(handed, home / f"bundle {kind}", kind=kind, stack_file=home / "stack.toml")
        for kind in KINDS
    }


def same(found, expected):
    """Whether values read back are those handed over, to the twelve digits kept; text as it is."""
    expected = np.asarray(expected)
    if expected.dtype.kind not in "fbiu":
        assert list(map(str, found)) == list(map(str, expected))
        return
    found = np.array([np.nan if each is None else each for each in found], dtype=float)
    np.testing.assert_allclose(found, expected.astype(float), rtol=ROUNDED, atol=0.0)


def test_pandas_reads_every_csv_back_without_help(bundles, handed):
    for name, table in handed.tables.items():
        read = pd.read_csv(bundles["csv"] / "data" / f"{name}.csv")
        assert list(read.columns) == list(table.columns)
        for column in table:
            same(read[column].to_numpy(), table[column].to_numpy())


def test_the_numbers_in_csv_stand_beside_their_unit_and_meaning(bundles, handed):
    read = pd.read_csv(bundles["csv"] / "data" / "numbers.csv").set_index("name")
    same(read["value"].to_numpy(), list(handed.numbers.values()))
    assert read.loc["inplane_median_um", "unit"] == "um"
    assert read["meaning"].notna().all()


def test_frictionless_finds_a_valid_data_package(bundles):
    report = frictionless.validate(str(bundles["csv"] / "datapackage.json"))
    assert report.valid, report.flatten(["type", "message"])
    assert report.stats["tasks"] == len(list((bundles["csv"] / "data").glob("*.csv")))


def test_frictionless_sees_a_number_that_somebody_changed(bundles, tmp_path):
    copy = shutil.copytree(bundles["csv"], tmp_path / "copy")
    table = copy / "data" / "readings.csv"
    table.write_text(table.read_text(encoding="utf-8").replace("0.", "0.1", 1), encoding="utf-8")
    report = frictionless.validate(str(copy / "datapackage.json"))
    assert {kind for (kind,) in report.flatten(["type"])} & {"hash-count", "byte-count"}


def test_frictionless_reads_names_types_and_units(bundles):
    package = frictionless.Package(str(bundles["csv"] / "datapackage.json"))
    fields = {field.name: field for field in package.get_resource("kernel").schema.fields}
    assert fields["line_per_cm"].type == "number"
    assert fields["line_per_cm"].custom["unit"] == "1/cm"
    rows = package.get_resource("modes").read_rows()
    assert isinstance(rows[0]["order"], int)


def test_openpyxl_finds_numbers_as_numbers_and_text_as_text(bundles, handed):
    book = openpyxl.load_workbook(bundles["xlsx"] / "bundle.xlsx")
    assert book.sheetnames == ["numbers", *handed.tables, "columns"]
    for name, table in handed.tables.items():
        rows = list(book[name].iter_rows(values_only=True))
        assert list(rows[0]) == list(table.columns)
        for number, column in enumerate(table):
            same([row[number] for row in rows[1:]], table[column].to_numpy())
    kinds = {cell.data_type for row in book["outcomes"].iter_rows(min_row=2) for cell in row}
    assert kinds == {"n"}
    layers = {cell.data_type for (cell,) in book["where"].iter_rows(min_row=2, min_col=2, max_col=2)}
    assert layers == {"s"}  # a layer's name that begins with = is no formula


def test_pandas_reads_the_workbook_too(bundles, handed):
    read = pd.read_excel(bundles["xlsx"] / "bundle.xlsx", sheet_name="kernel")
    pd.testing.assert_frame_equal(read, handed.tables["kernel"], rtol=ROUNDED, check_dtype=False)


def test_scipy_reads_one_flat_struct_of_version_5_with_short_names(bundles, handed):
    path = bundles["mat"] / "bundle.mat"
    assert path.read_bytes()[:10] == b"MATLAB 5.0"
    assert [name for name, *_ in whosmat(path)] == ["photonfate"]
    struct = loadmat(path, simplify_cells=True)["photonfate"]
    assert max(map(len, struct)) <= 31
    assert all(re.fullmatch(r"[A-Za-z][A-Za-z0-9_]*", name) for name in struct)
    assert not any(isinstance(value, dict) for value in struct.values())
    # every name ends as the column does, so that its unit is still there
    where = {meant: field for field, meant in zip(struct["fields_field"], struct["fields_column"], strict=True)}
    assert not [field for meant, field in where.items() if field.split("_")[-1] != meant.split("_")[-1].split()[-1]]
    for name, table in handed.tables.items():
        for column in table:
            same(np.atleast_1d(struct[where[f"{name}: {column}"]]), table[column].to_numpy())
    assert struct["rate_factor"] == pytest.approx(handed.numbers["rate_factor"], rel=ROUNDED)


def test_a_column_of_the_struct_stands_upright(bundles, handed):
    raw = loadmat(bundles["mat"] / "bundle.mat")["photonfate"]
    assert raw["outcomes_wavelength_nm"][0, 0].shape == (len(handed.tables["outcomes"]), 1)


def test_h5py_finds_a_group_a_table_with_units(bundles, handed):
    with h5py.File(bundles["hdf5"] / "bundle.h5") as file:
        assert set(file) == {"numbers", *handed.tables}
        for name, table in handed.tables.items():
            assert list(file[name].attrs["columns"]) == list(table.columns)
            for column in table:
                values = file[name][column]
                same(values.asstr()[()] if values.dtype.kind == "O" else values[()], table[column].to_numpy())
        assert file["kernel/per_cm2"].attrs["unit"] == "1/cm2"
        assert file["kernel/per_cm2"].attrs["meaning"]
        assert file["numbers/trapped"][()] == pytest.approx(handed.numbers["trapped"], rel=ROUNDED)
        assert file["numbers/inplane_median_um"].attrs["unit"] == "um"


def test_json_is_plain_and_holds_the_same(bundles, handed):
    text = (bundles["json"] / "bundle.json").read_text(encoding="utf-8")
    assert "NaN" not in text
    content = json.loads(text)
    for name, table in handed.tables.items():
        for column in table:
            same(content["tables"][name]["columns"][column]["values"], table[column].to_numpy())
    assert content["numbers"]["trapped"]["value"] == pytest.approx(handed.numbers["trapped"], rel=ROUNDED)


def test_every_format_holds_the_very_same_doubles(bundles):
    columns = {"csv": pd.read_csv(bundles["csv"] / "data" / "outcomes.csv")["trapped"].tolist()}
    columns["xlsx"] = pd.read_excel(bundles["xlsx"] / "bundle.xlsx", sheet_name="outcomes")["trapped"].tolist()
    columns["mat"] = loadmat(bundles["mat"] / "bundle.mat", simplify_cells=True)["photonfate"][
        "outcomes_trapped"
    ].tolist()
    content = json.loads((bundles["json"] / "bundle.json").read_text(encoding="utf-8"))
    columns["json"] = content["tables"]["outcomes"]["columns"]["trapped"]["values"]
    with h5py.File(bundles["hdf5"] / "bundle.h5") as file:
        columns["hdf5"] = file["outcomes/trapped"][()].tolist()
    assert all(values == columns["csv"] for values in columns.values())


def test_every_column_and_number_says_what_it_means(handed):
    lacking = [
        f"{name}.{each.name}"
        for name, table in handed.tables.items()
        for each in sheet(name, table).columns
        if not each.meaning
    ]
    lacking += [name for name in handed.numbers if not handoff.numbers({name: 1.0})[0].column.meaning]
    assert not lacking
    assert set(handed.tables) <= set(TITLES)


@pytest.mark.parametrize(
    ("name", "unit"),
    [
        ("wavelength_nm", "nm"),
        ("guided_per_nm_3_um", "1/nm"),
        ("inplane_taken_back_beyond_1000_um", "1"),
        ("inplane_guided_mean_wavelength_nm_10_um", "nm"),
        ("inplane_90_percent_within_um", "um"),
        ("per_um_radius", "1/um"),
        ("rate_per_cm3_s", "1/(cm3 s)"),
        ("diffusivity_cm2_per_s", "cm2/s"),
        ("trapped", "1"),
    ],
)
def test_the_unit_is_read_from_the_name(name, unit):
    assert unit_of(name) == unit


def test_names_for_a_struct_are_cut_and_kept_apart():
    long = "compact_absorption_in_plane_per_cm_of_everything"
    first = field_name(long, {})
    second = field_name(long, {first})
    assert len(first) <= 31
    assert len(second) <= 31
    assert first != second


def test_radiative_coefficients_are_the_bulks_times_p_and_what_is_not_taken_back(handed):
    table = handed.tables["radiative"].set_index(["quantity", "reading"])
    bulk = table.loc[("bulk", "any")]
    averages, said = handed.result.averages, handed.result.radiation
    assert bulk["coefficient_cm3_per_s"] == said.coefficient
    assert table.loc[("times P", "any"), "coefficient_cm3_per_s"] == pytest.approx(said.coefficient_in_stack, rel=1e-14)
    readings = handed.tables["readings"].set_index("reading")
    for name in ("faces", "wide", "sphere"):
        row = table.loc[("times P (1 - p_r)", name)]
        factor = averages["rate_factor"] * (1.0 - readings.loc[name, "p_r"])
        assert row["factor"] == pytest.approx(factor, rel=1e-14)
        assert row["rate_per_cm3_s"] == pytest.approx(factor * said.equilibrium_rate, rel=1e-14)


def test_readings_by_wavelength_average_to_the_readings(handed):
    weight = handed.result.table.set_index("wavelength_nm")["birth_weight"]
    for name, rows in handed.tables["reading_spectra"].groupby("reading"):
        averages = rows.set_index("wavelength_nm")[["p_r", "p_e", "p_a"]].mul(weight, axis=0).sum()
        expected = handed.tables["readings"].set_index("reading").loc[name, ["p_r", "p_e", "p_a"]]
        np.testing.assert_allclose(averages, expected.astype(float), rtol=0, atol=1e-12)  # the same sum


def test_a_slice_of_birth_loses_nothing_and_slices_average_to_the_ledger(handed):
    matrix, slices = handed.tables["depth_matrix"], handed.tables["depth_slices"]
    landed = matrix.groupby("birth_from_nm")["share"].sum().to_numpy()
    np.testing.assert_allclose(landed, slices["film"], rtol=0, atol=1e-12)  # the same sum
    ends = slices.drop(columns=["birth_from_nm", "birth_to_nm", "rate_factor"])
    np.testing.assert_allclose(ends.sum(axis=1), 1.0, rtol=0, atol=1e-9)  # the other ends are computed each by itself
    # Slices are of one width here, so births in them weigh as their rate factor.
    mean = (slices["film"] * slices["rate_factor"]).sum() / slices["rate_factor"].sum()
    assert mean == pytest.approx(handed.numbers["taken_back"], abs=1e-8)


def test_a_pump_hands_over_its_births_over_depth_and_carriers(home):
    stack = read_stack(home / "stack.toml")
    pumped = stack.with_emission(depth=optics.Pump(pump_nm=660, side="above"))
    found = hand_over(pumped)
    table = found.tables["birth_depth"]
    # Births are scaled to a mean of one; the trapezoid rule over a hundred depths.
    assert np.trapezoid(table["linear"], table["depth_nm"]) / 400.0 == pytest.approx(1.0, abs=1e-3)
    assert found.numbers["pump_carriers_per_cm3"] == found.result.pump.carriers_per_cm3
    assert unit_of("pump_carriers_per_cm3") == "1/cm3"
    assert not [each.name for each in sheet("birth_depth", table).columns if not each.meaning]
    assert not [name for name in found.numbers if not handoff.numbers({name: 1.0})[0].column.meaning]


def test_a_kernel_that_lacks_light_is_warned_of_and_others_are_not(handed, tmp_path):
    assert not [line for line in handed.warnings if "kernel in the plane" in line]
    assert handed.numbers["inplane_taken_back"] == pytest.approx(handed.numbers["taken_back"], abs=1e-6)
    stack = read_stack_of(tmp_path, kind=GAUSSIAN)
    # a film of low index under a contact of high index: light bound by the contact alone
    found = hand_over(stack.with_layer("film", material=1.2 + 0.02j, thickness_nm=300.0))
    lacking = abs(found.numbers["inplane_taken_back"] - found.numbers["taken_back"]) > 1e-5
    assert lacking == any("kernel in the plane" in line for line in found.warnings)


def test_a_layer_that_receives_stands_among_the_receivers_by_name(tmp_path):
    stack = read_stack_of(tmp_path, kind=GAUSSIAN)
    found = hand_over(stack.with_layer("=contact, clear | thin", receives=True))
    shares = found.tables["receivers"].set_index("receiver")["share"]
    assert shares.sum() == pytest.approx(1.0, abs=1e-9)  # every end is computed by itself
    assert shares["film"] == pytest.approx(found.numbers["taken_back"], abs=1e-9)
    assert 0.0 < shares["=contact, clear | thin"] <= found.numbers["elsewhere"] + found.numbers["guided_elsewhere"]


def test_several_layers_that_emit_are_refused_in_a_line(home, tmp_path):
    text = (home / "stack.toml").read_text("utf-8").replace('"own tables/film.csv"', "{ n = 2.4, k = 0.02 }")
    text = text.replace("thickness_nm = 50", "thickness_nm = 50\nemits = true")
    text = text.replace("emits = true", "emits = true\nbirths_share = 0.5")
    text = text.replace('kind = "from-absorption"\nn_i_per_cm3 = 9e3', GAUSSIAN)
    (tmp_path / "two.toml").write_text(text, encoding="utf-8")
    done = run("handoff", tmp_path / "two.toml")
    assert done.exit_code == 2
    assert "2 layers emit" in done.stderr
    assert done.stderr.count("\n") == 1
    assert {path.name for path in tmp_path.iterdir()} == {"two.toml"}


def test_a_stack_without_a_coefficient_still_hands_over_the_factors(tmp_path):
    stack = read_stack_of(tmp_path, kind=GAUSSIAN)
    table = hand_over(stack).tables["radiative"]
    assert (table["factor"] > 0.0).all()
    assert table["coefficient_cm3_per_s"].isna().all()


def read_stack_of(folder, *, kind, thick='"=contact, clear | thin"'):
    text = STACK.replace('kind = "from-absorption"\nn_i_per_cm3 = 9e3', kind)
    text = text.replace('"own tables/film.csv"', "{ n = 2.45, k = 0.02 }").replace("step_nm = 10", "step_nm = 40")
    (folder / "stack.toml").write_text(text.replace('"=contact, clear | thin"', thick), encoding="utf-8")
    return read_stack(folder / "stack.toml")


def test_a_film_of_rays_alone_hands_over_without_wave_outcomes_and_modes(tmp_path):
    stack = read_stack_of(tmp_path, kind=GAUSSIAN)
    handed = hand_over(stack.with_layer("film", thickness_nm=30_000.0))
    folder = handoff.write_handoff(handed, tmp_path / "bundle")
    assert not {"outcomes.csv", "modes.csv"} & {path.name for path in (folder / "data").iterdir()}
    assert frictionless.validate(str(folder / "datapackage.json")).valid


@pytest.mark.parametrize("kind", KINDS)
def test_solve_on_a_bundle_computes_it_again_offline(kind, bundles, tmp_path, monkeypatch, handed):
    copy = shutil.copytree(bundles[kind], tmp_path / "sent to a colleague")

    def no_network(*words, **options):
        raise OSError("no network here")

    monkeypatch.setattr(socket, "socket", no_network)
    monkeypatch.setattr(socket, "create_connection", no_network)
    assert run("solve", copy).exit_code == 0
    again = pd.read_csv(tmp_path / "sent to a colleague-result" / "outcomes.csv")
    # `solve` writes ten digits.
    pd.testing.assert_frame_equal(again, handed.tables["outcomes"], rtol=1e-9, atol=1e-10, check_dtype=False)
    assert not [path for path in copy.iterdir() if path.name.startswith("stack-")]  # nothing is added to the bundle


def test_a_bundle_can_be_made_from_a_bundle(bundles, tmp_path):
    copy = shutil.copytree(bundles["json"], tmp_path / "one")
    assert run("handoff", copy, "--to", tmp_path / "two").exit_code == 0
    first = json.loads((copy / "bundle.json").read_text(encoding="utf-8"))["numbers"]["trapped"]["value"]
    second = pd.read_csv(tmp_path / "two" / "data" / "numbers.csv").set_index("name").loc["trapped", "value"]
    assert second == first


def test_the_page_shows_stack_ten_numbers_definitions_and_files(bundles):
    text = (bundles["csv"] / "README.txt").read_text(encoding="utf-8")
    for word in (
        "Invented film",
        "=contact, clear | thin",
        "above: air",
        "births",
        "plate",
        "p_r:",
        "kernel",
        "stack.toml",
    ):
        assert word in text
    block = text.split("Averages over all photons born\n")[1].split("Numerical error")[0]
    assert block.count("\n") == 10
    lines = text.splitlines()
    assert len(lines) <= 80  # a page of small print
    assert max(map(len, lines)) <= 110


def test_every_citation_has_its_entry(bundles):
    methods = (bundles["csv"] / "methods.md").read_text(encoding="utf-8")
    entries = (bundles["csv"] / "references.bib").read_text(encoding="utf-8")
    cited = set(re.findall(r"@([\w-]+)", methods))
    assert cited == set(re.findall(r"^@\w+\{([\w-]+),", entries, flags=re.MULTILINE))
    assert {"chance1978", "roosbroeck1954", "material-float-glass", "material-film"} <= cited
    assert entries.count("{") == entries.count("}")
    assert "10.1016/0165-1633(85)90052-8" in entries  # the DOI of the glass, with its brackets


def test_the_layers_stand_in_a_table_with_index_and_source(bundles, handed):
    methods = (bundles["csv"] / "methods.md").read_text(encoding="utf-8")
    rows = [line for line in methods.splitlines() if line.startswith("|")]
    assert len(rows) == 2 + 5
    assert len({len(re.findall(r"(?<!\\)\|", row)) for row in rows}) == 1  # a name with a bar does not break it
    born = handed.tables["outcomes"]
    peak = born["wavelength_nm"][born["births_per_nm"].idxmax()]
    assert f"n at {peak:g} nm" in rows[0]


def test_a_bundle_by_default_is_under_five_megabytes(bundles):
    for folder in bundles.values():
        assert sum(path.stat().st_size for path in folder.rglob("*") if path.is_file()) < LIMIT_BYTES


@pytest.mark.parametrize("kind", KINDS)
def test_tables_too_large_for_the_limit_are_left_out_by_name(kind, handed, tmp_path):
    long = pd.DataFrame({"wavelength_nm": np.linspace(300, 900, 150_000) / 7, "layer": "film", "share": 1 / 3})
    swollen = handed.__class__(**(vars(handed) | {"tables": handed.tables | {"mode_absorbers": long}}))
    folder = handoff.write_handoff(swollen, tmp_path / "out", kind=kind)
    assert sum(path.stat().st_size for path in folder.rglob("*") if path.is_file()) < LIMIT_BYTES
    assert re.search(
        r"left out, \d\.\d MB: mode_absorbers; --full keeps it", (folder / "README.txt").read_text("utf-8")
    )
    assert json.loads((folder / "run.json").read_text("utf-8"))["settings"]["left_out"] == ["mode_absorbers"]


def test_with_full_nothing_is_left_out(handed, tmp_path):
    long = pd.DataFrame({"wavelength_nm": np.linspace(300, 900, 150_000) / 7, "layer": "film", "share": 1 / 3})
    swollen = handed.__class__(**(vars(handed) | {"tables": {"mode_absorbers": long}}))
    folder = handoff.write_handoff(swollen, tmp_path / "out", full=True)
    assert len(pd.read_csv(folder / "data" / "mode_absorbers.csv")) == len(long)


@pytest.mark.parametrize("error", [OSError("disk full"), KeyboardInterrupt()])
def test_a_bundle_that_could_not_be_finished_leaves_nothing(error, handed, tmp_path, monkeypatch):
    def broken(result, **said):
        raise error

    monkeypatch.setattr(handoff, "methods_text", broken)
    with pytest.raises((InputError, KeyboardInterrupt)):
        handoff.write_handoff(handed, tmp_path / "out")
    assert not list(tmp_path.iterdir())


def test_a_rerun_replaces_an_untouched_bundle_and_keeps_a_touched_one(handed, tmp_path):
    folder = handoff.write_handoff(handed, tmp_path / "out", kind="csv")
    handoff.write_handoff(handed, folder, kind="json")
    assert not (folder / "data").exists()
    (folder / "bundle.json").write_text("mine", encoding="utf-8")
    with pytest.raises(InputError, match=r"bundle\.json in it was changed"):
        handoff.write_handoff(handed, folder)
    assert (folder / "bundle.json").read_text(encoding="utf-8") == "mine"


@pytest.mark.parametrize("kind", ["xlsx", "hdf5"])
def test_a_format_whose_library_is_missing_is_refused_before_any_work(kind, home, monkeypatch):
    monkeypatch.setattr(handoff_formats, "find_spec", lambda name: None)
    done = run("handoff", home / "stack.toml", "--to", home / "none", "--as", kind)
    assert done.exit_code == 2
    assert "photonfate[handoff]" in done.stderr
    assert done.stderr.count("\n") == 1
    assert not (home / "none").exists()


def test_the_command_shows_the_numbers_and_where_the_bundle_is(home):
    done = run("handoff", home / "stack.toml", "--as", "json")
    assert done.exit_code == 0
    assert "trapped" in done.output
    assert str(home / "stack-handoff") in done.output
    assert (home / "stack-handoff" / "bundle.json").is_file()


def test_a_folder_that_is_no_bundle_is_refused_in_a_line(tmp_path):
    for command in ("solve", "handoff"):
        done = run(command, tmp_path)
        assert done.exit_code == 2
        assert done.stderr.count("\n") == 1


def test_averages_handed_over_are_those_of_solve(home, handed):
    result = optics.solve(read_stack(home / "stack.toml"))
    for name, value in result.averages.items():
        assert handed.numbers[name] == pytest.approx(value, abs=1e-9)  # runs share wavelengths out differently


@pytest.fixture(scope="module")
def studied(tmp_path_factory):
    """A stack at three wavelengths with its tolerance study beside it."""
    folder = tmp_path_factory.mktemp("studied")
    read_stack_of(folder, kind=GAUSSIAN)
    assert run("tolerance", folder / "stack.toml", "--samples", 16).exit_code == 0
    return folder


def test_tolerance_bands_go_along_when_a_study_lies_beside_the_stack(studied):
    assert run("handoff", studied / "stack.toml", "--to", studied / "out").exit_code == 0
    for name, file in (("bands", "bands.csv"), ("band_spectra", "bands_by_wavelength.csv")):
        sent = pd.read_csv(studied / "out" / "data" / f"{name}.csv")
        pd.testing.assert_frame_equal(sent, pd.read_csv(studied / "stack-tolerance" / file), rtol=ROUNDED)
    assert frictionless.validate(str(studied / "out" / "datapackage.json")).valid
    package = json.loads((studied / "out" / "datapackage.json").read_text("utf-8"))
    fields = [field for part in package["resources"] if "band" in part["name"] for field in part["schema"]["fields"]]
    assert fields
    assert all(field["description"] for field in fields)


def test_bands_of_another_stack_are_left_out_with_a_warning(studied, tmp_path):
    copy = shutil.copytree(studied, tmp_path / "copy")
    file = copy / "stack.toml"
    file.write_text(file.read_text("utf-8").replace("thickness_nm = 400", "thickness_nm = 380"), encoding="utf-8")
    done = run("handoff", file, "--to", copy / "later")
    assert done.exit_code == 0
    assert "bands were left out, because the stack file has changed since" in done.output
    assert not (copy / "later" / "data" / "bands.csv").exists()
