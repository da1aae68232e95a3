"""The quick posterior of a pixel against brute integration of its likelihood."""

import numpy as np
import pytest

from sheenmap.inversion import Doubts, pixel_candidates
from sheenmap.inversion.posterior import Pixels, posterior_near
from sheenmap.lookup import evaluate
from simulated import film_on, table_of


@pytest.fixture(scope="module")
def table():
    return table_of(film_on("Si", "SiO2"), (0.0, 900.0))


def pixels_of(table, truth, rng, share=0.01):
    clean = evaluate(table, truth)[0]
    sd = share * np.sqrt(np.maximum(clean, 0.02))
    return Pixels(signal=clean + rng.normal(size=clean.shape) * sd, variance=sd**2, correlation=np.eye(3), angle_deg=None)


def brute(table, pixels, k, low, high):
    """Mean and standard deviation of the posterior over low to high, by a fine sum."""
    at = np.linspace(max(low, 0.0), high, 4001)
    expected = evaluate(table, at)[0]
    variance = np.diag(pixels.variance[k])
    shading = 0.003
    chi_square = np.empty(at.size)
    for j in range(at.size):
        covariance = variance + shading**2 * np.outer(expected[j], expected[j])
        r = pixels.signal[k] - expected[j]
        chi_square[j] = r @ np.linalg.solve(covariance, r)
    weight = np.exp(-0.5 * (chi_square - chi_square.min()))
    weight /= weight.sum()
    mean = float(np.sum(weight * at))
    return mean, float(np.sqrt(np.sum(weight * (at - mean) ** 2)))


def test_mean_and_width_agree_with_brute_integration(table):
    rng = np.random.default_rng(5)
    truth = np.linspace(3, 850, 60)
    pixels = pixels_of(table, truth, rng)
    found = posterior_near(pixels, table, truth, np.full(60, 40.0), Doubts())
    for k in range(60):
        mean, sd = brute(table, pixels, k, truth[k] - 40, truth[k] + 40)
        # a Gaussian step stands for the sum where the table is straight over a sigma, to a tenth of it
        assert abs(found.thickness_nm[k] - mean) < 0.25 * sd + 0.1, truth[k]
        assert found.sigma_nm[k] == pytest.approx(sd, rel=0.25, abs=0.4), truth[k]


def test_candidates_hold_the_lowest_point_of_the_whole_table(table):
    rng = np.random.default_rng(6)
    truth = rng.uniform(0, 900, 200)
    pixels = pixels_of(table, truth, rng)
    found = pixel_candidates(pixels.signal, pixels.variance, pixels.correlation, table, Doubts(shading_u=0, colour_u=0))
    curves = (((pixels.signal[:, None] - table.signal[0]) ** 2) / pixels.variance[:, None]).sum(-1)
    lowest = table.thickness_nm[curves.argmin(axis=1)]
    assert np.abs(found.thickness_nm[:, 0] - lowest).max() <= 1.0
    assert (found.chi_square[:, 0] <= curves.min(axis=1) + 1e-6).all()


def test_every_local_minimum_within_the_gap_is_listed(table):
    rng = np.random.default_rng(7)
    pixels = pixels_of(table, rng.uniform(0, 900, 50), rng, share=0.05)
    found = pixel_candidates(pixels.signal, pixels.variance, pixels.correlation, table, Doubts(shading_u=0, colour_u=0))
    curves = (((pixels.signal[:, None] - table.signal[0]) ** 2) / pixels.variance[:, None]).sum(-1)
    for k, curve in enumerate(curves):
        inner = np.flatnonzero((curve[1:-1] < curve[:-2]) & (curve[1:-1] <= curve[2:])) + 1
        wanted = table.thickness_nm[inner[curve[inner] <= curve.min() + 35]]
        listed = found.thickness_nm[k][np.isfinite(found.thickness_nm[k])]
        assert all(np.abs(listed - nm).min() <= 1.0 for nm in wanted[:9])
