"""Why a pixel is as it is: its signal, its candidates with their odds, the parts of its uncertainty, its flags."""

from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any

import numpy as np

from sheenmap.errors import Fault, SettingsError
from sheenmap.flags import FLAGS, is_blocked
from sheenmap.inversion import chi_square_limit, pixel_candidates
from sheenmap.lookup import evaluate
from sheenmap.measure.measure import Road, travel
from sheenmap.recipe import Recipe

CHANNELS = ("red", "green", "blue")


@dataclass(frozen=True, kw_only=True)
class Candidate:
    """A thickness that fits the pixel alone: chi-square, and odds against the best by the pixel's own signal."""

    thickness_nm: float
    chi_square: float
    odds: float


@dataclass(frozen=True, kw_only=True)
class Explanation:
    """All that is known of one pixel; ``order_gap`` is the chi-square by which its region's best other order is worse."""

    x: int
    y: int
    claimed: bool
    thickness_nm: float | None
    sigma_nm: float | None
    signal: tuple[float, ...]
    noise: tuple[float, ...]
    expected: tuple[float, ...] | None
    chi_square: float | None
    candidates: tuple[Candidate, ...]
    others_nm: tuple[float, ...]
    order_gap: float | None
    flags: tuple[str, ...]

    def as_dict(self) -> dict[str, Any]:
        """The explanation as plain data."""
        return asdict(self)

    @property
    def text(self) -> str:
        """The explanation in lines."""
        return "\n".join(_lines(self))


def explain(photo: Path, recipe: Recipe, x: int, y: int) -> Explanation:
    """Why the pixel in column ``x`` and row ``y`` is as it is. Raises what ``measure`` raises, and for a place outside."""
    road = travel(Path(photo), recipe)
    height, width = road.inversion.flags.shape
    if not (0 <= x < width and 0 <= y < height):
        raise SettingsError([Fault(key="--explain", found=f"{x},{y}", allowed=f"0,0 to {width - 1},{height - 1}")], where="map")
    return _explanation(road, x, y)


def _explanation(road: Road, x: int, y: int) -> Explanation:
    inversion, at = road.inversion, (y, x)
    signal, variance = (array[at].astype(float) for array in (inversion.signal.values, inversion.signal.variance))
    angle = None if road.angle_deg is None else road.angle_deg[at][None].astype(float)
    thickness = float(inversion.thickness_nm[at])
    known = np.isfinite(thickness)
    expected = evaluate(road.table, np.array([thickness]), angle)[0][0] if known else None
    found = pixel_candidates(signal[None], variance[None], inversion.signal.correlation, road.table, inversion.doubts, angle)
    listed = [k for k in range(found.chi_square.shape[1]) if np.isfinite(found.chi_square[0, k])]
    best = found.chi_square[0, 0]
    block = int(inversion.block[at])
    others = inversion.settled.others_nm.reshape(inversion.settled.gap.size, -1)[block] if block >= 0 else np.empty(0)
    return Explanation(
        x=x, y=y, claimed=bool(known and not is_blocked(inversion.flags[at])),
        thickness_nm=thickness if known else None,
        sigma_nm=float(inversion.sigma_nm[at]) if known else None,
        signal=tuple(map(float, signal)), noise=tuple(map(float, np.sqrt(variance))),
        expected=None if expected is None else tuple(map(float, expected)),
        chi_square=float(inversion.chi_square[at]) if np.isfinite(inversion.chi_square[at]) else None,
        candidates=tuple(
            Candidate(
                thickness_nm=float(found.thickness_nm[0, k]), chi_square=float(found.chi_square[0, k]),
                odds=float(np.exp(-0.5 * (found.chi_square[0, k] - best))),
            )
            for k in listed
        ),
        others_nm=tuple(float(v) for v in others if np.isfinite(v)),
        order_gap=float(inversion.settled.gap.flat[block]) if block >= 0 else None,
        flags=tuple(flag.name for flag in FLAGS if inversion.flags[at] & flag.mask),
    )  # fmt: skip


def _lines(e: Explanation) -> list[str]:
    lines = [f"pixel {e.x},{e.y} (column, row)"]
    if e.thickness_nm is not None and e.sigma_nm is not None:
        word = "claimed" if e.claimed else "found, not claimed"
        lines.append(f"  {word}: {e.thickness_nm:.2f} nm, standard uncertainty {e.sigma_nm:.2f} nm by noise and shading")
    else:
        lines.append("  no thickness was formed")
    expected = e.expected or (None,) * len(e.signal)
    names = CHANNELS * (len(e.signal) // len(CHANNELS))
    for name, value, noise, model in zip(names, e.signal, e.noise, expected):
        fitted = "" if model is None else f", table {model:.4f} ({(value - model) / noise:+.1f} sigma)"
        lines.append(f"  {name:<5} {value:.4f} of the blank, noise {noise:.4f}{fitted}")
    if e.chi_square is not None:
        freedoms, limit = len(e.signal) - 1, chi_square_limit(1e-3, len(e.signal))
        lines.append(
            f"  chi-square {e.chi_square:.1f} ({freedoms} degrees of freedom; one clean pixel in 1000 is above {limit:.1f})"
        )
    lines.append("  thicknesses that fit this pixel by itself:")
    lines += [f"    {c.thickness_nm:8.1f} nm   chi-square {c.chi_square:6.1f}   odds {c.odds:.2g}" for c in e.candidates] or [
        "    none"
    ]
    if e.order_gap is not None:
        lines.append(f"  the region's next best order is worse by {e.order_gap:.1f} in chi-square (13.8 decides)")
    if e.others_nm:
        lines.append("  undecided against: " + ", ".join(f"{v:.0f} nm" for v in e.others_nm))
    lines.append("  flags: " + (", ".join(e.flags) or "none"))
    lines += [f"    {flag.name}: {flag.meaning}. {flag.advice}" for flag in FLAGS if flag.name in e.flags]
    return lines
