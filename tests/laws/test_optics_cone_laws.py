"""The cone of light against plain sums over a pupil, and its limits."""

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from films import layer, stack
from sheenmap.optics import View, reflectance
from strategies import clear, polarisations, wavelengths_nm

RINGS = 60


def at(whole, thickness_nm, wavelength_nm, view):
    return reflectance(whole, np.array([thickness_nm]), np.array([wavelength_nm]), view)[0, 0]


def pupil_sum(whole, thickness_nm, wavelength_nm, view, medium_index, spokes=120):
    """Every direction by vectors: the pupil's field is turned with the ray by a rotation matrix, then split into s and p."""
    axis_rad, half_angle_rad = np.deg2rad(view.angle_deg), np.arcsin(view.aperture / medium_index)
    x, w = np.polynomial.legendre.leggauss(RINGS)
    cos_psi = np.cos(half_angle_rad) + (1 - np.cos(half_angle_rad)) * (x + 1) / 2
    axis = np.array([np.sin(axis_rad), 0.0, np.cos(axis_rad)])
    along, across = np.array([np.cos(axis_rad), 0.0, -np.sin(axis_rad)]), np.array([0.0, 1.0, 0.0])
    field = {"s": across, "p": along}[view.polarisation]
    total = 0.0
    for c, weight in zip(cos_psi, w * cos_psi / np.sum(w * cos_psi)):
        for turn in (np.arange(spokes) + 0.5) * 2 * np.pi / spokes:
            out = np.cos(turn) * along + np.sin(turn) * across
            ray = c * axis + np.sqrt(1 - c * c) * out
            hinge = np.cross(axis, out)
            turned = field * c + np.cross(hinge, field) * np.sqrt(1 - c * c) + hinge * np.dot(hinge, field) * (1 - c)
            s_direction = np.cross([0.0, 0.0, 1.0], ray)
            share_s = np.dot(turned, s_direction) ** 2 / np.dot(s_direction, s_direction)
            angle_deg = float(np.rad2deg(np.arccos(ray[2])))
            s, p = (at(whole, thickness_nm, wavelength_nm, View(angle_deg=angle_deg, polarisation=name)) for name in ("s", "p"))
            total += weight / spokes * (share_s * s + (1 - share_s) * p)
    return total


@pytest.mark.parametrize("polarisation", ["s", "p"])
@pytest.mark.parametrize(("angle_deg", "aperture", "medium"), [(0.0, 0.5, 1.0), (35.0, 0.3, 1.0), (10.0, 0.4, 1.33)])
def test_cone_is_the_sum_over_directions(polarisation, angle_deg, aperture, medium, monkeypatch):
    monkeypatch.setattr(f"{__name__}.RINGS", 12)  # enough for a film this thin: 30 rings move nothing above 1e-11
    whole = stack(medium, layer(2.0 - 0.01j), on=4.0 - 0.05j)
    view = View(angle_deg=angle_deg, aperture=aperture, polarisation=polarisation)
    expected = pupil_sum(whole, 150.0, 550.0, view, medium, spokes=32)
    assert at(whole, 150.0, 550.0, view) == pytest.approx(expected, abs=1e-9)


@settings(max_examples=25, deadline=None)
@given(clear, clear, st.floats(0, 800), wavelengths_nm, st.floats(0.01, 1.0))
def test_cone_about_the_normal_is_the_integral_over_the_pupil_radius(film, below, thickness_nm, wavelength_nm, aperture):
    """Rbar = (2 / NA^2) integral of R(u) u du, u the sine of the angle (any text on microscopes)."""
    whole = stack(1, layer(film), on=below)

    def ring(u):
        return u * at(whole, thickness_nm, wavelength_nm, View(angle_deg=float(np.rad2deg(np.arcsin(u)))))

    expected = 2 / aperture**2 * quad(ring, 0, min(aperture, 1 - 1e-12), epsabs=1e-12, epsrel=1e-12, limit=200)[0]
    # beside a full half space the quadrature meets a square root at its end
    assert at(whole, thickness_nm, wavelength_nm, View(aperture=aperture)) == pytest.approx(expected, abs=1e-9)


@settings(deadline=None)
@given(clear, clear, st.floats(0, 800), wavelengths_nm, st.floats(0, 80), polarisations)
@example(1.46, 4.0, 300.0, 550.0, 1e-9, "s")  # an axis a hair off the normal
def test_narrow_cone_tends_to_its_axis(film, below, thickness_nm, wavelength_nm, angle_deg, polarisation):
    whole = stack(1, layer(film), on=below)
    straight = at(whole, thickness_nm, wavelength_nm, View(angle_deg=angle_deg, polarisation=polarisation))
    distances = [
        abs(at(whole, thickness_nm, wavelength_nm, View(angle_deg=angle_deg, aperture=na, polarisation=polarisation)) - straight)
        for na in (0.0, 1e-8, 1e-6, 1e-3)
    ]
    assert distances[0] == 0
    assert max(distances[1:3]) < 1e-9  # about the square of the aperture, times R'' of up to a few hundred
    assert distances[3] < 1e-3


@settings(deadline=None)
@given(st.floats(1.3, 2.5), st.floats(0.05, 0.2))
def test_cone_makes_a_film_look_thinner_by_its_aperture_squared(film, aperture):
    """Read over true is 1 - NA^2 / (4 n^2) to first order, which the next order, of NA^4, leaves within a fifth of."""
    whole, wavelength_nm = stack(1, layer(film), on=1), 550.0
    fourth_dark_nm = 4 * wavelength_nm / (2 * film)
    fine_nm = fourth_dark_nm * np.linspace(0.99, 1.03, 4001)
    seen = reflectance(whole, fine_nm, np.array([wavelength_nm]), View(aperture=aperture))[:, 0]
    true_nm = fine_nm[seen.argmin()]
    assert fourth_dark_nm / true_nm - 1 == pytest.approx(-(aperture**2) / (4 * film**2), rel=0.2, abs=2e-5)


@pytest.mark.parametrize(("axis_deg", "aperture"), [(75.0, 0.6), (85.0, 0.2), (40.0, 0.99)])
def test_cone_beyond_the_horizon_is_filled_with_what_is_above_it(axis_deg, aperture):
    whole, axis, half_angle = stack(1, layer(1.46), on=4), np.deg2rad(axis_deg), np.arcsin(aperture)

    def circle(angle):
        """What the pupil weighs of the circle at an angle to the normal: integral of cos psi over azimuth, by hand."""
        reach = (np.cos(half_angle) - np.cos(angle) * np.cos(axis)) / (np.sin(angle) * np.sin(axis))
        widest = np.arccos(np.clip(reach, -1, 1))
        mean = widest * np.cos(angle) * np.cos(axis) + np.sin(widest) * np.sin(angle) * np.sin(axis)
        return 2 * np.sin(angle) * mean

    def over(weigh):
        ends = sorted({abs(axis - half_angle), max(0.0, axis - half_angle), np.pi / 2 - 1e-12})
        return sum(quad(weigh, *pair, epsabs=1e-11, epsrel=1e-11, limit=400)[0] for pair in pairwise(ends))

    seen = over(lambda angle: circle(angle) * at(whole, 200.0, 550.0, View(angle_deg=float(np.rad2deg(angle)))))
    view = View(angle_deg=axis_deg, aperture=aperture)
    assert at(whole, 200.0, 550.0, view) == pytest.approx(seen / over(circle), abs=1e-8)


@pytest.mark.parametrize(("medium", "below"), [(1.5, 1.0), (1.5, 0.7), (1.33, 0.9), (1.7, 0.2)])
def test_critical_angle_is_summed_as_finely(medium, below):
    """Total reflection sets in like a square root where u is the index below: here at the cone's edge and within it."""
    whole, aperture = stack(medium, on=below), 1.0

    def ring(u):
        return u * at(whole, 0.0, 550.0, View(angle_deg=float(np.rad2deg(np.arcsin(u / medium)))))

    edge = min(aperture, below) * (1 - 1e-13)
    inside = quad(lambda y: 2 * y * ring(edge - y * y), 0, np.sqrt(edge), epsabs=1e-12, limit=200)[0]
    beyond = max(0.0, aperture**2 - below**2) / 2  # all of it comes back
    assert 2 * (inside + beyond) / aperture**2 == pytest.approx(at(whole, 0.0, 550.0, View(aperture=aperture)), abs=1e-9)
