import numpy as np
import pytest

from films import by_tmm, layer, stack, with_thickness
from sheenmap.catalogue import material
from sheenmap.optics import Layer, Stack, View, bare_reflectance, layer_index, reflectance, reflectance_and_slope, transmittance
from sheenmap.spectra import sample

VISIBLE_NM = np.linspace(380.0, 780.0, 41)
THICKNESS_NM = np.array([0.0, 80.0, 650.0])
FILM = stack(1, layer(2.0 - 0.01j), on=4.0 - 0.05j)


def wafer(*layers):
    return Stack(medium=material("air"), layers=layers, substrate=material("Si"))


def test_shape_is_thickness_by_wavelength():
    r, slope = reflectance_and_slope(FILM, THICKNESS_NM, VISIBLE_NM, View())
    assert r.shape == slope.shape == (3, 41)
    assert transmittance(FILM, THICKNESS_NM, VISIBLE_NM, View()).shape == (3, 41)
    assert bare_reflectance(stack(1, on=4), VISIBLE_NM, View()).shape == (41,)


def test_tabulated_materials_are_read_by_a_monotone_cubic():
    at_nm = np.array([403.3, 587.1])
    oxide = material("SiO2")
    expected = sample(oxide, at_nm, interpolation="monotone cubic")
    assert layer_index(Layer(index=oxide, thickness_nm=None), at_nm) == pytest.approx(expected, abs=1e-15)


@pytest.mark.parametrize("view", [View(), View(angle_deg=55.0, polarisation="s"), View(angle_deg=55.0, polarisation="p")])
def test_oxide_over_nitride_on_silicon_is_that_of_the_reference_library(view):
    layers = Layer(index=material("SiO2"), thickness_nm=None), Layer(index=material("Si3N4"), thickness_nm=60.0)
    seen = reflectance(wafer(*layers), THICKNESS_NM, VISIBLE_NM, view)
    polarisation = "s" if view.polarisation == "none" else view.polarisation
    for column, wavelength_nm in enumerate(VISIBLE_NM):
        at_nm = np.array([wavelength_nm])
        n = [layer_index(Layer(index=material(name), thickness_nm=1.0), at_nm)[0] for name in ("air", "SiO2", "Si3N4", "Si")]
        flat = stack(n[0], layer(n[1]), layer(n[2], 60.0), on=n[3])
        for row, thickness_nm in enumerate(THICKNESS_NM):
            expected = by_tmm(flat, thickness_nm, wavelength_nm, view.angle_deg, polarisation)[0]
            assert seen[row, column] == pytest.approx(expected, abs=1e-12)


def test_layers_are_listed_as_the_light_meets_them():
    one_way = bare_reflectance(stack(1, layer(1.46, 90.0), layer(2.3, 60.0), on=4), np.array([550.0]), View())
    other_way = bare_reflectance(stack(1, layer(2.3, 60.0), layer(1.46, 90.0), on=4), np.array([550.0]), View())
    assert abs(one_way - other_way) > 0.1


@pytest.mark.parametrize("thickness_nm", [[-1.0], [np.nan], [[1.0, 2.0]]])
def test_thicknesses_that_cannot_be_are_refused(thickness_nm):
    with pytest.raises(ValueError, match="thickness_nm must be"):
        reflectance(FILM, np.array(thickness_nm), VISIBLE_NM, View())


@pytest.mark.parametrize("wavelength_nm", [[0.0], [-5.0], [np.inf]])
def test_wavelengths_that_cannot_be_are_refused(wavelength_nm):
    with pytest.raises(ValueError, match="wavelength_nm must be"):
        transmittance(FILM, THICKNESS_NM, np.array(wavelength_nm), View())


def test_bare_reflectance_of_a_searched_stack_is_refused():
    with pytest.raises(ValueError, match="searched"):
        bare_reflectance(FILM, VISIBLE_NM, View())


@pytest.mark.parametrize("view", [View(angle_deg=10.0), View(aperture=0.2)])
def test_absorbing_medium_is_refused_at_an_angle(view):
    inked = stack(1.4 - 0.01j, layer(1.5), on=4)
    with pytest.raises(ValueError, match="the medium absorbs"):
        reflectance(inked, THICKNESS_NM, VISIBLE_NM, view)
    assert np.all(np.isfinite(reflectance(inked, THICKNESS_NM, VISIBLE_NM, View())))


def test_water_is_clear_enough_to_look_through():
    pond = Stack(medium=material("water"), layers=(Layer(index=material("SiO2"), thickness_nm=None),), substrate=material("Si"))
    assert np.all(reflectance(pond, THICKNESS_NM, VISIBLE_NM, View(angle_deg=40.0, aperture=0.1)) < 1)


def test_stack_without_a_searched_layer_is_the_same_in_every_row():
    known = with_thickness(FILM, 80.0)
    r, slope = reflectance_and_slope(known, THICKNESS_NM, VISIBLE_NM, View(angle_deg=20.0))
    assert np.ptp(r, axis=0).max() == 0
    assert not slope.any()


@pytest.mark.parametrize("polarisation", ["s", "p"])
@pytest.mark.parametrize("whole", [stack(2, layer(1.0), on=2.0), stack(2, layer(1.5), layer(1.0, 40.0), on=3), stack(2, on=1)])
def test_a_film_at_its_critical_angle_is_between_its_neighbours(whole, polarisation):
    """Sin 30 degrees times 2 is the index 1, where q is zero and textbook amplitudes are 0 / 0."""
    below, at, above = (
        reflectance(whole, np.array([50.0]), np.array([500.0]), View(angle_deg=30.0 + turn, polarisation=polarisation))[0, 0]
        for turn in (-1e-9, 0.0, 1e-9)
    )
    assert min(below, above) - 1e-9 <= at <= max(below, above) + 1e-9


def test_a_millimetre_of_metal_does_not_overflow():
    for whole in (stack(1, layer(0.2 - 3.4j), on=1.5), stack(1, layer(1.46), layer(0.2 - 3.4j, 1e6), on=1.5)):
        r, slope = reflectance_and_slope(whole, np.array([0.0, 1e3, 1e6]), VISIBLE_NM, View(angle_deg=60.0))
        assert np.all(np.isfinite(r) & np.isfinite(slope) & (r <= 1))


def test_many_rows_in_blocks_are_those_of_few():
    even_nm = np.linspace(3.0, 1700.0, 1201)
    every = reflectance(FILM, even_nm, VISIBLE_NM, View(angle_deg=25.0))
    some = reflectance(FILM, even_nm[[0, 1, 200, 599, 1200]], VISIBLE_NM, View(angle_deg=25.0))
    assert every[[0, 1, 200, 599, 1200]] == pytest.approx(some, abs=1e-13)


def test_steps_that_are_only_nearly_even_are_taken_as_they_are():
    nearly_nm = np.linspace(0.0, 500.0, 501)
    nearly_nm[250] += 1e-3
    one_by_one = [reflectance(FILM, np.array([one]), VISIBLE_NM, View())[0] for one in nearly_nm[[249, 250, 251]]]
    assert reflectance(FILM, nearly_nm, VISIBLE_NM, View())[[249, 250, 251]] == pytest.approx(np.array(one_by_one), abs=1e-13)


@pytest.mark.parametrize("polarisation", ["s", "p"])
def test_all_is_reflected_exactly_at_the_critical_angle_of_the_substrate(polarisation):
    index_below = float(np.sin(np.deg2rad(40.0)))  # to the last digit, so that q is exactly zero
    r = bare_reflectance(stack(1, on=index_below), VISIBLE_NM, View(angle_deg=40.0, polarisation=polarisation))
    assert r == pytest.approx(1, abs=1e-14)
