"""What any stack of layers obeys, whatever it is made of."""

import numpy as np
import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from films import by_tmm, index, layer, stack, with_thickness
from sheenmap.optics import Stack, View, bare_reflectance, fold, reflectance, reflectance_and_slope, transmittance
from strategies import (
    angles_deg,
    apertures,
    clear,
    indices,
    polarisations,
    stacks,
    thicknesses_nm,
    views,
    wavelengths_nm,
)

ROUNDING = 1e-12  # some hundred operations of 1e-16 each, and phases up to a hundred radians
some_thicknesses_nm = st.lists(thicknesses_nm, min_size=1, max_size=4).map(np.array)


def seen(whole, thickness_nm, wavelength_nm, view):
    return reflectance(whole, np.atleast_1d(thickness_nm), np.array([wavelength_nm]), view)[:, 0]


def through(whole, thickness_nm, wavelength_nm, view):
    return transmittance(whole, np.atleast_1d(thickness_nm), np.array([wavelength_nm]), view)[:, 0]


def plain(angle_deg, polarisation):
    return View(angle_deg=angle_deg, polarisation=polarisation)


def away_from_critical(whole, angle_deg):
    """Within 1e-4 of a critical angle rounding grows as 1 / q, in the reference library as in ours."""
    invariant = index(whole.medium).real * np.sin(np.deg2rad(angle_deg))
    below = [*(index(one.index) for one in whole.layers), index(whole.substrate)]
    if whole.back is not None:
        below.append(index(whole.back.medium))
    return all(abs(n**2 - invariant**2) > 1e-4 for n in below)


@settings(max_examples=300, deadline=None)
@given(stacks(), thicknesses_nm, wavelengths_nm, angles_deg, polarisations)
def test_powers_are_those_of_the_reference_library(whole, thickness_nm, wavelength_nm, angle_deg, polarisation):
    assume(away_from_critical(whole, angle_deg))
    r, t = by_tmm(whole, thickness_nm, wavelength_nm, angle_deg, polarisation)
    at = (whole, thickness_nm, wavelength_nm, plain(angle_deg, polarisation))
    assert seen(*at)[0] == pytest.approx(r, abs=1e-10)
    assert through(*at)[0] == pytest.approx(t, abs=1e-10)


@settings(max_examples=200, deadline=None)
@given(stacks(back=True), thicknesses_nm, wavelengths_nm, angles_deg, polarisations)
def test_powers_with_a_back_are_those_of_the_reference_library(whole, thickness_nm, wavelength_nm, angle_deg, polarisation):
    assume(away_from_critical(whole, angle_deg))
    assume(index(whole.substrate).real > index(whole.medium).real * np.sin(np.deg2rad(angle_deg)))  # else nothing gets there
    r, t = by_tmm(whole, thickness_nm, wavelength_nm, angle_deg, polarisation)
    at = (whole, thickness_nm, wavelength_nm, plain(angle_deg, polarisation))
    assert seen(*at)[0] == pytest.approx(r, abs=1e-10)
    assert through(*at)[0] == pytest.approx(t, abs=1e-10)


@settings(deadline=None)
@given(stacks(), some_thicknesses_nm, wavelengths_nm, views())
def test_nothing_gives_back_more_than_it_gets(whole, thickness_nm, wavelength_nm, view):
    r, t = (power(whole, thickness_nm, wavelength_nm, view) for power in (seen, through))
    assert np.all(r >= 0)
    assert np.all(t >= 0)
    assert np.all(r + t <= 1 + ROUNDING)


@settings(deadline=None)
@given(stacks(lossless=True), some_thicknesses_nm, wavelengths_nm, views())
@example(stack(2.0, layer(1.0), on=2.0), np.array([50.0]), 500.0, View(angle_deg=30.0))  # a film exactly at its critical angle
def test_clear_stacks_lose_nothing(whole, thickness_nm, wavelength_nm, view):
    # near its critical angle a film's rounding grows as 1 / q, to 1e-9 at worst
    total = seen(whole, thickness_nm, wavelength_nm, view) + through(whole, thickness_nm, wavelength_nm, view)
    assert total == pytest.approx(1, abs=ROUNDING if away_from_critical(whole, view.angle_deg) else 1e-9)


@settings(deadline=None)
@given(stacks(lossless=True, back=True, most=2), some_thicknesses_nm, wavelengths_nm, views())
def test_clear_stacks_with_a_back_lose_nothing(whole, thickness_nm, wavelength_nm, view):
    assume(away_from_critical(whole, view.angle_deg))
    assume(index(whole.substrate).imag == 0)
    total = seen(whole, thickness_nm, wavelength_nm, view) + through(whole, thickness_nm, wavelength_nm, view)
    assert total == pytest.approx(1, abs=ROUNDING)


@settings(deadline=None)
@given(stacks(searched=False), wavelengths_nm, clear, st.floats(0, 80), polarisations)
def test_transmittance_is_the_same_from_both_sides(whole, wavelength_nm, below, angle_deg, polarisation):
    above = index(whole.medium).real
    sine = above * np.sin(np.deg2rad(angle_deg)) / below
    assume(sine < 0.999)
    down = stack(above, *whole.layers, on=below)
    up = stack(below, *whole.layers[::-1], on=above)
    assume(away_from_critical(down, angle_deg))
    one = through(down, 0.0, wavelength_nm, plain(angle_deg, polarisation))
    other = through(up, 0.0, wavelength_nm, plain(float(np.rad2deg(np.arcsin(sine))), polarisation))
    assert one == pytest.approx(other, abs=1e-11)  # the way back goes at an angle that is rounded, steep towards grazing


@settings(deadline=None)
@given(stacks(), wavelengths_nm, views())
def test_a_film_of_no_thickness_is_not_there(whole, wavelength_nm, view):
    assume(away_from_critical(whole, view.angle_deg))
    rest = tuple(one for one in whole.layers if one.thickness_nm is not None)
    without = Stack(medium=whole.medium, layers=rest, substrate=whole.substrate)
    bare = bare_reflectance(without, np.array([wavelength_nm]), view)[0]
    assert seen(whole, 0.0, wavelength_nm, view)[0] == pytest.approx(bare, abs=1e-11)  # near a critical angle 1e-16 / q^2


@settings(deadline=None)
@given(clear, indices(), st.integers(0, 40), wavelengths_nm, angles_deg, polarisations)
def test_a_half_wave_film_is_absent(film, below, order, wavelength_nm, angle_deg, polarisation):
    q = np.sqrt(film**2 - np.sin(np.deg2rad(angle_deg)) ** 2)
    assume(q > 0.01)
    half_waves_nm = order * wavelength_nm / (2 * q)
    view = plain(angle_deg, polarisation)
    bare = bare_reflectance(stack(1, on=below), np.array([wavelength_nm]), view)[0]
    # 40 orders are 250 rad, which rounds at 6e-14; a hundredfold for films at their slowest
    assert seen(stack(1, layer(film), on=below), half_waves_nm, wavelength_nm, view)[0] == pytest.approx(bare, abs=1e-11)


@settings(deadline=None)
@given(stacks(lossless=True), st.floats(0, 500), wavelengths_nm, st.floats(0, 45), polarisations)
def test_a_clear_film_repeats_at_each_half_wave(whole, thickness_nm, wavelength_nm, angle_deg, polarisation):
    film = index(whole.layers[whole.searched].index).real
    q = np.sqrt(complex(film**2 - (index(whole.medium).real * np.sin(np.deg2rad(angle_deg))) ** 2))
    assume(q.real > 0.1)
    assume(away_from_critical(whole, angle_deg))
    period_nm = wavelength_nm / (2 * q.real)
    one, next_one = seen(whole, np.array([thickness_nm, thickness_nm + period_nm]), wavelength_nm, plain(angle_deg, polarisation))
    # sharp resonances between evanescent layers multiply the rounding of the period
    assert next_one == pytest.approx(one, abs=1e-9)


@settings(deadline=None)
@given(clear, clear, clear, wavelengths_nm)
def test_a_quarter_wave_film_follows_its_formula(above, film, below, wavelength_nm):
    whole = stack(above, layer(film), on=below)
    expected = ((above * below - film**2) / (above * below + film**2)) ** 2
    assert seen(whole, wavelength_nm / 4 / film, wavelength_nm, View())[0] == pytest.approx(expected, abs=ROUNDING)


@settings(deadline=None)
@given(stacks(), st.integers(0, 4), st.floats(0, 1), thicknesses_nm, wavelengths_nm, views())
def test_a_layer_cut_in_two_is_still_one(whole, which, share, thickness_nm, wavelength_nm, view):
    assume(away_from_critical(whole, view.angle_deg))
    known = list(with_thickness(whole, thickness_nm).layers)
    one = known.pop(which % len(known))
    halves = [layer(index(one.index), part * one.thickness_nm) for part in (share, 1 - share)]
    at = which % (len(known) + 1)
    cut = Stack(medium=whole.medium, layers=(*known[:at], *halves, *known[at:]), substrate=whole.substrate)
    whole_again = Stack(medium=whole.medium, layers=(*known[:at], one, *known[at:]), substrate=whole.substrate)
    assert seen(cut, 0.0, wavelength_nm, view) == pytest.approx(seen(whole_again, 0.0, wavelength_nm, view), abs=1e-11)


@settings(deadline=None)
@given(stacks(), thicknesses_nm, wavelengths_nm, views())
def test_it_does_not_matter_which_layer_is_searched(whole, thickness_nm, wavelength_nm, view):
    assume(away_from_critical(whole, view.angle_deg))
    known = with_thickness(whole, thickness_nm)
    bare = bare_reflectance(known, np.array([wavelength_nm]), view)[0]
    assert seen(whole, thickness_nm, wavelength_nm, view)[0] == pytest.approx(bare, abs=1e-11)


@settings(max_examples=100, deadline=None)
@given(st.booleans(), st.data(), st.floats(5, 1500), wavelengths_nm, views(apertures))
def test_the_slope_is_the_limit_of_differences(back, data, thickness_nm, wavelength_nm, view):
    whole = data.draw(stacks(back=back, most=2))
    assume(away_from_critical(whole, view.angle_deg))
    h = 1e-2
    at_nm = thickness_nm + h * np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
    r, slope = reflectance_and_slope(whole, at_nm, np.array([wavelength_nm]), view)
    difference = np.dot([1, -8, 0, 8, -1], r[:, 0]) / (12 * h)
    # rounding of 1e-14 over 1e-2 nm, and the fifth derivative: (4 pi n / L)^5 h^4 / 30 of 4e-9, more on resonance
    assert slope[2, 0] == pytest.approx(difference, abs=1e-7, rel=1e-5)


@settings(max_examples=100, deadline=None)
@given(stacks(), some_thicknesses_nm, wavelengths_nm, views(apertures))
def test_reflectance_is_the_same_with_and_without_its_slope(whole, thickness_nm, wavelength_nm, view):
    both = reflectance_and_slope(whole, thickness_nm, np.array([wavelength_nm]), view)[0][:, 0]
    assert seen(whole, thickness_nm, wavelength_nm, view) == pytest.approx(both, abs=ROUNDING)


@settings(deadline=None)
@given(stacks(), st.floats(0, 500), st.floats(0.01, 3), wavelengths_nm, views())
def test_even_steps_and_single_thicknesses_agree(whole, first_nm, step_nm, wavelength_nm, view):
    even_nm = first_nm + step_nm * np.arange(40)
    one_by_one = [seen(whole, one, wavelength_nm, view)[0] for one in even_nm[[0, 17, 39]]]
    assume(away_from_critical(whole, view.angle_deg))
    assert seen(whole, even_nm, wavelength_nm, view)[[0, 17, 39]] == pytest.approx(one_by_one, abs=1e-11)


@settings(deadline=None)
@given(stacks(), thicknesses_nm, wavelengths_nm)
def test_s_and_p_are_one_at_normal_incidence(whole, thickness_nm, wavelength_nm):
    s, p, none = (seen(whole, thickness_nm, wavelength_nm, plain(0.0, name)) for name in ("s", "p", "none"))
    assert s == pytest.approx(p, abs=ROUNDING)
    assert s == pytest.approx(none, abs=ROUNDING)


@settings(deadline=None)
@given(stacks(), thicknesses_nm, wavelengths_nm, angles_deg)
def test_unpolarised_light_is_half_s_and_half_p(whole, thickness_nm, wavelength_nm, angle_deg):
    s, p, none = (seen(whole, thickness_nm, wavelength_nm, plain(angle_deg, name)) for name in ("s", "p", "none"))
    assert none == pytest.approx((s + p) / 2, abs=ROUNDING)


@settings(deadline=None)
@given(clear, clear, wavelengths_nm)
def test_a_face_reflects_no_p_light_at_its_brewster_angle(above, below, wavelength_nm):
    brewster_deg = float(np.rad2deg(np.arctan2(below, above)))
    r = bare_reflectance(stack(above, on=below), np.array([wavelength_nm]), plain(brewster_deg, "p"))
    assert r == pytest.approx(0, abs=1e-25)


@settings(deadline=None)
@given(indices(), indices(), st.floats(0, 30), st.floats(0, 30), wavelengths_nm, views())
def test_roughness_never_brightens_a_face(above, below, rough_nm, more_nm, wavelength_nm, view):
    above = 1.0 + 0 * above
    smooth, rough, rougher = (
        bare_reflectance(stack(above, on=below, substrate_rough_nm=sigma), np.array([wavelength_nm]), view)[0]
        for sigma in (0.0, rough_nm, rough_nm + more_nm)
    )
    assert rougher <= rough + 1e-16
    assert rough <= smooth + 1e-16


@settings(deadline=None)
@given(clear, clear, clear, st.floats(0, 40), st.floats(0, 40), thicknesses_nm, wavelengths_nm, views())
@example(2.0, 1.0, 3.0, 1.0, 0.0, 0.0, 380.0, View(angle_deg=51.0))  # a fading field between the faces
def test_rough_clear_films_scatter_but_never_gain(above, film, below, rough_nm, under_nm, thickness_nm, wavelength_nm, view):
    whole = stack(above, layer(film, rough_nm=rough_nm), on=below, substrate_rough_nm=under_nm)
    assume(away_from_critical(whole, view.angle_deg))
    total = seen(whole, thickness_nm, wavelength_nm, view) + through(whole, thickness_nm, wavelength_nm, view)
    assert total[0] <= 1 + ROUNDING


@settings(deadline=None)
@given(st.builds(complex, st.floats(0.05, 6), st.floats(-8, -0.05)), indices(), wavelengths_nm, angles_deg, polarisations)
def test_an_opaque_film_hides_what_lies_below(film, below, wavelength_nm, angle_deg, polarisation):
    view = plain(angle_deg, polarisation)
    bulk = bare_reflectance(stack(1, on=film), np.array([wavelength_nm]), view)[0]
    assert seen(stack(1, layer(film), on=below), 1e6, wavelength_nm, view)[0] == pytest.approx(bulk, abs=ROUNDING)


@settings(deadline=None)
@given(stacks(searched=False), wavelengths_nm, st.floats(0, 89), polarisations)
def test_amplitudes_up_and_down_are_reciprocal(whole, wavelength_nm, angle_deg, polarisation):
    assume(away_from_critical(whole, angle_deg))
    folded = fold(whole, np.array([wavelength_nm]), np.deg2rad(angle_deg), polarisation)
    there, back = folded.eta_substrate * folded.upper.t_down, folded.eta_medium * folded.upper.t_up
    assert there == pytest.approx(back, rel=1e-9, abs=1e-12)
