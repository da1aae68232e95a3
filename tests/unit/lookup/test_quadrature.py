"""The nodes against a plain sum at 1 nm, for every named lamp."""

import numpy as np
import pytest

from films import layer, stack
from sheenmap import catalogue
from sheenmap.lookup import band_nm, blank_signal, build_table, converged, quadrature
from sheenmap.optics import View, reflectance
from sheenmap.spectra import Spectrum, sample

CAMERA = catalogue.camera("generic")
FILM = stack(1, layer(2.0 - 0.001j), on=4.0 - 0.05j)


def plain_sum(light, thickness_nm):
    """Signal (T, 3) by a trapezoidal sum at 1 nm, as CIE 15 asks for."""
    low, high = band_nm(light, CAMERA)
    at = np.linspace(low, high, round(high - low) + 1)
    weights = sample(light, at) * sample(CAMERA, at)
    weights[:, [0, -1]] *= 0.5
    return reflectance(FILM, thickness_nm, at, View()) @ weights.T


@pytest.mark.parametrize("name", catalogue.names("lamp"))
def test_every_named_lamp_is_carried_to_a_millionth_of_the_largest(name):
    light = catalogue.lamp(name)
    table = build_table(FILM, (0.0, 700.0), light=light, response=CAMERA, blank=None, view=View())
    expected = plain_sum(light, table.thickness_nm)
    seen = table.signal[0] * blank_signal(None, light, CAMERA, View())
    # 1e-6 at 25 probes of the range; between them twice that
    assert np.max(np.abs(seen - expected)) <= 2e-6 * expected.max()


def test_nodes_reach_from_end_to_end_of_what_is_known():
    light = Spectrum(wavelength_nm=np.array([403.3, 500.0, 731.7]), values=np.array([1.0, 2.0, 1.0]))
    for step_nm in (1.0, 4.0, 10.0):
        nodes = quadrature(light, CAMERA, step_nm).wavelength_nm
        assert (nodes[0], nodes[-1]) == (403.3, 731.7)
        assert np.ptp(np.diff(nodes)) < 1e-9


def test_a_band_narrower_than_its_nodes_still_has_six():
    filtered = Spectrum(wavelength_nm=np.array([545.0, 550.0, 555.0]), values=np.array([0.0, 1.0, 0.0]))
    nodes = quadrature(filtered, CAMERA, 10.0)
    assert nodes.wavelength_nm.size == 6
    assert nodes.weights.sum(axis=1) == pytest.approx(quadrature(filtered, CAMERA, 1.0).weights.sum(axis=1), rel=1e-12)


def test_what_no_wide_node_can_follow_is_taken_at_one_nanometre():
    def jagged(nodes):
        return nodes.weights @ np.sign(np.sin(nodes.wavelength_nm))

    assert converged(catalogue.lamp("D65"), CAMERA, jagged).step_nm == 1.0


def test_a_constant_is_carried_by_the_widest_nodes():
    assert converged(catalogue.lamp("FL11"), CAMERA, lambda nodes: nodes.weights.sum(axis=1)).step_nm == 10.0
