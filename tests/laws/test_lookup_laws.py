"""What holds for the table under any lamp and over any stack."""

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from films import layer, stack, with_thickness
from sheenmap import catalogue
from sheenmap.lookup import blank_signal, build_table, evaluate, quadrature
from sheenmap.optics import View, reflectance
from sheenmap.spectra import Spectrum, constant
from strategies import clear, indices, lamps, stacks, views

RESPONSE = catalogue.camera("generic")
SEARCH_NM = (0.0, 300.0)
few = settings(max_examples=30, deadline=None)
films = st.builds(lambda film, below: stack(1, layer(film), on=below), indices(), indices())
steps_nm = st.sampled_from([2.0, 4.0, 5.0, 8.0, 10.0])


def table_of(whole, lamp, *, blank=None, view=None, **more):
    return build_table(whole, SEARCH_NM, light=lamp, response=RESPONSE, blank=blank, view=view or View(), **more)


def brighter(lamp, gain):
    return Spectrum(wavelength_nm=lamp.wavelength_nm, values=gain * lamp.values)


@few
@given(films, lamps(), views())
def test_signal_over_a_perfect_mirror_is_a_mean_reflectance(whole, lamp, view):
    table = table_of(whole, lamp, view=view)
    fine = quadrature(lamp, RESPONSE, 1.0).wavelength_nm
    seen = reflectance(whole, table.thickness_nm, fine, view)
    assert np.all(table.signal[0] >= seen.min(axis=1)[:, None] - 1e-5)  # its nodes keep to 1e-6 of the largest channel
    assert np.all(table.signal[0] <= seen.max(axis=1)[:, None] + 1e-5)


@few
@given(films, lamps(), st.floats(1e-3, 1e3))
def test_a_brighter_lamp_changes_nothing(whole, lamp, gain):
    one, other = table_of(whole, lamp), table_of(whole, brighter(lamp, gain))
    assume(one.wavelength_step_nm == other.wavelength_step_nm)  # on the very edge of convergence rounding may choose
    assert other.signal == pytest.approx(one.signal, rel=1e-12)


@few
@given(films, lamps(), clear)
def test_the_blank_only_scales_each_channel(whole, lamp, blank):
    assume(blank > 1.01)  # what reflects nothing is no blank
    one, other = table_of(whole, lamp), table_of(whole, lamp, blank=stack(1, on=blank))
    scale = blank_signal(None, lamp, RESPONSE, View()) / blank_signal(stack(1, on=blank), lamp, RESPONSE, View())
    assert other.signal == pytest.approx(one.signal * scale, rel=1e-12)


@few
@given(stacks(most=2), lamps(), views(), st.integers(0, 300))
def test_a_blank_of_the_same_film_reads_one_at_its_thickness(whole, lamp, view, thickness_nm):
    blank = with_thickness(whole, float(thickness_nm))
    reference = blank_signal(blank, lamp, RESPONSE, view)
    assume(np.all(reference > 0.01 * blank_signal(None, lamp, RESPONSE, view)))
    seen = evaluate(table_of(whole, lamp, blank=blank, view=view), np.array([float(thickness_nm)]))[0]
    # 1e-6 of the largest signal at the nodes, over a reference of a hundredth of it
    assert seen == pytest.approx(1, abs=5e-4)


@few
@given(clear, lamps(), st.floats(0.02, 0.9))
def test_a_grey_film_s_signal_is_its_share_of_a_grey_blank(index, lamp, grey):
    """A film of no thickness over what it is made of reflects the same at every wavelength."""
    assume(index > 1.05)
    table = table_of(stack(1, layer(index), on=index), lamp, blank=constant(grey))
    assert table.signal == pytest.approx(((index - 1) / (index + 1)) ** 2 / grey, rel=1e-12)


@given(lamps(), steps_nm, st.integers(0, 5))
@settings(deadline=None)
def test_wide_nodes_are_exact_for_what_their_polynomial_can_follow(lamp, step_nm, power):
    """Six nodes carry a fifth power: the lamp's lines do not matter."""

    def integral(step):
        nodes = quadrature(lamp, RESPONSE, step)
        return nodes.weights @ ((nodes.wavelength_nm - 580) / 200) ** power

    scale = quadrature(lamp, RESPONSE, 1.0).weights.sum()
    assert integral(step_nm) == pytest.approx(integral(1.0), abs=1e-12 * scale)


@few
@given(films, lamps(), views(), st.lists(st.floats(0, 320), min_size=1, max_size=5).map(np.array))
def test_slope_is_the_limit_of_differences(whole, lamp, view, thickness_nm):
    table = table_of(whole, lamp, view=view)
    thickness_nm = np.clip(thickness_nm, 1e-3, 324)
    h = 1e-3
    ahead, behind = (evaluate(table, thickness_nm + step)[0] for step in (h, -h))
    # a cubic's own difference errs by its third derivative at most, (4 pi n / L)^3 h^2 / 6 = 1e-9; across an entry by a jump in
    # its second, which is as small
    assert evaluate(table, thickness_nm)[1] == pytest.approx((ahead - behind) / (2 * h), abs=1e-6)


@settings(max_examples=20, deadline=None)
@given(films, lamps(), st.floats(0, 60), st.floats(1, 10), st.floats(0, 1), st.sampled_from(["none", "s", "p"]))
def test_between_its_angles_the_table_is_that_of_the_angle(whole, lamp, low_deg, span_deg, share, polarisation):
    view = View(polarisation=polarisation)
    axis = table_of(whole, lamp, view=view, angle_range_deg=(low_deg, low_deg + span_deg))
    angle_deg = low_deg + share * span_deg
    at = np.array([0.0, 77.7, 210.5, 300.0])
    one = table_of(whole, lamp, view=View(angle_deg=angle_deg, polarisation=polarisation))
    seen = evaluate(axis, at, np.full(4, angle_deg))[0]
    # linear over a twentieth of a degree: (9e-4 rad)^2 / 8 of a second derivative (2 pi d / L)^2 of about 20
    assert seen == pytest.approx(evaluate(one, at)[0], abs=5e-6)
