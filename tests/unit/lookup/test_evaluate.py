"""What lies between the entries of a table."""

import numpy as np
import pytest

from sheenmap.lookup import Table, evaluate

THICKNESS_NM = np.linspace(10.0, 60.0, 51)
ANGLE_DEG = np.array([20.0, 20.5, 21.0])


def cubic(d):
    return np.stack([d**3 - 40 * d**2, 5 * d - 3, 0.1 * d**3 + d], axis=-1)


def cubic_slope(d):
    return np.stack([3 * d**2 - 80 * d, np.full_like(d, 5.0), 0.3 * d**2 + 1], axis=-1)


def table(angle_deg):
    share = 1 + 0.1 * (angle_deg - 20)  # linear in the angle
    return Table(
        thickness_nm=THICKNESS_NM, angle_deg=angle_deg,
        signal=share[:, None, None] * cubic(THICKNESS_NM), slope=share[:, None, None] * cubic_slope(THICKNESS_NM),
        search_nm=(35.0, 35.0), wavelength_step_nm=5.0,
    )  # fmt: skip


def test_a_cubic_is_followed_exactly_with_its_slope():
    at = np.array([10.0, 10.01, 33.3, 47.99, 60.0])
    signal, slope = evaluate(table(ANGLE_DEG[:1]), at)
    assert signal == pytest.approx(cubic(at), rel=1e-12)
    assert slope == pytest.approx(cubic_slope(at), rel=1e-10)


def test_every_pixel_has_its_own_angle_and_lines_in_it_are_followed_exactly():
    at, angle_deg = np.array([10.0, 22.2, 33.3, 59.9]), np.array([20.0, 20.3, 20.5, 21.0])
    signal, slope = evaluate(table(ANGLE_DEG), at, angle_deg)
    share = (1 + 0.1 * (angle_deg - 20))[:, None]
    assert signal == pytest.approx(share * cubic(at), rel=1e-12)
    assert slope == pytest.approx(share * cubic_slope(at), rel=1e-10)


@pytest.mark.parametrize(("beyond_nm", "end_nm"), [(0.0, 10.0), (9.999, 10.0), (61.0, 60.0), (1e6, 60.0)])
def test_beyond_its_ends_the_table_is_held(beyond_nm, end_nm):
    beyond, end = (evaluate(table(ANGLE_DEG[:1]), np.array([nm]))[0] for nm in (beyond_nm, end_nm))
    assert beyond == pytest.approx(end, rel=1e-14)


@pytest.mark.parametrize(("beyond_deg", "end_deg"), [(19.0, 20.0), (89.0, 21.0)])
def test_beyond_its_angles_the_table_is_held(beyond_deg, end_deg):
    at = np.array([33.3])
    beyond, end = (evaluate(table(ANGLE_DEG), at, np.array([angle]))[0] for angle in (beyond_deg, end_deg))
    assert beyond == pytest.approx(end, rel=1e-14)


def test_an_angle_does_not_matter_to_a_table_at_one():
    at = np.array([33.3, 44.4])
    plain, angled = (evaluate(table(ANGLE_DEG[:1]), at, angle)[0] for angle in (None, np.array([5.0, 70.0])))
    assert np.array_equal(plain, angled)
