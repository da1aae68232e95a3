"""The fewest wavelengths that carry the integral over light and response.

A film's reflectance is smooth over wavelength, a lamp's spectrum is not. So the lamp and the response are taken in full, at
``FINE_NM``, and the reflectance only at wider nodes, with a polynomial between them: the weights of the nodes are the
integrals of lamp times response times that polynomial's terms (product integration; Davis and Rabinowitz, Methods of
Numerical Integration, section 2.5, from memory).
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.spectra import Spectrum, sample

FINE_NM = 1.0
STEPS_NM = (10.0, 8.0, 5.0, 4.0, 2.0, 1.0)
STENCIL = 6  # nodes of the local polynomial
TOLERANCE = 1e-6  # of the largest signal


@dataclass(frozen=True, kw_only=True, eq=False)
class Quadrature:
    """Nodes (W,) in nm and weights (C, W): ``weights @ reflectance`` is each channel's integral over the light."""

    wavelength_nm: FloatArray
    weights: FloatArray
    step_nm: float


def band_nm(light: Spectrum, response: Spectrum) -> tuple[float, float]:
    """Where both the light and the response are known, in nm."""
    low = max(s.wavelength_nm[0] for s in (light, response) if s.wavelength_nm.size > 1)
    high = min(s.wavelength_nm[-1] for s in (light, response) if s.wavelength_nm.size > 1)
    return float(low), float(high)


def quadrature(light: Spectrum, response: Spectrum, step_nm: float) -> Quadrature:
    """Product integration of light times response (C, W) with nodes ``step_nm`` apart."""
    low, high = band_nm(light, response)
    fine = np.linspace(low, high, max(2, round((high - low) / FINE_NM) + 1))
    weights = sample(light, fine) * np.atleast_2d(sample(response, fine)) * (fine[1] - fine[0])
    weights[:, [0, -1]] *= 0.5
    if step_nm <= FINE_NM:
        return Quadrature(wavelength_nm=fine, weights=weights, step_nm=FINE_NM)
    nodes = np.linspace(low, high, max(STENCIL, round((high - low) / step_nm) + 1))
    return Quadrature(wavelength_nm=nodes, weights=weights @ _lagrange(nodes, fine), step_nm=step_nm)


def converged(
    light: Spectrum, response: Spectrum, signal: Callable[[Quadrature], FloatArray], *, tolerance: float = TOLERANCE
) -> Quadrature:
    """The widest nodes at which ``signal`` stays within ``tolerance`` of its largest value at ``FINE_NM``.

    ``signal`` maps a quadrature to the integrals at a few probes, the thickest film and the steepest angle among them.
    """
    exact = signal(quadrature(light, response, FINE_NM))
    scale = float(np.max(np.abs(exact)))
    for step_nm in STEPS_NM:
        nodes = quadrature(light, response, step_nm)
        if np.max(np.abs(signal(nodes) - exact)) <= tolerance * scale:
            return nodes
    return quadrature(light, response, FINE_NM)


def _lagrange(nodes: FloatArray, fine: FloatArray) -> FloatArray:
    """(F, W) matrix that interpolates from equally spaced nodes by the polynomial through the nearest ``STENCIL``."""
    position = (fine - nodes[0]) / (nodes[1] - nodes[0])
    first = np.clip(np.floor(position).astype(int) - STENCIL // 2 + 1, 0, nodes.size - STENCIL)
    local = position - first
    matrix = np.zeros((fine.size, nodes.size))
    rows = np.arange(fine.size)
    for k in range(STENCIL):
        others = [j for j in range(STENCIL) if j != k]
        matrix[rows, first + k] = np.prod([(local - j) / (k - j) for j in others], axis=0)
    return matrix
