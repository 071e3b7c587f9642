"""Axes in one line, in a study file and in a table of cases."""

import pytest
from studied import STACK_FILE, small_stack

from optics.errors import InputError
from optics.study.axes import from_cases, from_lines, from_values
from optics.study.studyfile import asked


def test_a_range_holds_both_ends_in_plain_decimals():
    points = from_lines(small_stack(), ["film.thickness_nm = 50 to 51 step 0.1"])
    assert points.axes[0].values == (50.0, 50.1, 50.2, 50.3, 50.4, 50.5, 50.6, 50.7, 50.8, 50.9, 51.0)


def test_lists_hold_numbers_words_and_tables_in_braces():
    stack = small_stack()
    lines = ["glass.material = float-glass, { n = 1.7, k = 0 }, sapphire", "film.thickness_nm = 100, 2e2"]
    points = from_lines(stack, lines)
    assert points.axes[0].labels == ("float-glass", "1.7", "sapphire")
    assert points.axes[1].values == (100.0, 200.0)


def test_the_last_axis_runs_fastest_and_neighbours_are_one_step_away():
    points = from_values(small_stack(), {"film.thickness_nm": [1.0, 2.0, 3.0], "contact.thickness_nm": [10.0, 20.0]})
    assert len(points) == 6
    assert [points.values(point)["contact.thickness_nm"] for point in range(3)] == [10.0, 20.0, 10.0]
    assert sorted(points.neighbours(2)) == [
        ("contact.thickness_nm", 3),
        ("film.thickness_nm", 0),
        ("film.thickness_nm", 4),
    ]


def test_a_case_is_a_row_and_takes_whole_tables(tmp_path):
    for name in ("fresh", "aged"):
        (tmp_path / f"{name}.csv").write_text("wavelength_nm,n,k\n700,2.4,0.02\n900,2.3,0.001\n", encoding="utf-8")
    table = tmp_path / "cases.csv"
    text = "film.material,film.thickness_nm,light.spectrum.peak_nm\nfresh.csv,300,760\naged.csv,295,755\n"
    table.write_text(text, encoding="utf-8")
    points = from_cases(small_stack(), table, folder=tmp_path)
    assert len(points) == 2
    assert points.labels(1) == {
        "film.material": "aged.csv",
        "film.thickness_nm": 295.0,
        "light.spectrum.peak_nm": 755.0,
    }
    assert not list(points.neighbours(0))


@pytest.mark.parametrize(
    ("line", "said"),
    [
        ("film.thickness_nm", "expected KEY = VALUES, for example"),
        ("film.thickness_nm = ", "expected KEY = VALUES"),
        (
            "film.thickness_nm = 50 to 100 step 7",
            "film.thickness_nm: steps of 7 from 50 do not end at 100; 99 would do",
        ),
        ("film.thickness_nm = 50 to 100 step -5", "expected a step that leads from one to the other"),
        ("film.thickness_nm = 50 to 100 step x", 'film.thickness_nm: found "x" (text), expected a number'),
        ("film.thickness_nm = 0 to 100 step 50", "film.thickness_nm = 0: "),
        ("flim.thickness_nm = 50", "did you mean film.thickness_nm?"),
        ("glass.material = flot-glass", "did you mean float-glass"),
    ],
)
def test_a_line_that_cannot_be_is_refused_in_one_line(line, said):
    with pytest.raises(InputError) as refusal:
        from_lines(small_stack(), [line])
    assert said in str(refusal.value)
    assert len(refusal.value.faults) == 1


def test_all_faults_of_all_axes_are_told_at_once():
    with pytest.raises(InputError) as refusal:
        from_lines(small_stack(), ["film.thickness_nm = -1, -2, 5", "glass.material = nothing, sapphire"])
    assert len(refusal.value.faults) == 3


def test_points_that_only_together_are_wrong_are_refused_before_any_work():
    axes = {"film.thickness_nm": [100.0, 300.0], "film.varies_nm": [0.0, 40.0]}
    with pytest.raises(InputError, match=r"point 1: .*varies_nm: found 40, expected at most a sixth"):
        from_values(small_stack(), axes)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("film.thickness_nm\n", "found no cases"),
        ("film.thickness_nm,film.thickness_nm\n1,2\n", 'column "film.thickness_nm": found 2 times'),
        ("film.thickness_nm,glass.material\n100\n", "line 2: found 1 values, expected 2"),
        ("film.thickness_nm\n100\nthick\n", 'line 3: film.thickness_nm = "thick" (text)'),
    ],
)
def test_faults_of_a_table_of_cases_name_its_line(text, said, tmp_path):
    table = tmp_path / "cases.csv"
    table.write_text(text, encoding="utf-8")
    with pytest.raises(InputError) as refusal:
        from_cases(small_stack(), table)
    assert said in str(refusal.value)


def test_a_study_file_says_what_the_options_say(tmp_path):
    (tmp_path / "stack.toml").write_text(STACK_FILE, encoding="utf-8")
    study = tmp_path / "study.toml"
    study.write_text(
        'stack = "stack.toml"\nspectra = true\nbest = "max:free_above"\n'
        'vary = ["film.thickness_nm = 100 to 300 step 100", { key = "glass.material", values = ["sapphire"] }]\n',
        encoding="utf-8",
    )
    found = asked(study)
    assert found.stack_file == tmp_path / "stack.toml"
    assert found.vary == {"film.thickness_nm": [100.0, 200.0, 300.0], "glass.material": ["sapphire"]}
    assert found.spectra
    assert found.best == ("max:free_above",)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ('stack = "stack.toml"\nvari = []', "vari: unknown key; did you mean vary?"),
        ('stack = "stack.toml"\nvary = "film"', "vary: found"),
        (
            'stack = "stack.toml"\n[[vary]]\nkey = "film.thickness_nm"\nfrom = 1',
            "either values or all of from, to and step",
        ),
        ('stack = "stack.toml"\n[[vary]]\nvalues = [1]', "key: found nothing"),
        ('stack = "stack.toml"\ncases = 3', "cases: found 3"),
        ('stack = "stack.toml"\nspectra = 1', "spectra: found 1, expected true or false"),
    ],
)
def test_faults_of_a_study_file_name_file_and_key(text, said, tmp_path):
    study = tmp_path / "study.toml"
    study.write_text(text, encoding="utf-8")
    with pytest.raises(InputError) as refusal:
        asked(study)
    assert said in str(refusal.value)
    assert str(study) in str(refusal.value)
