"""From arrays to a measurement: statistics, sites, verdict, budget, and the words that go with them."""

import numpy as np
from numpy.typing import NDArray

from sheenmap import __version__
from sheenmap.flags import OUTSIDE, has, is_blocked
from sheenmap.inversion import Doubts, Inversion
from sheenmap.lookup import Table
from sheenmap.measure.budget import budget, common_u_nm
from sheenmap.measure.causes import likely_causes, told
from sheenmap.measure.frames import Frames
from sheenmap.measure.judging import judge_map, read_recipe_sites
from sheenmap.measure.notes import headline, notes
from sheenmap.measure.preview import preview
from sheenmap.measure.result import BudgetLine, Measurement
from sheenmap.recipe import Recipe
from sheenmap.uniformity import FORMULAS, Formula, SiteReading, nonuniformity, statistics
from sheenmap.wafer import Region

LEAST_CLAIMED = 0.01  # of the region; less is no map
Listed = tuple[NDArray[np.float32], NDArray[np.float32]]


def assemble(
    recipe: Recipe, shots: tuple[Frames, ...], region: Region, angle_deg: NDArray[np.float32] | None, table: Table,
    inversion: Inversion, listed: Listed | None,
    *,
    words: tuple[str, ...] = (),
) -> Measurement:  # fmt: skip
    """The measurement that the arrays amount to."""
    signal, doubts = inversion.signal, inversion.doubts
    flags = inversion.flags
    thickness_nm = np.where(is_blocked(flags), np.nan, inversion.thickness_nm).astype(np.float32)
    sigma_nm = np.where(has(flags, OUTSIDE), np.nan, inversion.sigma_nm).astype(np.float32)
    lines = _budget(recipe, table, doubts, thickness_nm, sigma_nm, angle_deg)
    u_common_nm = common_u_nm(lines)
    numbers = statistics(thickness_nm, sigma_nm, flags, region.inside, u_common_nm, noise_correlation=signal.spread)
    is_measured = numbers.claimed >= LEAST_CLAIMED * max(numbers.pixels, 1)
    readings = read_recipe_sites(recipe, region, thickness_nm, sigma_nm, flags, u_common_nm, spread=signal.spread)
    verdict = None
    if is_measured and recipe.tolerance is not None:
        verdict = judge_map(recipe, region, thickness_nm, sigma_nm, flags, readings, numbers, u_common_nm)
    sentence = headline(numbers, u_common_nm, flags, region, is_measured=is_measured)
    if inversion.is_contradicted:
        causes = likely_causes(recipe, shots, region, table, inversion)
        sentence = f"not measured: the picture contradicts the recipe; {told(causes)}"
    image, scale = preview(shots[0])
    return Measurement(
        title=recipe.title,
        thickness_nm=thickness_nm,
        sigma_nm=sigma_nm,
        flags=flags,
        residual=(inversion.chi_square / (table.signal.shape[-1] - 1)).astype(np.float32),
        preview=image,
        preview_scale=scale,
        region=region,
        statistics=numbers,
        sentence=sentence,
        is_measured=is_measured,
        candidates_nm=None if listed is None else listed[0],
        candidate_odds=None if listed is None else listed[1],
        sites=readings,
        nonuniformity_percent=_formulas(readings, recipe),
        verdict=verdict,
        budget=lines,
        u_common_nm=u_common_nm,
        notes=(*words, *notes(recipe, shots, table, inversion)),
        history=(
            *signal.history,
            f"shading left after the blank: {100 * doubts.shading_u:.2f} % rms",
            f"table of {table.thickness_nm.size} thicknesses, wavelengths {table.wavelength_step_nm:g} nm apart",
        ),
        provenance=_provenance(recipe, shots, inversion, doubts),
    )


def _budget(
    recipe: Recipe, table: Table, doubts: Doubts, thickness_nm: NDArray[np.float32], sigma_nm: NDArray[np.float32],
    angle_deg: NDArray[np.float32] | None,
) -> tuple[BudgetLine, ...]:  # fmt: skip
    claimed = np.isfinite(thickness_nm)
    if not claimed.any():
        return ()
    angle = recipe.shots[0].view.angle_deg.value if angle_deg is None else float(np.median(angle_deg[claimed]))
    middle_nm, own_nm = float(np.median(thickness_nm[claimed])), float(np.median(sigma_nm[claimed]))
    return budget(recipe, table, doubts, thickness_nm=middle_nm, angle_deg=angle, sigma_nm=own_nm)


def _formulas(readings: tuple[SiteReading, ...], recipe: Recipe) -> dict[str, float | None]:
    values = [reading.thickness_nm for reading in readings if reading.thickness_nm is not None]
    target_nm = None if recipe.tolerance is None else recipe.tolerance.target_nm
    return (
        {
            name: nonuniformity(values, name, target_nm=target_nm)
            for name, formula in FORMULAS.items()
            if _is_nonuniformity(formula)
        }
        if len(values) > 1
        else {}
    )


def _is_nonuniformity(formula: Formula) -> bool:
    """The registry also holds plain statistics in nm, and uniformities that count the other way round."""
    return formula.unit == "%" and not formula.name.startswith("uniformity")


def _provenance(recipe: Recipe, shots: tuple[Frames, ...], inversion: Inversion, doubts: Doubts) -> dict[str, object]:
    return {
        "sheenmap": __version__,
        "recipe": recipe.path.name,
        "recipe_sha256": recipe.digest,
        "recipe_text": recipe.text,
        "pictures_sha256": {name: digest for shot in shots for name, digest in shot.digests.items()},
        "noise_spread": inversion.signal.spread,
        "shading_u": doubts.shading_u,
        "level_u": doubts.level_u,
        "colour_u": doubts.colour_u,
    }
