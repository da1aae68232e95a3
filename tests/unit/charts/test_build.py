from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from sheenmap.charts import chart_data
from sheenmap.colour import delta_e_2000
from sheenmap.errors import SettingsError, UnknownNameError
from sheenmap.recipe.types import Quantity
from sheenmap.spectra import Spectrum


def test_thicknesses_run_over_the_search_range_in_equal_steps(oxide):
    assert chart_data(oxide, step_nm=2.5).thickness_nm == pytest.approx(np.arange(241) * 2.5)
    assert chart_data(oxide, step_nm=7.0).thickness_nm[-1] == 595.0


def test_without_a_film_the_camera_sees_the_blank(chart):
    assert chart.camera[0] == pytest.approx(np.ones(3), abs=1e-6)


def test_against_the_blank_as_white_the_bare_surface_is_lab_100_0_0(oxide):
    chart = chart_data(oxide, step_nm=20.0, white="blank")
    assert chart.lab[0] == pytest.approx([100, 0, 0], abs=1e-6)
    assert chart.srgb[0] == pytest.approx(np.ones(3), abs=1e-4)


def test_xyz_do_not_depend_on_what_the_eye_is_adapted_to(oxide, chart):
    assert chart_data(oxide, step_nm=2.0, white="blank").xyz == pytest.approx(chart.xyz, rel=1e-12)


def test_the_brightest_film_is_shown_at_y_80(chart):
    assert chart.exposure * chart.xyz[:, 1].max() == pytest.approx(80, rel=1e-12)


def test_colour_change_per_nm_agrees_with_the_chord_to_the_neighbours(oxide):
    chart = chart_data(oxide, step_nm=0.5)
    chord = delta_e_2000(chart.lab[:-2], chart.lab[2:])  # over 1 nm
    # the chord cuts a corner of the curve: CIEDE2000 is no smooth metric where hue turns quickly, hence 2 %
    assert chart.de00_per_nm[1:-1] == pytest.approx(chord, rel=0.02, abs=0.005)


def test_every_look_alike_is_alike_and_no_neighbour(chart):
    for i, others in enumerate(chart.look_alikes):
        for other_nm in others:
            j = int(np.argmin(np.abs(chart.thickness_nm - other_nm)))
            between = delta_e_2000(chart.lab[i], chart.lab[min(i, j) : max(i, j)])
            assert delta_e_2000(chart.lab[i], chart.lab[j]) <= chart.repeat_within < between.max()


def test_a_wider_limit_finds_more_look_alikes(oxide):
    few, many = (chart_data(oxide, step_nm=4.0, repeat_within=limit) for limit in (1.0, 8.0))
    assert sum(map(len, few.look_alikes)) < sum(map(len, many.look_alikes))


def test_runs_of_names_cover_the_chart_without_gaps(chart):
    assert chart.runs[0].low_nm == chart.thickness_nm[0]
    assert chart.runs[-1].high_nm == chart.thickness_nm[-1]
    assert all(one.high_nm == other.low_nm and one.name != other.name for one, other in zip(chart.runs, chart.runs[1:]))


def test_tilting_widens_the_orders(bench):
    upright, tilted = (chart_data(bench(angle_deg=Quantity(value=angle)), step_nm=20.0) for angle in (0.0, 60.0))
    assert tilted.orders[0].high_nm > 1.2 * upright.orders[0].high_nm


def test_a_recipe_with_an_angle_per_pixel_is_charted_at_one_angle_and_says_so(bench):
    chart = chart_data(bench(angle_photo=Path("angle.tif")), step_nm=20.0)
    assert any("angle per pixel" in note for note in chart.notes)


def test_without_a_blank_the_camera_is_relative_to_a_mirror(bench):
    chart = chart_data(bench(blank=False), step_nm=20.0)
    assert "mirror" in chart.setup.camera_reference
    assert chart.camera.max() < 0.6  # oxide on silicon reflects about a third


def test_a_thick_range_carries_the_note_that_colours_merge(bench):
    chart = chart_data(bench(search_nm=(0.0, 3000.0)), step_nm=10.0)
    assert any("merge" in note for note in chart.notes)


def test_the_sum_runs_over_what_lamp_observer_and_materials_share(oxide, chart):
    assert chart.setup.band_nm == (380.0, 780.0)
    narrow = Spectrum(wavelength_nm=np.array([520.4, 699.6]), values=np.ones(2), name="amber")
    amber = replace(oxide, shots=(replace(oxide.shots[0], light=narrow),))
    assert chart_data(amber, step_nm=20.0).setup.band_nm == (521.0, 699.0)


def test_curves_that_share_no_wavelength_are_named(oxide):
    infrared = Spectrum(wavelength_nm=np.array([900.0, 1000.0]), values=np.ones(2), name="infrared")
    with pytest.raises(SettingsError, match="infrared"):
        chart_data(replace(oxide, shots=(replace(oxide.shots[0], light=infrared),)))


def test_all_faults_of_the_settings_come_at_once(bench):
    with pytest.raises(SettingsError) as caught:
        chart_data(bench(blank=False), step_nm=-1.0, repeat_within=0.0, white="blank")
    assert [fault.key for fault in caught.value.faults] == ["step_nm", "repeat_within", "white"]


@pytest.mark.parametrize("step_nm", [0.0, 1e-6, 400.0, float("nan"), float("inf")])
def test_a_step_that_makes_no_chart_is_refused(oxide, step_nm):
    with pytest.raises(SettingsError, match="step_nm"):
        chart_data(oxide, step_nm=step_nm)


def test_an_unknown_observer_is_refused(oxide):
    with pytest.raises(UnknownNameError):
        chart_data(oxide, observer="cie-1932")


def test_a_shot_that_the_recipe_does_not_have_is_refused(oxide):
    with pytest.raises(SettingsError, match="shot"):
        chart_data(oxide, shot=1)


def test_oil_on_water_carries_classes_and_caution(bench):
    chart = chart_data(bench("mineral-oil", "water"), step_nm=20.0)
    assert [run.name for run in chart.appearance] == ["sheen (silvery/grey)", "rainbow"]
    assert any("legal evidence" in caution for caution in chart.cautions)


def test_other_films_carry_no_classes_of_oil(chart):
    assert chart.appearance == ()
    assert not any("legal evidence" in caution for caution in chart.cautions)
