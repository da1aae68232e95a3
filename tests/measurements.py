"""Invented measurements, for tests of what is written and shown."""

from dataclasses import replace

import numpy as np

from sheenmap.flags import AMBIGUOUS, AT_LIMIT, BY_CONTINUITY, OFF_CURVE, OUTSIDE, SATURATED, WEAK, is_blocked
from sheenmap.measure import BudgetLine, Measurement
from sheenmap.uniformity import Tolerance, judge, nonuniformity, read_sites, statistics
from sheenmap.wafer import Disc, Region, SiteSpec, site_positions

ORDER_STEP_NM = 188.0
TOLERANCE = Tolerance(target_nm=500, plus_nm=10, minus_nm=10, nonuniformity_percent=1.5)


def oxide_wafer(*, width: int = 640, height: int = 520, seed: int = 7, with_candidates: bool = True) -> Measurement:
    """A 200 mm wafer with a bowl of some 8 nm, a scratch, dust, a clipped clamp, an undecided patch and a weak band."""
    rng = np.random.default_rng(seed)
    y, x = np.mgrid[:height, :width].astype(float)
    centre, radius = ((width - 1) / 2, (height - 1) / 2), 0.44 * min(width, height)
    u, v = (x - centre[0]) / radius, (y - centre[1]) / radius
    r = np.hypot(u, v)
    flags = np.zeros((height, width), np.uint16)
    flags[r > 0.97] |= OUTSIDE.mask
    inside = flags == 0
    truth = 498 + 6 * r**2 + 1.5 * u - 2 * v
    sigma = (0.8 + 0.5 * r + 1.2 * np.exp(-(((v + 0.55) / 0.12) ** 2))).astype(np.float32)
    thickness = (truth + sigma * rng.normal(size=truth.shape)).astype(np.float32)
    flags[inside & (np.abs(v + 0.55) < 0.12)] |= WEAK.mask
    flags[inside & (np.abs(u - 0.35 * v - 0.2) < 0.006) & (np.abs(v) < 0.5)] |= OFF_CURVE.mask
    for dust_u, dust_v in rng.uniform(-0.65, 0.65, size=(14, 2)):
        flags[inside & (np.hypot(u - dust_u, v - dust_v) < 0.012)] |= OFF_CURVE.mask
    flags[inside & (np.hypot(u + 0.95, v) < 0.09)] |= SATURATED.mask
    patch = inside & (np.hypot((u + 0.35) / 1.4, v - 0.35) < 0.16)
    flags[patch] |= AMBIGUOUS.mask
    flags[inside & (r > 0.85) & (np.arctan2(v, u) > 2.2)] |= BY_CONTINUITY.mask
    flags[inside & (np.hypot(u - 0.1, v - 0.93) < 0.03)] |= AT_LIMIT.mask
    candidates, odds = _candidates(truth, flags, patch)
    blocked = is_blocked(flags)
    residual = rng.chisquare(2, size=truth.shape).astype(np.float32) / 2
    residual[(flags & OFF_CURVE.mask) != 0] = 25
    residual[~inside] = np.nan
    preview = _photo(truth, inside, flags, rng)
    thickness[blocked] = np.nan
    sigma[blocked & ~patch] = np.nan
    mm_per_px = 100 / radius
    region = Region(
        inside=inside, origin_px=centre, mm_per_px=mm_per_px, edge_exclusion_mm=3,
        disc=Disc(x_px=centre[0], y_px=centre[1], radius_px=radius, u_px=0.04, notch_deg=270.0),
    )  # fmt: skip
    return _told(region, thickness, sigma, flags, residual, preview, (candidates, odds) if with_candidates else (None, None))


def nothing_claimed() -> Measurement:
    """The same wafer where no colour lies on the curve."""
    found = oxide_wafer(width=160, height=120, with_candidates=False)
    flags = found.flags | np.where(found.region.inside, OFF_CURVE.mask, 0).astype(np.uint16)
    empty = np.full(found.flags.shape, np.nan, np.float32)
    sentence = "Nothing is claimed: 100 % of the region is off the curve; the recipe may name another film, lamp or encoding."
    return replace(
        found, thickness_nm=empty, sigma_nm=empty, flags=flags, sentence=sentence, is_measured=False, sites=(), verdict=None,
        nonuniformity_percent={}, statistics=statistics(empty, empty, flags, found.region.inside),
    )  # fmt: skip


def _candidates(truth, flags, patch):
    candidates = np.full((2, *truth.shape), np.nan, np.float32)
    odds = np.full((2, *truth.shape), np.nan, np.float32)
    ring = (flags & BY_CONTINUITY.mask) != 0
    candidates[0][patch], candidates[1][patch] = truth[patch], truth[patch] - ORDER_STEP_NM
    odds[0][patch], odds[1][patch] = 0.55, 0.45
    candidates[0][ring], odds[0][ring] = truth[ring] - ORDER_STEP_NM, 0.02
    return candidates, odds


def _photo(truth, inside, flags, rng):
    """Some interference colours; nothing is read from them."""
    wavelengths = np.array([610.0, 545.0, 460.0])
    signal = 0.42 - 0.3 * np.cos(4 * np.pi * 1.46 * truth[..., None] / wavelengths)
    signal = np.where(inside[..., None], signal, 0.03)
    signal[(flags & OFF_CURVE.mask) != 0] = 0.55
    signal[(flags & SATURATED.mask) != 0] = 1.0
    return np.clip(255 * np.maximum(signal + 0.008 * rng.normal(size=signal.shape), 0) ** 0.7, 0, 255).astype(np.uint8)


def _told(region, thickness, sigma, flags, residual, preview, others):
    sites = site_positions(SiteSpec(layout="rings-49", radius_mm=2.0), region)
    readings = read_sites(thickness, sigma, flags, sites, 0.9)
    found = statistics(thickness, sigma, flags, region.inside, 0.9)
    values = [reading.thickness_nm for reading in readings if reading.thickness_nm is not None]
    share = 100 * found.claimed / found.pixels
    return Measurement(
        title="500 nm field oxide, inspection bench 2",
        thickness_nm=thickness, sigma_nm=sigma, flags=flags, residual=residual, preview=preview, preview_scale=1.0, region=region,
        statistics=found, candidates_nm=others[0], candidate_odds=others[1], sites=readings,
        nonuniformity_percent={"half-range over mean": nonuniformity(values, "half-range over mean")},
        verdict=judge(TOLERANCE, readings, found, u_common_nm=0.9),
        budget=(
            BudgetLine(name="noise of a pixel", u_nm=1.2, shared=False, note="estimated from the photograph"),
            BudgetLine(name="film index", u_nm=0.7, shared=True, note="index_scale 1.000 with u 0.0014"),
            BudgetLine(name="lamp and camera", u_nm=0.5, shared=True, note="colour_u 0.5 %"),
            BudgetLine(name="angle of view", u_nm=0.25, shared=True, note="u 0.5 degrees"),
        ),
        u_common_nm=0.9,
        sentence=f"{found.median_nm:.1f} nm in the middle of the map (u {0.9:.1f} nm); {share:.1f} % of the region is claimed.",
        notes=(
            "The shading left after the blank is 0.6 %, found from the photograph.",
            "The darkest colour that the film can have is reached: no stray light beyond 0.3 % is seen.",
        ),
        history=("read photo.png: 640 x 520, 8 bits", "decoded: linear", "dark frame taken off", "divided by the blank"),
        provenance={"version": "0.1.0", "recipe_sha256": "5f" * 32, "photo": "photo.png", "photo_sha256": "a1" * 32},
    )  # fmt: skip
