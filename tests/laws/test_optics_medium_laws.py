"""Mixtures and scaled indices."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from films import layer
from sheenmap.optics import Layer, bruggeman, layer_index
from sheenmap.spectra import constant
from strategies import clear, indices

shares = st.floats(0, 1)
AT_NM = np.array([550.0])


def mixed(host, inclusion, volume):
    return bruggeman(np.array([host]), np.array([inclusion]), volume)[0]


@settings(deadline=None)
@given(indices(), indices(), shares)
def test_mixture_balances_its_polarisations(host, inclusion, volume):
    """The defining equation (D. A. G. Bruggeman 1935): sum f_i (e_i - e) / (e_i + 2 e) = 0."""
    e, one, other = mixed(host, inclusion, volume) ** 2, host**2, inclusion**2
    left = (1 - volume) * (one - e) * (other + 2 * e) + volume * (other - e) * (one + 2 * e)
    assert abs(left) <= 1e-12 * max(abs(one), abs(other)) ** 2


@settings(deadline=None)
@given(indices(), indices(), shares)
def test_mixture_absorbs_or_is_clear_and_never_amplifies(host, inclusion, volume):
    index = mixed(host, inclusion, volume)
    assert index.real >= 0
    assert index.imag <= 0


@settings(deadline=None)
@given(indices(), indices())
def test_mixture_without_inclusion_is_its_host_and_full_of_it_the_inclusion(host, inclusion):
    assert mixed(host, inclusion, 0.0) == pytest.approx(host, rel=1e-9)  # unlike metals by a factor of 1e4 in permittivity
    assert mixed(host, inclusion, 1.0) == pytest.approx(inclusion, rel=1e-9)


@settings(deadline=None)
@given(indices(), indices(), shares)
def test_mixture_does_not_know_host_from_inclusion(host, inclusion, volume):
    assert mixed(host, inclusion, volume) == pytest.approx(mixed(inclusion, host, 1 - volume), rel=1e-9, abs=1e-9)


@settings(deadline=None)
@given(clear, clear, shares)
def test_mixture_of_clear_materials_is_clear_and_lies_between_them(host, inclusion, volume):
    index = mixed(host, inclusion, volume)
    assert index.imag == 0
    assert min(host, inclusion) - 1e-12 <= index.real <= max(host, inclusion) + 1e-12


@pytest.mark.parametrize("inclusion", [0.06 - 3.6j, 0.5 - 2.0j, 1.2 - 6.0j, 4.0 - 0.05j])
def test_mixture_changes_without_a_jump_as_more_is_put_in(inclusion):
    """Where metal goes into glass both roots of the quadratic absorb; the wrong one would show as a jump."""
    share = np.linspace(0, 1, 20_001)
    e = np.array([mixed(1.5, inclusion, volume) ** 2 for volume in share])
    # a square root at the percolation threshold of a metal is the steepest that comes
    assert np.max(np.abs(np.diff(e))) < 0.1 * abs(inclusion**2 - 1.5**2)
    assert np.max(np.abs(np.diff(e)[:100])) < 2e-3 * abs(inclusion**2 - 1.5**2)


@settings(deadline=None)
@given(indices(), st.floats(0.5, 2))
def test_index_scale_multiplies_what_exceeds_vacuum_and_the_absorption(index, scale):
    scaled = layer_index(layer(index, 10.0, index_scale=scale), AT_NM)[0]
    assert scaled.real - 1 == pytest.approx(scale * (index.real - 1), abs=1e-14)
    assert scaled.imag == pytest.approx(scale * index.imag, abs=1e-14)


@settings(deadline=None)
@given(clear, st.floats(0.5, 2), st.floats(0.01, 0.99))
def test_the_mixture_is_scaled_and_not_its_parts(index, scale, volume):
    porous = Layer(
        index=constant(index + 0j), thickness_nm=10.0, index_scale=scale, inclusion=constant(1.0 + 0j), inclusion_volume=volume
    )
    assert layer_index(porous, AT_NM)[0] == pytest.approx(1 + scale * (mixed(index, 1.0, volume) - 1), abs=1e-14)
