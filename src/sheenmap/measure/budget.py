"""What the whole map shares: how far each doubt about the set-up would move the thickness.

Each input is moved by its standard uncertainty, and the thickness that the moved signal would read is the contribution
(JCGM 100, 5.1.3, numerically). These parts are common to all pixels: averaging over a site does not shrink them.
"""

from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.inversion import Doubts
from sheenmap.lookup import Table, build_table, evaluate
from sheenmap.measure.result import BudgetLine
from sheenmap.optics import Stack, View
from sheenmap.recipe import Recipe

CHANNELS = ("red", "green", "blue")
HALF_SPAN_NM = 2.0  # of the small tables that are built about the map's middle


def budget(
    recipe: Recipe, table: Table, doubts: Doubts, *, thickness_nm: float, angle_deg: float, sigma_nm: float
) -> tuple[BudgetLine, ...]:
    """Contributions to the uncertainty at ``thickness_nm`` and ``angle_deg``; ``sigma_nm`` is the pixels' own at the middle."""
    shifts = {name: abs(shift) for name, shift in _shifts(recipe, table, doubts, thickness_nm, angle_deg)}
    colour = np.sqrt(sum(shifts.pop(f"colour of {channel}") ** 2 for channel in CHANNELS))
    lines = [BudgetLine(name="noise and shading of one pixel", u_nm=sigma_nm, shared=False, note="shrinks over a site")]
    lines.append(
        BudgetLine(
            name="colour of lamp and camera",
            u_nm=float(colour),
            shared=True,
            note=f"{100 * doubts.colour_u:.2g} % of each channel",
        )
    )
    lines += [BudgetLine(name=name, u_nm=float(shift), shared=True) for name, shift in shifts.items() if shift > 0]
    return tuple(lines)


def common_u_nm(lines: tuple[BudgetLine, ...]) -> float:
    """Root sum of squares of the shared contributions, in nm."""
    return float(np.sqrt(sum(line.u_nm**2 for line in lines if line.shared)))


def _shifts(recipe: Recipe, table: Table, doubts: Doubts, thickness_nm: float, angle_deg: float) -> Iterator[tuple[str, float]]:
    at = np.array([thickness_nm])
    signal, slope = (part[0] for part in evaluate(table, at, np.array([angle_deg])))
    for k, channel in enumerate(CHANNELS):
        moved = np.zeros(3)
        moved[k] = doubts.colour_u * signal[k]
        yield f"colour of {channel}", _reads(moved, slope, signal)
    yield "level of the exposure", _reads(doubts.level_u * signal, slope, signal)
    shot = recipe.shots[0]
    if recipe.index_scale.u > 0:
        scaled = _scaled(recipe.stack, recipe.index_scale.u)
        yield "index of the film", _reads(_signal(recipe, scaled, thickness_nm, angle_deg) - signal, slope, signal)
    if shot.view.angle_deg.u > 0:
        turned = angle_deg + shot.view.angle_deg.u
        yield "angle of view", _reads(_signal(recipe, recipe.stack, thickness_nm, turned) - signal, slope, signal)


def _reads(moved: FloatArray, slope: FloatArray, signal: FloatArray) -> float:
    """Thickness in nm that is read instead, each channel weighing by its shot noise."""
    weight = 1.0 / np.maximum(signal, 0.02)
    return float(np.sum(weight * slope * moved) / max(float(np.sum(weight * slope**2)), 1e-12))


def _scaled(stack: Stack, u: float) -> Stack:
    layers = [
        replace(layer, index_scale=layer.index_scale * (1 + u)) if layer.thickness_nm is None else layer for layer in stack.layers
    ]
    return replace(stack, layers=tuple(layers))


def _signal(recipe: Recipe, stack: Stack, thickness_nm: float, angle_deg: float) -> FloatArray:
    shot = recipe.shots[0]
    view = View(angle_deg=angle_deg, aperture=shot.view.aperture, polarisation=shot.view.polarisation)
    small = build_table(
        stack,
        (max(0.0, thickness_nm - HALF_SPAN_NM), thickness_nm + HALF_SPAN_NM),
        light=shot.light,
        response=shot.camera.response,
        blank=shot.camera.blank_surface,
        view=view,
    )
    return np.asarray(evaluate(small, np.array([thickness_nm]))[0][0])
