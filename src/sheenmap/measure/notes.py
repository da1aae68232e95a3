"""What a map amounts to, and what was noticed on the way, in words."""

import numpy as np

from sheenmap.flags import AMBIGUOUS, AT_LIMIT, DARK, FLAGS, OFF_CURVE, OUTSIDE, SATURATED, FlagArray, has
from sheenmap.inversion import Inversion
from sheenmap.lookup import Table
from sheenmap.measure.frames import Frames
from sheenmap.recipe import Recipe
from sheenmap.uniformity import Statistics
from sheenmap.wafer import Region

BLAME = {
    OFF_CURVE: "no thickness makes their colour: check material, lamp, encoding and blank",
    AMBIGUOUS: "two thicknesses or more fit: narrow search_nm, or add a second shot",
    SATURATED: "a channel is at full scale: expose less",
    DARK: "they are too dark: expose longer, or let the part mirror an even light",
    AT_LIMIT: "the best fit stands on the end of the search range: widen search_nm",
}
WORTH_SAYING = 0.05
UNEVEN = 0.008  # a good blank leaves 0.3 %
WORTH_DOUBTING = 1.7  # right set-ups stay below 1.3


def headline(numbers: Statistics, u_common_nm: float, flags: FlagArray, region: Region, *, is_measured: bool) -> str:
    """The map in one sentence; the reason where nothing can be claimed."""
    share = 100 * numbers.claimed / max(numbers.pixels, 1)
    if not is_measured or numbers.mean_nm is None or numbers.sd_nm is None:
        return f"not measured: {share:.1f} % of the region claimed; {_blame(flags, region)}"
    return (
        f"mean {numbers.mean_nm:.1f} nm, standard deviation {numbers.sd_nm:.1f} nm, shared uncertainty u = {u_common_nm:.1f} nm; "
        f"{share:.1f} % of the region claimed" + ("" if share > 95 else f", {_blame(flags, region)}")
    )


def _blame(flags: FlagArray, region: Region) -> str:
    inside = flags[region.inside]
    shares = {flag: float(np.mean(has(inside, flag))) for flag in BLAME}
    worst = max(shares, key=lambda flag: shares[flag])
    return f"{worst.name} on {100 * shares[worst]:.0f} %: {BLAME[worst]}"


def notes(recipe: Recipe, shots: tuple[Frames, ...], table: Table, inversion: Inversion) -> tuple[str, ...]:
    """Findings and hints, each with its evidence."""
    found = [f"{shot.picture.path.name} {note}" for shot in shots for note in shot.notes]
    camera = recipe.shots[0].camera
    if camera.colour_u is None:
        found.append(
            "the recipe does not say how well lamp and camera are known: "
            f"{100 * inversion.doubts.colour_u:.1f} % of each channel assumed (camera.colour_u)"
        )
    if recipe.index_scale.u == 0:
        found.append(
            "the film's index is taken as exact; 1 % of it is about 1 % of the thickness (index_scale = { value = 1.0, u = ... })"
        )
    if inversion.misfit > WORTH_DOUBTING and not inversion.is_contradicted:
        found.append(
            f"residuals are {inversion.misfit:.1f} times what noise and shading explain, on all of the film: "
            "lamp, camera response or index may be off by more than the uncertainty says"
        )
    if inversion.doubts.shading_u > UNEVEN and camera.shading_u is None:
        found.append(
            f"brightness differs from the table's by {100 * inversion.doubts.shading_u:.1f} % rms over the film: the exposure or "
            "the lamp has changed since the blank, or the blank does not hold all of the shading; sigma is widened for it"
        )
    inside = inversion.flags[(inversion.flags & np.uint16(OUTSIDE.mask)) == 0]
    for flag in FLAGS:
        share = float(np.mean(has(inside, flag))) if inside.size else 0.0
        if flag is not OUTSIDE and share >= WORTH_SAYING:
            found.append(f"{flag.name} on {100 * share:.1f} % of the region: {flag.meaning}")
    thin = _thin(inversion, table)
    return (*found, *thin)


def _thin(inversion: Inversion, table: Table) -> tuple[str, ...]:
    """A one-sided limit where zero thickness lies within the interval of claimed pixels."""
    if table.search_nm[0] > 0:
        return ()
    with np.errstate(invalid="ignore"):
        thin = (inversion.thickness_nm < 1.96 * inversion.sigma_nm) & ~has(inversion.flags, OUTSIDE)
    if not thin.any():
        return ()
    limit_nm = float(np.quantile((inversion.thickness_nm + 1.645 * inversion.sigma_nm)[thin], 0.95))
    share = 100 * float(np.mean(thin))
    return (f"on {share:.1f} % of the picture zero thickness lies inside the interval: under {limit_nm:.0f} nm there, at 95 %",)
