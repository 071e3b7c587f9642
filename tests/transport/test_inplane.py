"""The kernel in the plane: totals, limits that have closed forms, and a Monte Carlo of rays."""

from dataclasses import replace

import numpy as np
import pytest
from piles import drawn, ledger
from piles import scene_of as only_scene
from scipy.integrate import quad
from scipy.special import expn, k0

from optics import Emission, Gaussian, Layer, Light, Outer, Stack, find_material, solve
from optics.transport import continuum, flights, rings
from optics.transport.handover import _unkerneled
from optics.transport.inplane import inplane
from optics.transport.nodes import Nodes, bound_nodes
from optics.waves.curves import Points
from optics.waves.modes import bound_modes, find

LEDGER = 1e-6  # what the ledger itself is known to
SIGMAS = 4.0  # of a seeded Monte Carlo; one in sixteen thousand draws would fail


def stack_of(media, *, above=1.0, below=1.5, wavelengths_nm=(760.0, 770.0, 780.0), **emission):
    layers = tuple(
        Layer(name=f"layer {i}", material=find_material(index), thickness_nm=thickness, emits=i == 0)
        for i, (index, thickness) in enumerate(media)
    )
    return Stack(
        above=Outer(material=find_material(above), counts_as="free"),
        below=Outer(material=find_material(below), counts_as="free"),
        layers=layers,
        light=Light(wavelengths_nm=np.array(wavelengths_nm), spectrum=Gaussian(peak_nm=770, fwhm_nm=40)),
        emission=Emission(**emission),
    )


@pytest.mark.parametrize(
    "media",
    [
        [(2.5 + 0.02j, 500)],
        [(2.5 + 0.002j, 500), (1.8 + 0.005j, 120), (1.52, 1.1e6)],
        [(1.65 + 0.005j, 60), (1.95 + 0.005j, 150), (1.52, 1.1e6)],
        [(2.5 + 0.02j, 30)],
        [(2.5 + 0.3j, 500), (0.2 + 4j, 80)],
        [(2.5, 500)],
        [(2.5 + 1e-3j, 60_000)],
        [(1.2 + 0.02j, 300), (1.8, 100)],
        [(1.2 + 0.02j, 300), (1.8 + 0.001j, 400)],
        [(1.33 + 0.0003j, 40), (3.2 + 0.01j, 200), (1.52, 1.1e6)],
    ],
    ids=[
        "film",
        "on a plate",
        "by a denser neighbour",
        "below cut-off",
        "on a metal",
        "clear",
        "thick",
        "no ray and no mode",
        "no ray, modes of a neighbour",
        "no ray, sharp modes",
    ],
)
@pytest.mark.parametrize("model", ["wave", "ray"])
def test_rings_add_up_to_what_the_ledger_says_the_film_takes(media, model):
    stack = stack_of(media)
    found = inplane(stack, model=model)
    if found.model != model:
        pytest.skip("a thick film has rays alone")
    wavelengths = stack.light.wavelengths_nm
    drawing = drawn(wavelengths, [(1.0, 0), *((i, t, "plate") if t > 2e4 else (i, t) for i, t in media), (1.5, 0)])
    said = ledger(drawing, model=model)
    film = said.shares["reabsorbed"] + said.shares["guided_reabsorbed"]
    last = found.by_wavelength.groupby("wavelength_nm")["cumulative"].last()
    assert found.compact["taken_back"].to_numpy() == pytest.approx(film, abs=LEDGER)
    # light that grazes a plate's face comes back beyond ten centimetres: that is left to a number of its own
    assert last.to_numpy() == pytest.approx(film, abs=1e-5)
    assert found.averages["beyond_grid"] == pytest.approx(found.averages["taken_back"] - found.kernel["share"].sum())
    assert (found.by_wavelength["share"] >= -1e-15).all()


@pytest.mark.parametrize("k", [1e-4, 0.02, 0.3])
def test_rays_summed_ray_by_ray_take_what_the_ray_ledger_says_before_any_scaling(k):
    drawing = drawn(760, [(1.0, 0), (2.5 + 1j * k, 500), (1.7 + 0.01j, 90), (1.52, 1.1e6, "plate"), (1.0, 0)])
    scene, said = only_scene(drawing), ledger(drawing, model="ray")
    radius = rings.edges_nm()[:, None] * 2 * np.pi / 760
    free = flights.flights(scene, radius, bound=False).plus(flights.returns(scene, radius))
    bound = flights.flights(scene, radius, bound=True)
    assert free.total == pytest.approx(said.taken[0, 1], rel=1e-5)
    assert bound.total == pytest.approx(said.taken[2, 1], abs=LEDGER)
    held = flights.held(scene, radius, model="ray")
    assert 0.0 < held.total[0] <= said.shares["substrate"][0] + LEDGER


def test_a_guide_of_one_mode_gives_an_exponential_of_twice_im_q():
    # 60 nm of 2.5 on 1.5 under air: past the cut-off of TE0 (31 nm at 770 nm), short of that of TM0 (79 nm)
    found = inplane(stack_of([(2.5 + 0.01j, 60)], wavelengths_nm=[770.0]))
    assert found.modes[["polarisation", "order"]].to_numpy().tolist() == [["s", 0]]
    rate_um = 4 * np.pi * found.modes["effective_index_k"].iloc[0] / 0.770
    radius = found.kernel["radius_to_um"].to_numpy()
    expected = found.modes["share"].iloc[0] * -np.expm1(-rate_um * radius)
    within = found.kernel["share_guided"].to_numpy().cumsum()
    # bound light in no mode dies with the film's own absorption, or is as much less than the mode holds
    assert within == pytest.approx(expected, abs=abs(found.averages["bound_in_no_mode"]) + 1e-9)
    far = radius > 6 / rate_um
    left = (found.averages["taken_back_guided"] - within)[far & (radius < 20 / rate_um)]
    decay = np.diff(np.log(left)) / np.diff(radius[far & (radius < 20 / rate_um)])
    assert decay == pytest.approx(-rate_um, rel=1e-6)


def first_flights(radius, tau):
    """Return the share absorbed within a radius (units of the thickness) on first flights from a sheet-free slab."""

    def at(cosine):
        path = min(1.0 / cosine, radius / np.sqrt(1.0 - cosine * cosine) if cosine < 1.0 else np.inf)
        gone = np.exp(-tau * path)
        return (1.0 - gone) - cosine / tau * (1.0 - gone * (1.0 + tau * path))

    corner = 1.0 / np.hypot(1.0, radius)  # where rays leave through a face at this very radius
    return quad(at, 0.0, corner, epsabs=1e-12)[0] + quad(at, corner, 1.0, epsabs=1e-12)[0]


@pytest.mark.parametrize("k", [0.01, 0.1, 1.0])
def test_without_interfaces_the_kernel_is_that_of_a_slabs_first_flights(k):
    drawing = drawn(760, [(2.5, 0), (2.5 + 1j * k, 500), (2.5, 0)])
    scene, tau = only_scene(drawing), 4 * np.pi * k * 500 / 760
    radius_nm = rings.edges_nm()[8:40:4]
    taken = flights.flights(scene, radius_nm[:, None] * 2 * np.pi / 760, bound=False)
    expected = [first_flights(r, tau) for r in radius_nm / 500]
    assert taken.within[:, 0] == pytest.approx(expected, abs=1e-4)  # the rule over angles, before it is scaled
    # Case, de Hoffmann & Placzek (1953): escape (1 - 2 E3(tau))/(2 tau)
    assert taken.total[0] == pytest.approx(1 - (1 - 2 * expn(3, tau)) / (2 * tau), abs=1e-4)


def reflectances(cosine, film, outer):
    """Return the power reflectances of s and p light at a bare face (Fresnel)."""
    sine = film / outer * np.sqrt(1.0 - cosine**2)
    onward = np.sqrt(np.maximum(1.0 - sine**2, 0.0))
    s = ((film * cosine - outer * onward) / (film * cosine + outer * onward)) ** 2
    p = ((outer * cosine - film * onward) / (outer * cosine + film * onward)) ** 2
    total = sine >= 1.0
    return np.where(total, 1.0, s), np.where(total, 1.0, p)


def traced(count, *, film, above, below, alpha, thickness, seed):
    """Trace rays one by one; return the radii at which they are absorbed, infinite for those that leave."""
    random = np.random.default_rng(seed)
    cosine = random.random(count)
    is_s = random.random(count) < 0.5  # isotropic births: half of the power in either polarisation at every angle
    upwards = random.random(count) < 0.5
    depth = thickness * random.random(count)
    to_go = random.exponential(1.0 / alpha, count)  # path before absorption
    made = np.zeros(count)
    alive, radius = np.ones(count, dtype=bool), np.full(count, np.inf)
    mirrors = [np.where(is_s, *reflectances(cosine, film, outer)) for outer in (above, below)]
    for _ in range(100_000):
        flight = np.where(upwards, depth, thickness - depth) / cosine
        taken = alive & (made + flight >= to_go)
        radius[taken] = to_go[taken] * np.sqrt(1.0 - cosine[taken] ** 2)
        made = made + flight
        back = random.random(count) < np.where(upwards, *mirrors)
        alive &= ~taken & back
        depth = np.where(upwards, 0.0, thickness)
        upwards = ~upwards
        if not alive.any():
            return radius
    raise AssertionError("rays that never end")


def test_a_monte_carlo_of_rays_agrees_with_the_kernel_of_a_thick_film():
    k, thickness = 2e-3, 50_000.0
    stack = stack_of([(2.5 + 1j * k, thickness)], wavelengths_nm=[770.0])
    found = inplane(stack)
    assert found.model == "ray"
    count = 40_000
    alpha = 4 * np.pi * k / 770
    radius = traced(count, film=2.5, above=1.0, below=1.5, alpha=alpha, thickness=thickness, seed=7) * 1e-3
    for place in range(20, 48, 3):
        row = found.kernel.iloc[place]
        drawn_share = (radius <= row["radius_to_um"]).mean()
        error = np.sqrt(row["cumulative"] * (1 - row["cumulative"]) / count)
        assert drawn_share == pytest.approx(row["cumulative"], abs=SIGMAS * error)


def test_trips_held_in_plates_are_taken_at_whole_numbers_of_them():
    one = np.ones((1, 1, 1))
    radius = np.array([0.5, 1.5, 2.5, 40.5])[:, None] * 3.0
    within, total = flights._by_trips(0.3 * one, 0.5 * one, 0.5 * one, 3.0 * one, radius)
    assert within[:, 0] == pytest.approx([0.0, 0.3, 0.45, 0.6], abs=1e-11)
    assert total == pytest.approx(0.6)


def test_the_group_index_is_the_effective_ones_less_wavelength_times_its_slope():
    stack = stack_of([(2.5 + 0.01j, 300)], wavelengths_nm=[770.0])
    table = inplane(stack).modes
    step = 1e-3
    sides = [find(only_scene(drawn(770 + d, [(1.0, 0), (2.5 + 0.01j, 300), (1.5, 0)]))) for d in (-step, step)]
    assert sides[0].polarisation.tolist() == sides[1].polarisation.tolist()
    slope = (sides[1].index - sides[0].index).real / (2 * step)
    expected = table["effective_index"].to_numpy() - 770 * slope
    assert table["group_index"].to_numpy() == pytest.approx(expected, abs=1e-6)
    assert (table["group_index"] > table["effective_index"] + 0.1).all()


def test_an_exponential_in_radius_becomes_k0_on_a_line():
    distance = np.array([0.01, 0.1, 1.0, 3.0])
    share = rings.on_line_of_exponential(np.array(1.0), distance)
    expected = [2 / np.pi * quad(k0, 0.0, x)[0] for x in distance]
    assert share == pytest.approx(expected, abs=1e-7)


def test_rings_projected_on_a_line_agree_with_the_closed_form():
    radius = rings.edges_nm()
    projected = rings.on_line(rings.within_of_exponential(1e-3, radius), radius)
    expected = rings.on_line_of_exponential(np.array(1e-3), radius)
    assert projected == pytest.approx(expected, abs=2e-3)  # a tenth of a decade is spread evenly


def test_the_line_holds_all_of_the_kernel_and_the_area_form_too():
    kernel = inplane(stack_of([(2.5 + 0.02j, 500)])).kernel
    width = np.diff(kernel["radius_to_um"], prepend=0.0)
    area = np.pi * np.diff(kernel["radius_to_um"] ** 2, prepend=0.0)
    whole = kernel["share"].sum()
    assert (kernel["line_per_cm"] * 2 * width * 1e-4).sum() == pytest.approx(whole, abs=1e-6)
    assert (kernel["per_cm2"] * area * 1e-8).sum() == pytest.approx(whole, rel=1e-12)
    assert (kernel["per_um_radius"] * width).sum() == pytest.approx(whole, rel=1e-12)


def test_exponentials_fitted_to_the_kernel_are_not_negative_and_say_how_far_off_they_are():
    found = inplane(stack_of([(2.5 + 0.02j, 500)]))
    for form, column in (("radius", "cumulative"), ("line", "line_cumulative")):
        terms = found.exponentials[found.exponentials["form"] == form]
        assert (terms["weight"] > 0).all()
        at = found.kernel["radius_to_um"].to_numpy()[:, None]
        sum_of_terms = (terms["weight"].to_numpy() * -np.expm1(-at / terms["length_um"].to_numpy())).sum(axis=1)
        miss = np.abs(sum_of_terms - found.kernel[column]).max()
        assert miss == pytest.approx(terms["largest_miss"].iloc[0], abs=1e-12)
        assert miss < 5e-3


def test_guided_light_turns_red_on_its_way():
    stack = stack_of(
        [("ch3nh3pbi3", 500)], wavelengths_nm=np.linspace(700, 860, 41)
    )  # published table: absorption falls towards the red, down to a floor
    said = inplane(stack).averages
    means = [said[f"guided_mean_wavelength_nm_{d}_um"] for d in (0, 1, 3, 10)]
    assert np.all(np.diff(means) > 1.0)


def test_the_diffusivity_is_that_of_flights_that_end_at_the_absorption_rate():
    table = inplane(stack_of([(2.5 + 0.02j, 500)])).compact
    rate = table["absorption_in_plane_per_cm"] * 1e-4 * table["group_velocity_um_per_ps"]
    assert table["absorption_rate_per_ps"].to_numpy() == pytest.approx(rate.to_numpy())
    # D = L^2 x rate, um^2/ps = 1e4 cm^2/s
    length = table["diffusion_length_um"]
    assert table["diffusivity_cm2_per_s"].to_numpy() == pytest.approx((length**2 * rate * 1e4).to_numpy())
    assert table["diffusion_miss"].between(0.05, 0.3).all()  # one exponential against K0: far apart, and said so


def test_the_mean_group_velocity_is_that_of_the_mean_time_on_the_way():
    found = inplane(stack_of([(2.5 + 0.02j, 500)]))
    modes, table = found.modes, found.compact
    delay = (modes["share"] * modes["group_index"]).groupby(modes["wavelength_nm"]).sum()
    share = modes.groupby("wavelength_nm")["share"].sum()
    velocity = 299.792458 / (delay / share).to_numpy()  # um/ps; the film is all that absorbs
    assert table["group_velocity_um_per_ps"].to_numpy() == pytest.approx(velocity, rel=1e-9)
    guided = solve(found.stack).table["birth_weight"].to_numpy() * table["guided_share"].to_numpy()
    mean = guided.sum() / (guided / velocity).sum()
    assert found.averages["group_velocity_um_per_ps"] == pytest.approx(mean, rel=1e-9)


def contact_over_a_rare_film(thickness_nm=300.0):
    """Return a film of index 1.2 under a contact of 1.8 on glass: no bound rays, and no mode at all."""
    stack = stack_of([(1.8, 100.0), (1.2 + 0.02j, thickness_nm)])
    contact, film = stack.layers
    return replace(stack, layers=(replace(contact, emits=False), replace(film, emits=True)))


def test_bound_light_that_neither_rays_nor_modes_carry_is_all_there_near_its_birth_and_told_of():
    stack = contact_over_a_rare_film()
    found, said = inplane(stack), solve(stack).averages
    assert found.modes.empty
    whole = said["reabsorbed"] + said["guided_reabsorbed"]
    assert said["guided_reabsorbed"] > 0.01
    assert found.averages["taken_back"] == pytest.approx(whole, abs=LEDGER)
    assert found.averages["taken_back_guided"] > 0.01
    guided = found.kernel["share_guided"].cumsum()
    # it fades within the film over 1/(2 k0 sqrt(q^2 - n^2)), 46 to 68 nm, and comes from there: not from 3 um, 1/alpha
    half_um = rings.quantile(guided.to_numpy(), found.kernel["radius_to_um"].to_numpy(), 0.5)
    assert 0.03 < half_um < 0.2
    (line,) = found.warnings
    assert f"{found.averages['taken_back_guided']:.4f} of the births" in line
    assert f"half of it within {half_um:.3g} um" in line


def test_a_film_that_has_rays_and_modes_is_warned_of_nothing():
    assert inplane(stack_of([(2.5 + 0.02j, 500)])).warnings == ()


def test_a_kernel_that_held_less_than_the_ledger_would_be_told_of_in_a_bundle():
    stack = stack_of([(2.5 + 0.02j, 500)])
    found, result = inplane(stack), solve(stack)
    assert _unkerneled(result, found) == ()
    short = replace(found, averages=found.averages | {"taken_back": found.averages["taken_back"] - 0.02})
    (line,) = _unkerneled(result, short)
    assert "kernel in the plane" in line


def one_row(q):
    """Return nodes of the bound zone at given q, for one wavelength of an index."""
    q = np.asarray(q, float)[None]
    return lambda index: Nodes(
        np.zeros(1, dtype=np.intp), Points(q, np.ones_like(q), index - q), np.ones_like(q), (0, 1), bound=True
    )


def test_without_interfaces_the_reach_of_a_fading_field_is_that_of_its_closed_form():
    index, thickness, wavelength = 1.2 + 0.05j, 200.0, 760.0
    scene = only_scene(drawn(wavelength, [(index, 0), (index, thickness), (index, 0)], in_plane=1.0))
    q = np.array([1.4, 1.7, 2.5])
    field = continuum.field_at(scene, one_row(q)(scene.film_index[0]))
    phase = 2 * np.pi * thickness / wavelength
    nodes, weights = np.polynomial.legendre.leggauss(continuum.DEPTHS)
    depth, weight = 0.5 * phase * (1 + nodes), 0.5 * weights
    gap = np.abs(np.subtract.outer(depth, depth))[..., None]
    # s: G = exp(i kz g)/kz, dG/dq = -(q/kz)(i g - 1/kz) G; real half-spaces here see k of the film by 1e-3 alone
    kz = np.sqrt(index**2 - q * q + 0j)
    size = np.exp(1j * kz * gap) / kz
    slope = -(q / kz) * (1j * gap - 1 / kz) * size
    means = [np.einsum("i,j,ijq->q", weight, weight, np.abs(part) ** 2) for part in (size, slope)]
    assert field.rate[0, 0] == pytest.approx(np.sqrt(2 * means[0] / means[1]), rel=2e-2)


@pytest.mark.parametrize("in_plane", [1.0, 2 / 3, 0.1])
@pytest.mark.parametrize("polarisation", [0, 1])
def test_over_a_guided_line_amount_and_mean_square_distance_are_those_of_the_mode(polarisation, in_plane):
    scene = only_scene(drawn(770, [(1.0, 0), (2.5 + 0.002j, 130), (1.5, 0)], in_plane=in_plane))
    modes = bound_modes(scene)
    assert modes.polarisation.tolist() == [0, 1]
    line = modes.index[polarisation]
    weight, square = 0.0, 0.0
    for each in bound_nodes(scene):
        if polarisation in each.polarisations:
            field = continuum.field_at(scene, each)
            near = np.abs(each.points.q - line.real) < 0.05
            taken = field.taken[polarisation] * each.weight * near
            weight, square = weight + taken.sum(), square + (taken * 2.0 / field.rate[polarisation] ** 2).sum()
    amount = (modes.power * modes.taken[scene.film])[polarisation]
    assert weight == pytest.approx(amount, rel=0.03)  # 0.05 cuts the line's wings
    assert square / weight == pytest.approx(2.0 / (2.0 * line.imag) ** 2, rel=0.05)


@pytest.mark.parametrize(("slant", "up", "down"), [(0.3, 0.9, 0.4), (2.0, 1.0, 1.0), (0.01, 0.2, 0.7)])
def test_crossings_of_a_ray_are_the_sum_over_its_births_and_faces(slant, up, down):
    passes = flights.Passes(np.array([[slant]]), np.array([[[up]]]), np.array([[[down]]]))
    births = (np.arange(20_000) + 0.5) / 20_000
    for path in (0.4, 0.995, 1.0, 1.7, 2.0, 3.3, 8.2):
        expected = 0.0
        for first, second in ((up, down), (down, up)):
            power, made = np.ones_like(births), np.zeros_like(births)
            for face in range(12):
                ahead = np.minimum(births + face, path)  # what is left to the next face, from where the ray started
                expected += 0.5 * (power * (np.exp(-slant * made) - np.exp(-slant * ahead))).mean()
                made = ahead
                power = power * (first if face % 2 == 0 else second)
        within = passes.within(np.array([[[path]]]))[0, 0, 0, 0]
        assert within == pytest.approx(expected, abs=1e-8)  # births on a grid of 20 000


def test_modes_are_left_out_of_the_continuum():
    scene = only_scene(drawn(770, [(1.0, 0), (2.5 + 0.002j, 60), (1.5, 0)]))
    radius = rings.edges_nm()[:, None] * 2 * np.pi / 770
    modes = bound_modes(scene)
    none = modes.take(np.zeros(0, dtype=np.intp))
    with_line, without = (continuum.continuum(scene, radius, some).total[0] for some in (none, modes))
    assert with_line > 0.3
    assert without < 0.05 * with_line
