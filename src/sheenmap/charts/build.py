"""The story of a chart: reflectance, colour, names, orders, look-alikes."""

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.charts.appearance import OIL_CAUTION, appearance_classes, is_oil_on_water
from sheenmap.charts.chart import Chart, White, runs_of
from sheenmap.charts.orders import order_step_nm, orders_between
from sheenmap.charts.repeats import find_repeats
from sheenmap.charts.sight import Sight, exposure_for, look, thicknesses, view_of
from sheenmap.charts.words import CAUTIONS, describe, notes_for
from sheenmap.colour import chromaticity, colour_name, delta_e_2000, lab, srgb
from sheenmap.errors import Fault, SettingsError
from sheenmap.lookup import build_table, evaluate
from sheenmap.optics import View
from sheenmap.recipe import Recipe, Shot

SLOPE_SPAN_NM = 0.1  # of the chord that stands for the colour's derivative; far under the width of a fringe
REPEATS_APART = 0.25  # of an order: nearer pairs are one and the same repeat
MOST_ROWS = 20_000
REPEAT_WITHIN = 3.0  # CIEDE2000; one is just seen side by side, three is where memory or a print stops to tell (common practice)


def chart_data(
    recipe: Recipe,
    *,
    step_nm: float = 1.0,
    observer: str = "cie-1931",
    white: White = "light",
    repeat_within: float = REPEAT_WITHIN,
    shot: int = 0,
) -> Chart:
    """Colour against thickness of the recipe's film, over its search range.

    Parameters
    ----------
    recipe : Recipe
        Its stack, search range, and the light, camera and view of one shot. Of a map of angles, ``angle_deg`` counts.
    step_nm : float
        Of the thicknesses.
    observer : str
        Of the catalogue: "cie-1931" or "cie-1964".
    white : "light" or "blank"
        What the eye is adapted to in Lab and sRGB: the perfect mirror, or the blank's surface, under the light.
    repeat_within : float
        Largest CIEDE2000 of colours that count as alike.
    shot : int
        Position in ``recipe.shots``.

    Returns
    -------
    Chart

    Raises
    ------
    SettingsError
        A step, limit or shot that cannot be; a white that the recipe does not describe; curves that share no wavelengths.
    UnknownNameError
        An observer that the catalogue does not list.
    """
    _check(recipe, step_nm=step_nm, white=white, repeat_within=repeat_within, shot=shot)
    seen = recipe.shots[shot]
    view = view_of(seen)
    thickness_nm = thicknesses(recipe.search_nm, step_nm)
    sight = look(recipe.stack, seen, view, thickness_nm, observer, white)
    exposure = exposure_for(sight.relative)
    screen, in_gamut = srgb(sight.relative, sight.white)
    shown, shown_in_gamut = srgb(exposure * sight.relative, sight.white)
    colours = lab(sight.relative, sight.white)
    names = tuple(colour_name(colour) for colour in lab(exposure * sight.relative, sight.white))
    wave_nm = order_step_nm(recipe.stack, view)
    apart_nm = min(wave_nm, np.ptp(thickness_nm)) * REPEATS_APART
    look_alikes, repeats = find_repeats(colours, thickness_nm, repeat_within, apart_nm=apart_nm)
    setup = describe(recipe, seen, view, observer=observer, white=white, band_nm=sight.band_nm)
    first_nm, last_nm = float(thickness_nm[0]), float(thickness_nm[-1])
    share_out = float(np.mean(~shown_in_gamut))
    on_water = is_oil_on_water(recipe.stack)
    return Chart(
        setup=setup,
        thickness_nm=thickness_nm,
        xyz=sight.xyz,
        xy=chromaticity(sight.xyz),
        lab=colours,
        srgb=screen,
        in_gamut=in_gamut,
        exposure=exposure,
        shown=shown,
        shown_in_gamut=shown_in_gamut,
        camera=_camera_signal(recipe, seen, view, thickness_nm),
        de00_per_nm=_speed(sight),
        names=names,
        runs=runs_of(names, thickness_nm),
        orders=orders_between(wave_nm, first_nm, last_nm),
        look_alikes=look_alikes,
        repeats=repeats,
        repeat_within=repeat_within,
        appearance=appearance_classes(first_nm, last_nm) if on_water else (),
        notes=notes_for(seen, setup, thickness_nm=thickness_nm, exposure=exposure, share_out=share_out),
        cautions=CAUTIONS + ((OIL_CAUTION,) if on_water else ()),
    )


def _check(recipe: Recipe, *, step_nm: float, white: White, repeat_within: float, shot: int) -> None:
    faults = []
    span_nm = recipe.search_nm[1] - recipe.search_nm[0]
    if not (step_nm > 0 and span_nm / MOST_ROWS <= step_nm <= span_nm / 2):
        allowed = f"{max(span_nm / MOST_ROWS, 0):.3g} to {span_nm / 2:.6g} for the search range of {span_nm:g} nm"
        faults.append(Fault(key="step_nm", found=f"{step_nm:g}", allowed=allowed))
    if not (np.isfinite(repeat_within) and repeat_within > 0):
        faults.append(Fault(key="repeat_within", found=f"{repeat_within:g}", allowed="above 0 (CIEDE2000)"))
    if not 0 <= shot < len(recipe.shots):
        faults.append(Fault(key="shot", found=str(shot), allowed=f"0 to {len(recipe.shots) - 1}"))
    elif white == "blank" and recipe.shots[shot].camera.blank_surface is None:
        faults.append(
            Fault(key="white", found="blank", allowed="light", hint="the recipe does not say what the blank's surface is")
        )
    if faults:
        raise SettingsError(faults, where="chart")


def _camera_signal(recipe: Recipe, shot: Shot, view: View, thickness_nm: FloatArray) -> FloatArray:
    table = build_table(
        recipe.stack,
        recipe.search_nm,
        light=shot.light,
        response=shot.camera.response,
        blank=shot.camera.blank_surface,
        view=view,
    )
    return evaluate(table, thickness_nm)[0]


def _speed(sight: Sight) -> FloatArray:
    """CIEDE2000 per nm (T,): XYZ follow the slope of the reflectance, being sums over it."""
    half = sight.relative_slope * (SLOPE_SPAN_NM / 2)
    there, back = (lab(sight.relative + half * side, sight.white) for side in (1, -1))
    return np.asarray(delta_e_2000(back, there) / SLOPE_SPAN_NM)
