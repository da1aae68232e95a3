"""The table against direct integration."""

import numpy as np
import pytest

from sheenmap import catalogue
from sheenmap.lookup import blank_signal, build_table, converged, evaluate, fused_table, quadrature
from sheenmap.optics import Stack, View, bare_reflectance, reflectance
from sheenmap.spectra import Spectrum, constant, sample
from simulated import film_on, table_of

LIGHT, CAMERA = catalogue.lamp("LED-B3"), catalogue.camera("generic")
STACK = film_on("Si", "Si3N4", fixed=(("SiO2", 30.0),))
BARE = Stack(medium=constant(1.0), layers=(), substrate=catalogue.material("Si"))


def direct(thickness_nm, view):
    """Signal over the blank's by a plain sum at 1 nm, as CIE 15 asks for."""
    low = max(LIGHT.wavelength_nm[0], CAMERA.wavelength_nm[0])
    high = min(LIGHT.wavelength_nm[-1], CAMERA.wavelength_nm[-1])
    at = np.arange(low, high + 0.1, 1.0)
    weights = sample(LIGHT, at) * sample(CAMERA, at)
    weights[:, [0, -1]] *= 0.5
    return (reflectance(STACK, thickness_nm, at, view) @ weights.T) / (weights @ bare_reflectance(BARE, at, view))


@pytest.mark.parametrize(
    "view", [View(), View(angle_deg=40, polarisation="p"), View(aperture=0.3)], ids=["normal", "p40", "cone"]
)
def test_entries_and_what_lies_between_agree_with_a_plain_sum(view):
    table = build_table(STACK, (0.0, 900.0), light=LIGHT, response=CAMERA, blank=BARE, view=view)
    between = np.array([0.0, 3.3, 99.5, 444.44, 899.9])
    # 1e-6 of the largest signal is asked of the nodes, and as much of the cubic between entries
    np.testing.assert_allclose(evaluate(table, between)[0], direct(between, view), atol=5e-6)


def test_slopes_are_those_of_the_values():
    table = build_table(STACK, (0.0, 500.0), light=LIGHT, response=CAMERA, blank=BARE, view=View())
    at = np.array([12.3, 200.2, 444.9])
    ahead, behind = (evaluate(table, at + step)[0] for step in (1e-3, -1e-3))
    np.testing.assert_allclose(evaluate(table, at)[1], (ahead - behind) / 2e-3, rtol=1e-5, atol=1e-8)


def test_an_angle_axis_holds_every_angle_between():
    axis = build_table(STACK, (100.0, 300.0), light=LIGHT, response=CAMERA, blank=BARE, view=View(), angle_range_deg=(20.0, 30.0))
    for angle in (20.0, 23.37, 29.99):
        one = build_table(STACK, (100.0, 300.0), light=LIGHT, response=CAMERA, blank=BARE, view=View(angle_deg=angle))
        seen = evaluate(axis, np.array([222.0]), np.array([angle]))[0]
        np.testing.assert_allclose(seen, evaluate(one, np.array([222.0]))[0], atol=2e-5)  # linear over a twentieth of a degree


def test_a_blank_is_itself_as_stack_and_as_curve():
    at = np.arange(380.0, 781.0)
    curve = Spectrum(wavelength_nm=at, values=bare_reflectance(BARE, at, View()))
    np.testing.assert_allclose(blank_signal(BARE, LIGHT, CAMERA, View()), blank_signal(curve, LIGHT, CAMERA, View()), rtol=1e-9)
    mirror = blank_signal(None, LIGHT, CAMERA, View())
    assert (blank_signal(BARE, LIGHT, CAMERA, View()) < mirror).all()


def test_bare_substrate_reads_one_in_every_channel():
    np.testing.assert_allclose(evaluate(table_of(film_on("Si", "SiO2"), (0.0, 300.0)), np.zeros(1))[0], 1.0, atol=1e-6)


def test_thicker_films_ask_for_more_wavelengths():
    def nodes(thickness_nm):
        def signal(at):
            return reflectance(STACK, np.array([thickness_nm]), at.wavelength_nm, View()) @ at.weights.T

        return converged(LIGHT, CAMERA, signal).step_nm

    assert nodes(50.0) > nodes(3000.0)


def test_weights_keep_the_integral_of_a_constant():
    exact = quadrature(LIGHT, CAMERA, 1.0).weights.sum(axis=1)
    for step_nm in (2.0, 5.0, 10.0):
        np.testing.assert_allclose(quadrature(LIGHT, CAMERA, step_nm).weights.sum(axis=1), exact, rtol=1e-12)


def test_tables_of_shots_stand_side_by_side():
    tables = [table_of(film_on("Si", "SiO2"), (0.0, 200.0), light=name) for name in ("D65", "A")]
    both = fused_table(tables)
    np.testing.assert_array_equal(both.signal[..., 3:], tables[1].signal)
    with pytest.raises(ValueError, match="different thicknesses"):
        fused_table([tables[0], table_of(film_on("Si", "SiO2"), (0.0, 250.0))])
