"""A thousand mutated tables whose truth is known: the right numbers, or a refusal; never a wrong number in silence.

Each table is written in a random dialect, unit and wording, and then something happens to it. What cannot be seen in
any single file is a heading that names another unit under which the numbers make sense too (5000 "1/cm" for 5000
angstrom): there the reader must say what it took them for, and the range it says must lie off the truth, so that no
light fits into it. (600 nm and 600 THz lie so close that even this fails; that one lie is left out.)
"""

import re

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optics import units
from optics.errors import InputError
from optics.media.dialects import text_of
from optics.media.headings import AXIS_UNITS
from optics.media.labfile import LabTable, parse_lab
from optics.media.labvalues import nm_of

SAME = 1e-9  # relative: what the tool promises
ROUNDING = 1e-12  # absolute, of k through eps2 = 2 n k
TABLES = 1000
BATCHES = 10
SPEED = 299_792_458.0

UNITS = {
    "nm": lambda nm: nm,
    "um": lambda nm: nm / 1e3,
    "angstrom": lambda nm: nm * 10.0,
    "eV": units.energy_eV,
    "meV": lambda nm: units.energy_eV(nm) * 1e3,
    "1/cm": lambda nm: 1e7 / nm,
    "THz": lambda nm: SPEED / nm * 1e-3,
}
SHAPES = ("{name} ({unit})", "{name}_{unit}", "{name} [{unit}]", "{name}/{unit}", "{name} in {unit}")


class Written:
    """A table of known truth in a random form."""

    def __init__(self, dice: np.random.Generator) -> None:
        self.dice = dice
        count = int(dice.integers(4, 12))
        self.nm = np.sort(dice.uniform(350.0, 1100.0, count))
        self.n = dice.uniform(1.3, 4.0, count)
        self.k = dice.uniform(0.0, 1.0, count) * (dice.random(count) > 0.2)
        self.unit = str(dice.choice(list(UNITS)))
        self.separator, self.decimal = ((",", "."), (";", ","), (";", "."), ("\t", ","), ("\t", "."), (" ", "."))[
            int(dice.integers(6))
        ]
        axis = str(dice.choice(SHAPES)).format(name=AXIS_UNITS[self.unit], unit=self.unit)
        axis = axis.replace(" ", "_") if self.separator == " " else axis
        columns = {axis: UNITS[self.unit](self.nm), **self._index()}
        if dice.random() < 0.4:
            columns["MSE"] = dice.uniform(0.0, 9.0, count)
        self.names = [str(name) for name in dice.permutation(list(columns))]
        rows = [[repr(float(columns[name][row])) for name in self.names] for row in range(count)]
        self.rows = [[cell.replace(".", self.decimal) for cell in row] for row in rows][:: int(dice.choice([1, -1]))]
        self.above = ["Measured on a Tuesday", "Angles;65;70;75"][: int(dice.integers(3))]
        self.axis = axis

    def _index(self) -> dict[str, np.ndarray]:
        form = int(self.dice.integers(3))
        if form == 0:
            return {"n": self.n, "k": self.k}
        if form == 1:
            eps = (self.n + 1j * self.k) ** 2
            return {"eps1": eps.real, "eps2": eps.imag}
        return {"n": self.n, "alpha_1/cm": 4.0 * np.pi * self.k / (self.nm * 1e-7)}

    def text(self) -> str:
        lines = [self.separator.join(cells) for cells in ([self.names] if self.names else []) + self.rows]
        return "\n".join([*self.above, *lines]) + "\n"


def _same(table: Written) -> None:
    """Leave it as it is."""


def _swap_rows(table: Written) -> None:
    one, two = table.dice.choice(len(table.rows), 2, replace=False)
    table.rows[one], table.rows[two] = table.rows[two], table.rows[one]


def _twice(table: Written) -> None:
    table.rows.insert(
        int(table.dice.integers(len(table.rows))), list(table.rows[int(table.dice.integers(len(table.rows)))])
    )


def _other_mark(table: Written) -> None:
    """Change the decimal mark of every cell, whatever separates them."""
    other = {".": ",", ",": "."}[table.decimal]
    table.rows = [[cell.replace(table.decimal, other) for cell in row] for row in table.rows]


def _other_mark_in_places(table: Written) -> None:
    other = {".": ",", ",": "."}[table.decimal]
    for row in table.rows:
        for place in range(len(row)):
            if table.dice.random() < 0.3:
                row[place] = row[place].replace(table.decimal, other)


def _other_separator(table: Written) -> None:
    table.separator = str(table.dice.choice([",", ";", "\t", " "]))


def _lying_unit(table: Written) -> None:
    lies = [unit for unit in UNITS if unit != table.unit and {unit, table.unit} != {"nm", "THz"}]
    lie = str(table.dice.choice(lies))
    name = f"{AXIS_UNITS[lie]}_{lie}"
    table.names = [name if each == table.axis else each for each in table.names]


def _no_unit(table: Written) -> None:
    table.names = [AXIS_UNITS[table.unit] if each == table.axis else each for each in table.names]


def _no_header(table: Written) -> None:
    table.names = []


def _cell(table: Written) -> tuple[list[str], int]:
    row = table.rows[int(table.dice.integers(len(table.rows)))]
    return row, int(table.dice.integers(len(row)))


def _empty_cell(table: Written) -> None:
    row, place = _cell(table)
    row[place] = ""


def _lost_cell(table: Written) -> None:
    row, place = _cell(table)
    del row[place]


def _word(table: Written) -> None:
    row, place = _cell(table)
    row[place] = str(table.dice.choice(["nan", "high", "---", "1_5", "1e999", "0x1F", "12 3"]))


def _negative(table: Written) -> None:
    row, place = _cell(table)
    if table.names[place] != "eps1":  # which may be negative
        row[place] = f"-{row[place]}"


def _sorted_columns(table: Written) -> None:
    order = table.dice.permutation(len(table.names))
    table.names = [table.names[place] for place in order]
    table.rows = [[row[place] for place in order] for row in table.rows]


def _stray_line(table: Written) -> None:
    table.rows.insert(
        int(table.dice.integers(1, len(table.rows))), [str(table.dice.choice(["# note", "lamp off", "%"]))]
    )


MUTATIONS = (
    _same,
    _swap_rows,
    _twice,
    _other_mark,
    _other_mark_in_places,
    _other_separator,
    _lying_unit,
    _no_unit,
    _no_header,
    _empty_cell,
    _lost_cell,
    _word,
    _negative,
    _sorted_columns,
    _stray_line,
)


def right(table: LabTable, truth: Written) -> bool:
    """Say whether every row that was read is one of the truth's, and none is missing."""
    if table.n is None or table.wavelength_nm.size != truth.nm.size:
        return False
    pairs = ((table.wavelength_nm, truth.nm), (table.n, truth.n), (table.k, truth.k))
    return all(np.allclose(one, two, rtol=SAME, atol=ROUNDING) for one, two in pairs)


def told(table: LabTable, truth: Written) -> bool:
    """Say whether the range that the reader says lies off the truth by more than a tenth."""
    said = re.search(r"rows, (\S+) to (\S+) nm", " ".join(table.understood))
    assert said is not None
    first, last = (float(word) for word in said.groups())
    return abs(first / truth.nm[0] - 1.0) > 0.1 or abs(last / truth.nm[-1] - 1.0) > 0.1


@pytest.mark.parametrize("batch", range(BATCHES))
def test_a_mutated_table_gives_the_right_numbers_or_a_refusal(batch: int) -> None:
    read = 0
    for seed in range(batch * TABLES // BATCHES, (batch + 1) * TABLES // BATCHES):
        truth = Written(np.random.default_rng(seed))
        mutation = MUTATIONS[seed % len(MUTATIONS)]
        mutation(truth)
        text = truth.text()
        try:
            table = parse_lab(text, place="film.csv")
        except InputError as refusal:
            assert mutation not in (_same, _sorted_columns), f"seed {seed}: {refusal}\n{text}"
            assert all(fault.startswith("film.csv: ") and fault.isprintable() for fault in refusal.faults)
            continue
        read += 1
        if mutation is _lying_unit:
            assert told(table, truth), f"seed {seed}\n{text}"
        else:
            assert right(table, truth), f"seed {seed}, {mutation.__name__}\n{text}\n{table}"
    assert read > TABLES // BATCHES // 5  # a reader that refuses everything would pass otherwise


def test_a_unit_of_another_size_is_seen_wherever_the_numbers_make_no_sense_in_it() -> None:
    nm = np.array([350.0, 1100.0])
    seen = set()
    for true, values_of in UNITS.items():
        for lie in UNITS:
            if lie == true:
                continue
            values = values_of(nm)
            text = f"{AXIS_UNITS[lie]}_{lie},n,k\n" + "".join(f"{float(value)!r},2,0\n" for value in values)
            taken = np.sort(nm_of(values, lie))
            try:
                table = parse_lab(text, place="film.csv")
            except InputError as refusal:
                assert "mend the unit in the header" in str(refusal)
                seen.add((true, lie))
            else:
                assert table.wavelength_nm == pytest.approx(taken)
    usual = {("nm", "um"), ("nm", "eV"), ("nm", "angstrom"), ("um", "nm"), ("eV", "nm"), ("um", "angstrom")}
    assert usual <= seen


PIECES = st.lists(
    st.one_of(
        st.sampled_from(
            [
                *("0", "1", "9", ",", ".", ";", "\t", " ", "\n", "\r", "#", '"', "%", "-", "e", "D", "\x1b", "\0", "_"),
                *("wavelength_nm", "nm", "E (eV)", "n", "k", "eps1", "1/cm", "nan", "inf", "\N{GREEK SMALL LETTER MU}"),
                *("\n400,1.5,0.1\n", "500;1,6;0,2\n", "wavelength_nm,n,k\n", "wl\tn\tk\n", "300\t2,5\t1\n"),
            ]
        ),
        st.text(max_size=3),
    ),
    max_size=60,
).map("".join)


@settings(max_examples=1000, deadline=None)
@given(PIECES)
def test_any_text_is_a_table_or_a_refusal_in_lines_that_can_be_shown(text):
    try:
        table = parse_lab(text, place="film.csv")
    except InputError as refusal:
        assert refusal.faults
        assert all(fault.startswith("film.csv: ") and fault.isprintable() for fault in refusal.faults)
    else:
        assert np.isfinite(table.tabulated.index(table.wavelength_nm)).all()


@settings(max_examples=300, deadline=None)
@given(st.binary(max_size=200))
def test_any_bytes_are_a_text_or_a_refusal(content):
    try:
        text_of(content, place="film.csv")
    except InputError as refusal:
        assert all(fault.isprintable() for fault in refusal.faults)
