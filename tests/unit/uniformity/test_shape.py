import numpy as np
import pytest

from sheenmap.flags import AMBIGUOUS
from sheenmap.uniformity import azimuth_profile, edge_roll_off, radial_profile, shape_of
from sheenmap.uniformity.shape import TERMS, zernike
from sheenmap.wafer import Disc, Region
from sheenmap.wafer.locate import disc_inside

DISC = Disc(x_px=102.4, y_px=97.1, radius_px=90.0)
INSIDE = disc_inside(DISC, (200, 210), 0.0)
X = (np.arange(210) - 102.4) / 90
Y = -(np.arange(200)[:, None] - 97.1) / 90
FLAGS = np.zeros((200, 210), np.uint16)


def region(rotation_deg=0.0):
    return Region(inside=INSIDE, origin_px=(102.4, 97.1), mm_per_px=100 / 90, disc=DISC, rotation_deg=rotation_deg)


def terms(thickness, *, sigma=0.5, flags=FLAGS, order=2, rotation_deg=0.0):
    found = shape_of(thickness, np.full(FLAGS.shape, sigma), flags, region(rotation_deg), order=order)
    return {term.name: term for term in found.terms}, found


def test_bowl_and_tilt_are_recovered():
    """Goal: 0.1 nm on a bowl and tilt with 0.8 nm of noise; 25,000 pixels leave 0.01."""
    thickness = 497 + 9 * (X**2 + Y**2) + 3.5 * X - 2 * Y + np.random.default_rng(0).normal(0, 0.8, FLAGS.shape)
    found, shape = terms(thickness, sigma=0.8)
    expected = {"mean": 501.5, "tilt x": 3.5, "tilt y": -2.0, "bowl": 4.5, "saddle 0": 0.0, "saddle 45": 0.0}
    for name, value in expected.items():
        assert found[name].value_nm == pytest.approx(value, abs=0.1)
        assert abs(found[name].value_nm - value) < 4 * found[name].u_nm
    assert shape.residual_sd_nm == pytest.approx(0.8, rel=0.03)
    assert shape.radius_mm == pytest.approx(100)


def test_correlated_noise_makes_terms_less_certain():
    thickness, sigma = 500 + 0 * X + 0 * Y, np.ones(FLAGS.shape)
    one, four = (shape_of(thickness, sigma, FLAGS, region(), noise_correlation=c).terms[3].u_nm for c in (1.0, 4.0))
    assert four == pytest.approx(2 * one)


def test_saddle_of_each_direction_has_its_name():
    found, _ = terms(500 + 2 * (X**2 - Y**2) + 3 * (2 * X * Y))
    assert found["saddle 0"].value_nm == pytest.approx(2, abs=1e-6) and found["saddle 45"].value_nm == pytest.approx(3, abs=1e-6)


def test_higher_terms_are_recovered():
    radius, angle = np.hypot(X, Y), np.arctan2(Y, X)
    thickness = 500 + sum((i + 1) * zernike(n, m, radius, angle) for i, (n, m) in enumerate(list(TERMS.values())[1:]))
    found, _ = terms(thickness, order=4)
    assert [found[name].value_nm for name in list(TERMS)[1:]] == pytest.approx(range(1, len(TERMS)), abs=1e-6)


def test_tilt_is_given_in_the_part_s_own_axes():
    """The notch at the right is turned down, so a slope to the right of the picture falls towards the part's bottom."""
    found, _ = terms(500 + 3 * X + 0 * Y, rotation_deg=-90.0)
    assert (found["tilt x"].value_nm, found["tilt y"].value_nm) == pytest.approx((0, -3), abs=1e-6)


@pytest.mark.parametrize(("n", "m"), list(TERMS.values()))
def test_terms_are_largest_at_the_rim(n, m):
    angle = np.linspace(0, 2 * np.pi, 721)
    assert np.abs(zernike(n, m, np.ones_like(angle), angle)).max() == pytest.approx(1, abs=1e-4)


def test_terms_are_orthogonal_over_the_disc():
    radius, angle = np.hypot(X, Y)[INSIDE], np.arctan2(Y, X)[INSIDE]
    design = np.column_stack([zernike(n, m, radius, angle) for n, m in TERMS.values()])
    products = design.T @ design / len(design)
    assert np.abs(products - np.diag(np.diag(products))).max() < 2e-3  # pixels at the rim


def test_blocked_half_lowers_the_order():
    flags = FLAGS.copy()
    flags[:, 60:] = AMBIGUOUS.mask
    _, shape = terms(500 + 9 * (X**2 + Y**2), flags=flags)
    assert shape.order < 2 and shape.share_claimed < 0.25


def test_nothing_claimed_has_no_shape():
    assert shape_of(np.full(FLAGS.shape, np.nan), np.ones(FLAGS.shape), FLAGS, region()) is None


def test_radial_profile_of_a_bowl_is_a_parabola():
    profile = radial_profile(500 + 10 * (X**2 + Y**2), FLAGS, region(), bins=20)
    assert profile.mean_nm == pytest.approx(500 + 10 * (profile.place / 100) ** 2, abs=0.1)
    assert profile.pixels.sum() == np.count_nonzero(INSIDE)


def test_azimuth_profile_of_a_tilt_is_a_cosine():
    profile = azimuth_profile(500 + 10 * X + 0 * Y, FLAGS, region(), bins=36)
    assert profile.mean_nm == pytest.approx(500 + 10 * 2 / 3 * np.cos(np.deg2rad(profile.place)), abs=0.15)  # mean radius 2/3


def test_empty_bins_are_not_a_number():
    flags = FLAGS.copy()
    flags[np.hypot(X, Y) < 0.5] = AMBIGUOUS.mask
    profile = radial_profile(np.full(FLAGS.shape, 500.0), flags, region(), bins=10)
    assert np.isnan(profile.mean_nm[:5]).all() and np.isfinite(profile.mean_nm[5:]).all()


def test_rim_that_falls_is_a_negative_roll_off():
    radius = np.hypot(X, Y)
    thickness = 500 + 5 * radius**2 - 6.0 * (radius > 0.96) + np.random.default_rng(1).normal(0, 0.5, FLAGS.shape)
    found = edge_roll_off(thickness, np.full(FLAGS.shape, 0.5), FLAGS, region(), width_mm=3.0)
    assert found.value_nm == pytest.approx(-6, abs=4 * found.u_nm) and found.u_nm < 0.1


def test_plain_bowl_has_no_roll_off():
    found = edge_roll_off(500 + 5 * (X**2 + Y**2), np.full(FLAGS.shape, 0.5), FLAGS, region())
    assert found.value_nm == pytest.approx(0, abs=1e-6)
