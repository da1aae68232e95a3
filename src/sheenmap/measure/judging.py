"""A map's sites read and held against the recipe's tolerance."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.errors import Fault, SettingsError
from sheenmap.flags import FlagArray
from sheenmap.recipe import Recipe
from sheenmap.uniformity import PixelEvidence, SiteReading, Statistics, Verdict, judge, read_sites
from sheenmap.wafer import Region, site_positions

Plane = NDArray[np.float32]


def read_recipe_sites(
    recipe: Recipe, region: Region, thickness_nm: Plane, sigma_nm: Plane, flags: FlagArray, u_common_nm: float, *, spread: float
) -> tuple[SiteReading, ...]:
    """Readings at the recipe's sites; none when it has none. ``spread`` is how many pixels share one draw of the noise."""
    if recipe.sites is None:
        return ()
    places = site_positions(recipe.sites, region)
    return read_sites(thickness_nm, sigma_nm, flags, places, u_common_nm, noise_correlation=spread)


def judge_map(
    recipe: Recipe,
    region: Region,
    thickness_nm: Plane,
    sigma_nm: Plane,
    flags: FlagArray,
    readings: tuple[SiteReading, ...],
    numbers: Statistics,
    u_common_nm: float,
) -> Verdict:
    """The verdict on a map. Raises ``SettingsError`` for a recipe without a tolerance."""
    if recipe.tolerance is None:
        fault = Fault(key="tolerance", found="nothing", allowed="a [tolerance] to judge by")
        raise SettingsError([fault], where=recipe.path.name)
    pixels = PixelEvidence(thickness_nm=thickness_nm, sigma_nm=sigma_nm, flags=flags, inside=region.inside)
    return judge(recipe.tolerance, readings, numbers, u_common_nm=u_common_nm, pixels=pixels)
