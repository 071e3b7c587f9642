"""A dipole on the interface of two clear media: Lukosz & Kunz, J. Opt. Soc. Am. 67, 1607 (1977).

Numbers derived from their integrals by an independent script, two ways that agree to 1e-30. P1 is the power of the same
dipole in unbounded medium 1; allowed and forbidden light runs inside and beyond the critical angle of medium 2.
"""

import pytest
from piles import drawn, end_at, ledger, pieces, scene_of

from optics.fate.exits import FREE_ABOVE, FREE_BELOW

AIR, GLASS = 1.0, 1.5
SHEET_NM = 1e-4  # births in a sheet this thin are on the interface, up to terms of its phase thickness, 1e-6
ON_THE_INTERFACE = 3e-6
DIRECTIONS = {"normal": 0.0, "in plane": 1.0}
RATE = {"normal": 2.30357446576, "in plane": 1.38809456316}  # P/P1, seen from air
PERCENT = {  # into air, allowed and forbidden into glass
    "normal": (13.8629173, 17.9613104, 68.1757724),
    "in plane": (16.3414331, 28.2561091, 55.4024577),
}


def sheet(direction, medium, *, below=GLASS):
    return drawn(600, [(AIR, 0), (medium, SHEET_NM), (below, 0)], in_plane=DIRECTIONS[direction])


@pytest.mark.parametrize("medium", [AIR, GLASS], ids=["seen from air", "seen from glass"])
@pytest.mark.parametrize("direction", DIRECTIONS)
def test_shares_are_those_of_the_integrals_from_either_side(direction, medium):
    scene = scene_of(sheet(direction, medium))
    rate = ledger(sheet(direction, medium)).rate_factor[0]

    def share(low, high, end):
        q, weight = pieces(low, high, (), 128)
        return 100.0 * float(end_at(scene, q, end) @ weight) / rate

    above, allowed, forbidden = PERCENT[direction]
    assert share(0.0, AIR, FREE_ABOVE) == pytest.approx(above, rel=ON_THE_INTERFACE)
    assert share(0.0, AIR, FREE_BELOW) == pytest.approx(allowed, rel=ON_THE_INTERFACE)
    assert share(AIR, GLASS, FREE_BELOW) == pytest.approx(forbidden, rel=ON_THE_INTERFACE)


@pytest.mark.parametrize("direction", DIRECTIONS)
def test_the_rate_in_units_of_the_dipole_in_air(direction):
    assert ledger(sheet(direction, AIR)).rate_factor[0] == pytest.approx(RATE[direction], rel=ON_THE_INTERFACE)


@pytest.mark.parametrize(("direction", "power"), [("normal", 5), ("in plane", 1)])
def test_across_the_face_the_rate_changes_as_a_power_of_the_index(direction, power):
    """The normal field jumps by (n2/n1)^2, so P/P1 over P/P2 is (n2/n1)^5; the in-plane field does not jump."""
    ratio = ledger(sheet(direction, AIR)).rate_factor[0] / ledger(sheet(direction, GLASS)).rate_factor[0]
    assert ratio == pytest.approx((GLASS / AIR) ** power, rel=2 * ON_THE_INTERFACE)


def test_a_third_of_the_light_born_in_water_on_glass_runs_beyond_the_critical_angle():
    """About 34 % (published without the indices); 33.63 % for 1.33 on 1.50, derived."""
    drawing = drawn(600, [(1.33, 0), (1.33, SHEET_NM), (1.50, 0)])
    q, weight = pieces(1.33, 1.50, (), 128)
    forbidden = float(end_at(scene_of(drawing), q, FREE_BELOW) @ weight) / ledger(drawing).rate_factor[0]
    assert forbidden == pytest.approx(0.3363, abs=5e-5)
