"""The screen: no more digits than the error supports, trapped first, plain text."""

import re
from dataclasses import replace
from pathlib import Path

import pytest
from made_results import made_result, made_stack

from optics.output.numbers import decimals_for, plain
from optics.output.report import report, stack_line


@pytest.mark.parametrize(
    ("error", "decimals"),
    [(0.0, 4), (1e-12, 4), (2e-5, 4), (1e-4, 3), (3e-3, 2), (0.02, 1), (0.4, 1), (float("nan"), 1)],
)
def test_a_share_has_no_more_decimals_than_its_error_supports(error, decimals):
    assert decimals_for(error) == decimals


def test_the_table_leads_with_the_trapped_sum_and_shows_both_models_and_their_difference():
    lines = report(made_result()).splitlines()
    head = next(place for place, line in enumerate(lines) if line.startswith("Share of photons born"))
    assert lines[head].split()[-5:] == ["wave", "ray", "wave", "-", "ray"]
    assert lines[head + 1].split() == ["trapped", "0.6000", "0.6200", "-0.0200"]
    assert [line.split()[0] for line in lines[head + 2 : head + 4]] == ["reabsorbed", "waveguided"]


def test_a_large_error_takes_digits_away():
    text = report(replace(made_result(), numerical_error=3e-3))
    assert "0.60 " in text
    assert "0.600" not in text


def test_the_stack_its_assumptions_and_warnings_come_first():
    text = report(made_result(), folder=Path("stack-result"))
    assert text.splitlines()[0] == "Invented film"
    assert text.splitlines()[1] == "air / film 480 nm (emits) / glass 1.1 mm (plate) / air"
    order = [text.index(word) for word in ("Assumed:", "Warnings:", "Share of photons", "Rate factor", "Files: ")]
    assert order == sorted(order)
    assert "  - k stops falling at 720 nm" in text


def test_closure_error_and_advice_are_shown():
    text = report(made_result())
    assert "Rate factor: 0.9470" in text
    assert "Closure: 1e-12" in text
    assert "Numerical error of the shares: 2e-07" in text
    assert "Advised model: wave." in text


def test_rays_alone_have_one_column_and_no_rate_factor():
    text = report(made_result(ray=True))
    assert "Rate factor" not in text
    assert "wave - ray" not in text


def test_a_known_input_uncertainty_has_a_column_of_its_own():
    lines = report(made_result(), uncertainty={"trapped": 0.0123}).splitlines()
    row = next(line for line in lines if line.startswith("trapped"))
    assert row.split()[-1] == "0.0123"


def test_no_heads_of_columns_run_together():
    moved = {"trapped": -0.01, "free_above": 0.01}
    lines = report(replace(made_result(), moved_by_tail=moved), uncertainty={"trapped": 0.1}).splitlines()
    head = next(line for line in lines if line.startswith("Share of photons born"))
    assert re.split(r" {2,}", head)[1:] == ["wave", "ray", "wave - ray", "by the tail", "inputs +-"]
    row = next(line for line in lines if line.startswith("trapped"))
    assert head.index("by the tail") + len("by the tail") == row.index("-0.0100") + len("-0.0100")


@pytest.mark.parametrize(
    ("nm", "said"), [(320.0, "320 nm"), (25e3, "25 um"), (60e3, "60 um"), (0.7e6, "0.7 mm"), (1.1e6, "1.1 mm")]
)
def test_thicknesses_have_the_unit_that_people_write(nm, said):
    stack = made_stack()
    layers = tuple(replace(layer, thickness_nm=nm, phases=None) for layer in stack.layers)
    assert f"glass {said}" in stack_line(replace(stack, layers=layers))


def test_numbers_are_plain_where_people_write_no_exponent():
    assert [plain(each) for each in (1250.0, 6530.4, 591000.0, 77.1234, 0.02, 3.2e7)] == [
        "1250", "6530", "591000", "77.1", "0.02", "3.2e+07",
    ]  # fmt: skip


def test_the_screen_is_plain_ascii():
    assert report(made_result(), folder=Path("out")).isascii()
