"""Signal against thickness (and angle), relative to the blank: the recipe's forward model, tabulated."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from sheenmap.arrays import FloatArray
from sheenmap.lookup.quadrature import FINE_NM, Quadrature, converged, quadrature
from sheenmap.optics import Stack, View, bare_reflectance, reflectance, reflectance_and_slope
from sheenmap.spectra import Spectrum, sample

STEP_NM = 1.0  # cubic between entries errs by (4 pi n step / wavelength)^4 / 384 of the fringe: 6e-7 at n = 4, 400 nm
MARGIN_NM = 25.0  # the table goes on beyond the search range, so that a fit on its end can be told from a fit inside
NODE_DEG, FINE_DEG = 0.5, 0.05  # computed, and interpolated, steps of an angle axis
PROBES = 25


@dataclass(frozen=True, kw_only=True, eq=False)
class Table:
    """Signal relative to the blank's against thickness and angle.

    Parameters
    ----------
    thickness_nm : (T,) float
        Equally spaced; reaches beyond ``search_nm`` where that does not end at zero.
    angle_deg : (A,) float
        Equally spaced; one entry when the angle is the same everywhere.
    signal, slope : (A, T, C) float
        Signal of each channel over the blank's at the same angle, and its derivative per nm.
    search_nm : (low, high)
        What the recipe asks for.
    wavelength_step_nm : float
        Distance of the nodes that convergence asked for.
    """

    thickness_nm: FloatArray
    angle_deg: FloatArray
    signal: FloatArray
    slope: FloatArray
    search_nm: tuple[float, float]
    wavelength_step_nm: float

    @property
    def step_nm(self) -> float:
        """Distance of the entries in nm."""
        return float(self.thickness_nm[1] - self.thickness_nm[0])


def build_table(
    stack: Stack,
    search_nm: tuple[float, float],
    *,
    light: Spectrum,
    response: Spectrum,
    blank: Stack | Spectrum | None,
    view: View,
    angle_range_deg: tuple[float, float] | None = None,
) -> Table:
    """The table of a set-up.

    Parameters
    ----------
    blank : Stack, Spectrum or None
        Surface of the blank: a stack without a searched layer, or its reflectance. None: a perfect mirror.
    view : View
        Its angle is replaced by the angle axis when ``angle_range_deg`` (low, high) is given.
    """
    angles_deg = _angle_nodes(view, angle_range_deg)
    thickness_nm = _thickness_axis(search_nm)
    probes_nm = np.linspace(search_nm[0], search_nm[1], PROBES)

    def probe(nodes: Quadrature) -> FloatArray:
        seen = reflectance(stack, probes_nm, nodes.wavelength_nm, _turned(view, float(angles_deg[-1])))
        return np.asarray(seen @ nodes.weights.T)

    nodes = converged(light, response, probe)
    pairs = [_relative(stack, thickness_nm, nodes, light, response, blank, _turned(view, float(a))) for a in angles_deg]
    signal, slope = (np.stack(parts) for parts in zip(*pairs))
    fine_deg = _refined(angles_deg)
    if angles_deg.size > 1:
        signal, slope = CubicSpline(angles_deg, signal)(fine_deg), CubicSpline(angles_deg, slope)(fine_deg)
    return Table(
        thickness_nm=thickness_nm, angle_deg=fine_deg, signal=signal, slope=slope,
        search_nm=search_nm, wavelength_step_nm=nodes.step_nm,
    )  # fmt: skip


def evaluate(
    table: Table, thickness_nm: NDArray[np.floating], angle_deg: NDArray[np.floating] | None = None
) -> tuple[FloatArray, FloatArray]:
    """Signal and slope (N, C) at thicknesses (N,), and angles (N,) where the table has an angle axis.

    Cubic in thickness (through values and slopes), linear in angle; thickness is held to the table's ends.
    """
    if table.angle_deg.size == 1 or angle_deg is None:
        return _hermite(table, thickness_nm, 0)
    position = np.clip((angle_deg - table.angle_deg[0]) / (table.angle_deg[1] - table.angle_deg[0]), 0, table.angle_deg.size - 1)
    lower = np.minimum(position.astype(np.intp), table.angle_deg.size - 2)
    share = (position - lower)[:, None]
    (below, slope_below), (above, slope_above) = (_hermite(table, thickness_nm, lower + k) for k in (0, 1))
    return below + share * (above - below), slope_below + share * (slope_above - slope_below)


def _hermite(table: Table, thickness_nm: NDArray[np.floating], angle: NDArray[np.intp] | int) -> tuple[FloatArray, FloatArray]:
    step = table.step_nm
    position = np.clip((thickness_nm - table.thickness_nm[0]) / step, 0, table.thickness_nm.size - 1)
    lower = np.minimum(position.astype(np.intp), table.thickness_nm.size - 2)
    u = (position - lower)[:, None]
    channels = table.signal.shape[-1]
    flat, flat_slope = table.signal.reshape(-1, channels), table.slope.reshape(-1, channels)
    at = lower + angle * table.thickness_nm.size
    y0, y1 = flat.take(at, axis=0), flat.take(at + 1, axis=0)
    m0, m1 = step * flat_slope.take(at, axis=0), step * flat_slope.take(at + 1, axis=0)
    rise = y1 - y0
    square, cube = 3 * rise - 2 * m0 - m1, m0 + m1 - 2 * rise
    return y0 + u * (m0 + u * (square + u * cube)), (m0 + u * (2 * square + 3 * u * cube)) / step


def _thickness_axis(search_nm: tuple[float, float]) -> FloatArray:
    low = max(0.0, search_nm[0] - MARGIN_NM)
    high = search_nm[1] + MARGIN_NM
    return np.linspace(low, high, int(np.ceil((high - low) / STEP_NM)) + 1)


def _angle_nodes(view: View, angle_range_deg: tuple[float, float] | None) -> FloatArray:
    if angle_range_deg is None:
        return np.array([view.angle_deg])
    low, high = angle_range_deg
    high = max(high, low + 3 * FINE_DEG)
    return np.linspace(low, high, max(4, int(np.ceil((high - low) / NODE_DEG)) + 1))


def _refined(angles_deg: FloatArray) -> FloatArray:
    if angles_deg.size == 1:
        return angles_deg
    return np.linspace(angles_deg[0], angles_deg[-1], int(np.ceil((angles_deg[-1] - angles_deg[0]) / FINE_DEG)) + 1)


def _turned(view: View, angle_deg: float) -> View:
    return View(angle_deg=angle_deg, aperture=view.aperture, polarisation=view.polarisation)


def _relative(
    stack: Stack, thickness_nm: FloatArray, nodes: Quadrature, light: Spectrum, response: Spectrum,
    blank: Stack | Spectrum | None, view: View,
) -> tuple[FloatArray, FloatArray]:  # fmt: skip
    seen, slope = reflectance_and_slope(stack, thickness_nm, nodes.wavelength_nm, view)
    reference = blank_signal(blank, light, response, view)
    return seen @ nodes.weights.T / reference, slope @ nodes.weights.T / reference


def blank_signal(blank: Stack | Spectrum | None, light: Spectrum, response: Spectrum, view: View) -> FloatArray:
    """Integral (C,) of light, response and the blank's reflectance; of a perfect mirror when ``blank`` is None."""
    fine = quadrature(light, response, FINE_NM)
    if blank is None:
        return np.asarray(fine.weights.sum(axis=-1))
    at_nm = fine.wavelength_nm
    mirror = bare_reflectance(blank, at_nm, view) if isinstance(blank, Stack) else sample(blank, at_nm)
    return np.asarray(fine.weights @ mirror)
