"""What the whole map shares: how far each doubt about the set-up would move the thickness.

Each input is moved by its standard uncertainty, and the thickness that the moved signal would read is the contribution
(JCGM 100, 5.1.3, numerically). These parts are common to all pixels: averaging over a site does not shrink them.
"""

from dataclasses import replace

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.inversion import Doubts
from sheenmap.lookup import Table, build_table, evaluate
from sheenmap.measure.result import BudgetLine
from sheenmap.optics import Stack, View
from sheenmap.recipe import Recipe

CHANNELS = 3  # of one shot
HALF_SPAN_NM = 2.0  # of the small tables that are built about the map's middle


def budget(
    recipe: Recipe, table: Table, doubts: Doubts, *, thickness_nm: float, angle_deg: float, sigma_nm: float
) -> tuple[BudgetLine, ...]:
    """Contributions to the uncertainty at ``thickness_nm`` and ``angle_deg``; ``sigma_nm`` is the pixels' own at the middle."""
    signal, slope = (part[0] for part in evaluate(table, np.array([thickness_nm]), np.array([angle_deg])))
    colour, level = _colour_and_level(doubts, signal, slope)
    lines = [
        BudgetLine(name="noise and shading of one pixel", u_nm=sigma_nm, shared=False, note="shrinks over a site"),
        BudgetLine(
            name="colour of lamp and camera", u_nm=colour, shared=True, note=f"{100 * doubts.colour_u:.2g} % of each channel"
        ),
        BudgetLine(name="level of the exposure", u_nm=level, shared=True, note=f"{100 * doubts.level_u:.2g} %"),
    ]
    scale_u = recipe.index_scale.u
    if scale_u > 0:
        moved = _signal(recipe, _scaled(recipe.stack, scale_u), thickness_nm, angle_deg) - signal
        u_nm = abs(_reads(moved, slope, signal))
        lines.append(BudgetLine(name="index of the film", u_nm=u_nm, shared=True, note=f"{100 * scale_u:.2g} % of its scale"))
    angle_u = recipe.shots[0].view.angle_deg.u
    if angle_u > 0:
        moved = _signal(recipe, recipe.stack, thickness_nm, angle_deg, turned_deg=angle_u) - signal
        u_nm = abs(_reads(moved, slope, signal))
        lines.append(BudgetLine(name="angle of view", u_nm=u_nm, shared=True, note=f"{angle_u:.2g} degrees"))
    return tuple(line for line in lines if line.u_nm > 0)


def common_u_nm(lines: tuple[BudgetLine, ...]) -> float:
    """Root sum of squares of the shared contributions, in nm."""
    return float(np.sqrt(sum(line.u_nm**2 for line in lines if line.shared)))


def _colour_and_level(doubts: Doubts, signal: FloatArray, slope: FloatArray) -> tuple[float, float]:
    """Channels move each by itself, the levels of the shots each by itself; both add up in squares."""
    colour = [_reads(doubts.colour_u * signal * (np.arange(signal.size) == k), slope, signal) for k in range(signal.size)]
    shot = np.arange(signal.size) // CHANNELS
    level = [_reads(doubts.level_u * signal * (shot == k), slope, signal) for k in range(int(shot.max()) + 1)]
    return float(np.linalg.norm(colour)), float(np.linalg.norm(level))


def _reads(moved: FloatArray, slope: FloatArray, signal: FloatArray) -> float:
    """Thickness in nm that is read instead, each channel weighing by its shot noise."""
    weight = 1.0 / np.maximum(signal, 0.02)
    return float(np.sum(weight * slope * moved) / max(float(np.sum(weight * slope**2)), 1e-12))


def _scaled(stack: Stack, u: float) -> Stack:
    layers = [
        replace(layer, index_scale=layer.index_scale * (1 + u)) if layer.thickness_nm is None else layer for layer in stack.layers
    ]
    return replace(stack, layers=tuple(layers))


def _signal(recipe: Recipe, stack: Stack, thickness_nm: float, angle_deg: float, *, turned_deg: float = 0.0) -> FloatArray:
    """Signal (C,) of all shots by small tables about one thickness; the main shot is seen at ``angle_deg``."""
    span_nm = (max(0.0, thickness_nm - HALF_SPAN_NM), thickness_nm + HALF_SPAN_NM)
    parts = []
    for k, shot in enumerate(recipe.shots):
        at_deg = (angle_deg if k == 0 else shot.view.angle_deg.value) + turned_deg
        view = View(angle_deg=at_deg, aperture=shot.view.aperture, polarisation=shot.view.polarisation)
        small = build_table(
            stack, span_nm, light=shot.light, response=shot.camera.response, blank=shot.camera.blank_surface, view=view
        )
        parts.append(evaluate(small, np.array([thickness_nm]))[0][0])
    return np.concatenate(parts)
