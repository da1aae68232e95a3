"""Intervals hold what they say, over set-ups that the tests draw themselves.

Each set-up is a stack, a lamp, a camera and a noise level at random. The truths are ranked within their posteriors; for true
posteriors the ranks are even and the intervals cover 50, 80, 95 and 99 % (Talts et al., arXiv:1804.06788, from memory).
Pixels of one set-up share its shading, so that the number of independent draws is smaller than that of pixels: the bands
below are those of a binomial draw of INDEPENDENT pixels a set-up, at a false-alarm rate of 1 in 1000.
"""

import numpy as np
import pytest
from scipy.stats import binom, norm

from sheenmap.flags import is_blocked
from sheenmap.inversion import Doubts, invert
from simulated import Sensor, film_on, photograph, ramp, table_of

SETUPS = 20
INDEPENDENT = 150
LEVELS = (0.5, 0.8, 0.95, 0.99)
FILMS = ("SiO2", "Si3N4", "Al2O3", "HfO2", "PMMA", "TiO2")
LIGHTS = ("LED-B3", "LED-B1", "D65", "A", "FL2", "LED-V1")
CAMERAS = ("generic", "sensor-01", "sensor-02", "sensor-04")


def draw(seed):
    """Error over sigma of the claimed pixels of one set-up, and the share that is claimed and of another order."""
    rng = np.random.default_rng(seed)
    film, light, camera = (str(rng.choice(names)) for names in (FILMS, LIGHTS, CAMERAS))
    table = table_of(film_on("Si", film), (0.0, 600.0), light=light, camera=camera)
    low = float(rng.uniform(20, 250))
    truth = ramp(low, low + float(rng.uniform(60, 300)), (80, 96))
    sensor = Sensor(
        full_well=float(rng.uniform(4_000, 30_000)),
        bits=int(rng.choice([8, 16])),
        encoding=str(rng.choice(["linear", "srgb"])),
        shading=float(rng.uniform(0.001, 0.005)),
    )
    found = invert(photograph(truth, table, rng, sensor), table, np.ones(truth.shape, bool), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    error = (found.thickness_nm - truth)[claimed]
    return error / found.sigma_nm[claimed], float(np.mean(np.abs(error) > 40)), float(claimed.mean())


@pytest.fixture(scope="module")
def drawn():
    return [draw(seed) for seed in range(SETUPS)]


def is_within_band(z, scale=1.0):
    """Whether coverage at every level lies in its binomial band, with sigma multiplied by ``scale``."""
    count = SETUPS * INDEPENDENT
    for level in LEVELS:
        covered = np.mean(np.abs(z) <= scale * norm.ppf(0.5 + level / 2))
        low, high = binom.ppf([0.0005, 0.9995], count, level) / count
        # beside the draw itself, sigma is known to 2 %: noise is estimated from some hundred tiles
        slack = 0.02 * 2 * norm.ppf(0.5 + level / 2) * norm.pdf(norm.ppf(0.5 + level / 2))
        if not low - slack <= covered <= high + slack:
            return False
    return True


def test_intervals_cover_what_they_say(drawn):
    assert is_within_band(np.concatenate([z for z, _, _ in drawn]))


@pytest.mark.parametrize("scale", [0.8, 1.25])
def test_the_band_would_catch_a_sigma_that_is_wrong_by_a_fifth(drawn, scale):
    assert not is_within_band(np.concatenate([z for z, _, _ in drawn]), scale)


def test_ranks_of_the_truth_are_even(drawn):
    ranks = norm.cdf(np.concatenate([z for z, _, _ in drawn]))
    counts, _ = np.histogram(ranks, bins=10, range=(0, 1))
    share = counts / counts.sum()
    band = 4 * np.sqrt(0.1 * 0.9 / (SETUPS * INDEPENDENT))
    assert np.abs(share - 0.1).max() < band + 0.005


def test_no_more_than_one_claim_in_a_thousand_is_of_another_order(drawn):
    assert np.mean([wrong for _, wrong, _ in drawn]) < 1e-3


def test_most_of_the_film_is_claimed(drawn):
    assert np.mean([claimed for _, _, claimed in drawn]) > 0.95
