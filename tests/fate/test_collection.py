"""What an aperture gathers: closed forms for one face, the whole free share at the largest aperture, the pattern."""

from itertools import pairwise

import numpy as np
import pytest
from piles import amounts, drawn

from optics.fate.collection import gathered_power, pattern

CLOSED = 1e-8  # quadrature of the package
WHOLE = 2e-8  # quadrature of the package twice, and of the test


def face(n, *, in_plane=2 / 3):
    """Return a clear film between its own index below and air above: one face, no second one to return light."""
    return drawn(700, [(1, 0), (n, 500), (n, 0)], in_plane=in_plane)


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("na", [0.1, 0.5, 0.9, 1.4])
def test_without_a_bare_step_an_aperture_takes_its_cone(model, na):
    # No interface at all: (1 - cos(asin(NA/n)))/2 of isotropic births, a cone of one side.
    n = 1.5
    gathered, _ = gathered_power(drawn(700, [(n, 0), (n, 500), (n, 0)]), side=0, na=na, model=model)
    assert gathered[0] == pytest.approx(0.5 * (1 - np.sqrt(1 - (na / n) ** 2)), abs=CLOSED)


@pytest.mark.parametrize("in_plane", [0.0, 2 / 3, 1.0])
@pytest.mark.parametrize("na", [0.2, 0.7, 0.95, 1.0])
def test_through_a_bare_step_an_aperture_takes_its_cone_less_the_fresnel_loss(na, in_plane):
    # One face by rays: the launch per solid angle, s and p apart, times Fresnel's transmittance (Hecht, Optics, 4.6).
    n = 2.5
    node, weight = np.polynomial.legendre.leggauss(200)
    inside = np.arcsin(na / n) * np.sin(0.25 * np.pi * (node + 1)) ** 2  # nodes crowd at the critical angle
    step = np.arcsin(na / n) * 0.25 * np.pi * weight * np.sin(0.5 * np.pi * (node + 1))
    outside = np.arcsin(np.minimum(n * np.sin(inside), 1.0))
    ci, co = np.cos(inside), np.cos(outside)
    passes = {"s": 1 - ((n * ci - co) / (n * ci + co)) ** 2, "p": 1 - ((ci - n * co) / (ci + n * co)) ** 2}
    launched = {"s": 0.75 * in_plane, "p": 0.75 * in_plane * ci**2 + 1.5 * (1 - in_plane) * np.sin(inside) ** 2}
    expected = sum((0.5 * launched[each] * passes[each] * np.sin(inside) * step).sum() for each in "sp")
    gathered, _ = gathered_power(face(n, in_plane=in_plane), side=0, na=na, model="ray")
    assert gathered[0] == pytest.approx(expected, abs=CLOSED)


STACKS = {
    "on glass": (drawn(700, [(1, 0), (2.5 + 0.02j, 500), (1.52 + 1e-8j, 1e6, "plate"), (1, 0)]), ("free", "free")),
    "held below": (drawn(700, [(1, 0), (2.5 + 0.02j, 500), (1.52, 0)], free=(True, False)), ("free", "held")),
    "dense below": (drawn(700, [(1.3, 0), (1.7 + 0.02j, 80), (2.1, 90), (1.9, 0)]), ("free", "free")),
    "dense plate": (drawn(700, [(1, 0), (2.5 + 0.02j, 300), (1.8, 1e6, "plate"), (1.4, 0)]), ("free", "free")),
}
NAMES = {(0, "free"): "free_above", (1, "free"): "free_below", (1, "held"): "substrate"}


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("name", STACKS)
def test_an_aperture_that_takes_all_gathers_the_whole_share(name, model):
    drawing, kinds = STACKS[name]
    whole = amounts(drawing, model=model)
    for side in (0, 1):
        expected = whole[NAMES[side, kinds[side]]]
        outer = drawing.index[(0, -1)[side], 0].real
        for na in (None, outer, 3.0):
            gathered, _ = gathered_power(drawing, side=side, na=na, model=model)
            assert gathered[0] == pytest.approx(expected, abs=WHOLE)


@pytest.mark.parametrize("model", ["wave", "ray"])
@pytest.mark.parametrize("name", STACKS)
def test_the_pattern_integrates_to_the_whole_share_and_to_what_an_aperture_gathers(name, model):
    drawing, kinds = STACKS[name]
    whole = amounts(drawing, model=model)
    for side in (0, 1):
        outer = drawing.index[(0, -1)[side], 0].real
        lines = [np.rad2deg(np.arcsin(index.real / outer)) for index in drawing.index[:, 0] if index.real < outer]
        for na, expected in (
            (outer, whole[NAMES[side, kinds[side]]]),
            (0.6, gathered_power(drawing, side=side, na=0.6, model=model)[0][0]),
        ):
            angles, weight = angle_nodes(np.rad2deg(np.arcsin(min(na / outer, 1.0))), lines)
            found = pattern(drawing, angles, side=side, model=model)[:, 0] @ weight
            assert found == pytest.approx(expected, abs=WHOLE)


def angle_nodes(last, lines):
    """Return angles up to `last`, cut at light lines and crowded there, and steps of solid angle."""
    node, weight = np.polynomial.legendre.leggauss(160)
    marks = [0.0, *sorted(line for line in lines if line < last), last]
    angles, steps = [], []
    for low, high in pairwise(marks):
        angles.append(low + (high - low) * np.sin(0.25 * np.pi * (node + 1)) ** 2)
        steps.append((high - low) * 0.25 * np.pi * weight * np.sin(0.5 * np.pi * (node + 1)))
    angles = np.concatenate(angles)
    return angles, 2 * np.pi * np.sin(np.deg2rad(angles)) * np.deg2rad(np.concatenate(steps))


def test_the_pattern_at_the_normal_is_the_limit_of_small_angles_and_grazing_light_is_none():
    drawing, _ = STACKS["on glass"]
    normal, near, grazing = pattern(drawing, np.array([0.0, 0.01, 90.0]), side=0, model="wave")[:, 0]
    assert normal == pytest.approx(near, rel=1e-6)
    assert grazing == pytest.approx(0.0, abs=1e-12)


def test_nothing_is_gathered_through_a_metal():
    drawing = drawn(700, [(1, 0), (2.5 + 0.02j, 500), (0.1 + 4j, 0)])
    assert gathered_power(drawing, side=1, na=0.9, model="wave")[0][0] == 0.0
    assert not pattern(drawing, np.array([0.0, 30.0]), side=1, model="wave").any()
