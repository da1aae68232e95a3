"""Two-way charts: colour over thickness and angle, or over thickness and index."""

import textwrap
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from matplotlib.ticker import MaxNLocator

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.charts.chart import Setup
from sheenmap.charts.drawing import draw_scale, edges
from sheenmap.charts.sheet import INK, Paper, Sheet, clipped, settled
from sheenmap.charts.sight import exposure_for, look, thicknesses, view_of
from sheenmap.charts.words import CAUTIONS, describe, lit_words
from sheenmap.colour import srgb
from sheenmap.errors import Fault, SettingsError
from sheenmap.optics import Stack, View
from sheenmap.recipe import Recipe

Against = Literal["angle", "index"]
AXIS_WORDS: dict[Against, str] = {"angle": "angle of incidence in degrees", "index": "index scale of the film (multiplies n - 1)"}
DEFAULTS: dict[Against, tuple[float, float]] = {"angle": (0.0, 75.0), "index": (0.9, 1.1)}
MOST_ROWS = 400


@dataclass(frozen=True, kw_only=True, eq=False)
class TwoWay:
    """Colour over thickness (T,) and a second value (V,).

    ``shown`` (V, T, 3) are screen codes brightened by ``exposure`` as for a ``Chart``, not clipped where ``in_gamut`` (V, T).
    """

    setup: Setup
    against: Against
    thickness_nm: FloatArray
    values: FloatArray
    xyz: FloatArray
    shown: FloatArray
    in_gamut: BoolArray
    exposure: float


def two_way_data(
    recipe: Recipe,
    *,
    against: Against = "angle",
    values: Sequence[float] | None = None,
    step_nm: float = 2.0,
    observer: str = "cie-1931",
) -> TwoWay:
    """Colours of the film over thickness and ``values``, equally spaced: the angle in degrees, or the film's index scale.

    Raises
    ------
    SettingsError
        Values that cannot be, do not rise in equal steps, or are too many.
    """
    axis = np.asarray(values if values is not None else np.linspace(*DEFAULTS[against], 151), dtype=float)
    _check(axis, against, recipe.search_nm, step_nm)
    seen = recipe.shots[0]
    view = view_of(seen)
    thickness_nm = thicknesses(recipe.search_nm, step_nm)
    varied = [_varied(recipe.stack, view, against, float(value)) for value in axis]
    sights = [look(stack, seen, turned, thickness_nm, observer, "light") for stack, turned in varied]
    tristimulus, white = np.stack([sight.relative for sight in sights]), sights[0].white
    exposure = exposure_for(tristimulus)
    shown, in_gamut = srgb(exposure * tristimulus, white)
    return TwoWay(
        setup=describe(recipe, seen, view, observer=observer, white="light", band_nm=sights[0].band_nm),
        against=against,
        thickness_nm=thickness_nm,
        values=axis,
        xyz=tristimulus,
        shown=shown,
        in_gamut=in_gamut,
        exposure=exposure,
    )


def two_way_bytes(chart: TwoWay, kind: str, *, paper: Paper = "a4") -> bytes:
    """The page as "svg", "png" or "pdf"."""
    with settled():
        sheet = Sheet(paper)
        setup = chart.setup
        sheet.write(
            0.3, 0.26, clipped(f"Colour against thickness and {chart.against}: {setup.title}", 95), size=13, weight="bold"
        )
        others = setup.view if chart.against == "index" else setup.view.split(", ", 1)[1]
        sheet.write(0.3, 0.56, clipped(setup.stack, 150), size=9)
        sheet.write(
            0.3, 0.75, clipped(f"light {setup.light};  eye {setup.observer}, adapted to the light;  {others}", 170), size=9
        )
        _picture(sheet, chart)
        lines = textwrap.wrap(
            "  ".join((*CAUTIONS, f"The colours are {lit_words(chart.exposure)}, as an eye adapts. {_gamut_words(chart)}")), 240
        )
        sheet.write(0.3, sheet.height - 0.52, "\n".join(lines[:3]), size=6.3)
        return sheet.save(kind)


def _picture(sheet: Sheet, chart: TwoWay) -> None:
    height = sheet.height - 2.1
    sheet.mount(1.02, height + 0.42)
    axes = sheet.axes(1.14, height, edges(chart.thickness_nm))
    half = (chart.values[1] - chart.values[0]) / 2
    low, high = float(chart.values[0] - half), float(chart.values[-1] + half)
    axes.imshow(
        chart.shown, extent=(*edges(chart.thickness_nm), low, high), aspect="auto", interpolation="nearest", origin="lower"
    )
    if not chart.in_gamut.all():
        axes.contour(chart.thickness_nm, chart.values, chart.in_gamut.astype(float), levels=[0.5], colors=INK, linewidths=0.4)
    axes.set_ylim(low, high)
    axes.yaxis.set_major_locator(MaxNLocator(nbins=12, steps=[1, 2, 2.5, 5, 10]))
    axes.tick_params(axis="y", left=True, labelleft=True)
    draw_scale(axes)
    sheet.label(1.14 + height + 0.09, "film, nm")
    sheet.figure.text(
        0.85 / sheet.width, 1 - (1.14 + height / 2) / sheet.height, AXIS_WORDS[chart.against], size=8, rotation=90, va="center"
    )


def _gamut_words(chart: TwoWay) -> str:
    share = 100 * float(np.mean(~chart.in_gamut))
    return (
        "All colours are inside sRGB." if share == 0 else f"{share:.1f} % is outside sRGB: inside the thin lines, shown clipped."
    )


def _varied(stack: Stack, view: View, against: Against, value: float) -> tuple[Stack, View]:
    if against == "angle":
        return stack, replace(view, angle_deg=value)
    layers = tuple(replace(layer, index_scale=value) if layer.thickness_nm is None else layer for layer in stack.layers)
    return replace(stack, layers=layers), view


def _check(values: FloatArray, against: Against, search_nm: tuple[float, float], step_nm: float) -> None:
    faults = []
    steps = np.diff(values)
    is_even = (
        values.ndim == 1 and 2 <= values.size <= MOST_ROWS and bool(np.all(steps > 0)) and np.allclose(steps, steps[0], rtol=1e-6)
    )
    if not is_even:
        allowed = f"2 to {MOST_ROWS}, rising in equal steps"
        faults.append(Fault(key="values", found=f"{values.size} values", allowed=allowed))
    low, high = (0.0, 90.0) if against == "angle" else (0.1, 10.0)
    if not np.all((values >= low) & (values < high)):
        allowed = f"{low:g} up to, not including, {high:g}"
        faults.append(Fault(key="values", found=f"{values.min():g} to {values.max():g}", allowed=allowed))
    span_nm = search_nm[1] - search_nm[0]
    if not (0 < step_nm <= span_nm / 2):
        faults.append(Fault(key="step_nm", found=f"{step_nm:g}", allowed=f"above 0, up to {span_nm / 2:g}"))
    if faults:
        raise SettingsError(faults, where="two-way chart")
