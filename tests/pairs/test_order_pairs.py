"""The quick order solver against exact ones that only small problems allow."""

import itertools

import numpy as np
import pytest

from sheenmap.inversion.order import DATA_CAP, choose_order, link_cost, no_trend

WIDTH_NM = 20.0


def exact_chain(place_nm, cost):
    """Least energy of one row of blocks, by trying every labelling."""
    data = np.minimum(cost - cost[:, :1], DATA_CAP)
    best, best_labels = np.inf, None
    for labels in itertools.product(range(place_nm.shape[1]), repeat=len(place_nm)):
        chosen = place_nm[np.arange(len(labels)), labels]
        energy = data[np.arange(len(labels)), labels].sum() + link_cost(np.diff(chosen), WIDTH_NM).sum()
        if energy < best:
            best, best_labels = energy, labels
    return np.array(best_labels)


@pytest.mark.parametrize("seed", range(12))
def test_a_row_of_blocks_gets_the_labelling_of_least_energy(seed):
    rng = np.random.default_rng(seed)
    base = np.cumsum(rng.normal(0, 4, 7)) + 300
    place_nm = np.stack([base, base + 190 + rng.normal(0, 3, 7), base - 150 + rng.normal(0, 3, 7)], axis=1)
    cost = rng.uniform(0, 15, place_nm.shape)
    order = np.argsort(cost, axis=1)
    place_nm, cost = (np.take_along_axis(array, order, axis=1) for array in (place_nm, cost))
    chosen = choose_order(place_nm[None], cost[None], WIDTH_NM, no_trend((1, 7)))[0]
    expected = exact_chain(place_nm, cost)
    np.testing.assert_allclose(energy(place_nm, cost, chosen), energy(place_nm, cost, expected), atol=1e-9)


def energy(place_nm, cost, labels):
    at = np.arange(len(labels))
    data = np.minimum(cost - cost[:, :1], DATA_CAP)[at, labels].sum()
    return data + link_cost(np.diff(place_nm[at, labels]), WIDTH_NM).sum()
