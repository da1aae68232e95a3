"""One face between two media: direction, admittance, amplitudes.

Fields are tangential ones, so that both polarisations share every formula: with the admittance eta = q for s and N^2 / q for
p, r = (eta_0 - eta_1) / (eta_0 + eta_1) and t = 2 eta_0 / (eta_0 + eta_1). A power ratio is |t|^2 Re eta_1 / Re eta_0.
(H. A. Macleod, Thin-Film Optical Filters, chapter 2, from memory. At normal incidence r_p = r_s here; where total fields
are compared, as the reference library does, r_p turns its sign.)
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray


@dataclass(frozen=True, kw_only=True, eq=False)
class Face:
    """Amplitudes (W,) of a face or of a whole stack: ``down`` as the light comes, ``up`` from the other side."""

    r_down: ComplexArray
    t_down: ComplexArray
    r_up: ComplexArray
    t_up: ComplexArray


def normal_index(index: ComplexArray, sine: float | FloatArray, smallest: float) -> ComplexArray:
    """Normal part q = N cos(theta) = sqrt(N^2 - sine^2) of an index, Im q <= 0.

    Parameters
    ----------
    index : (W,) complex
    sine : float or (W,) float
        N_0 sin(theta_0) of the first medium.
    smallest : float
        Least |q|^2. Exactly at a critical angle q is 0, and a layer's amplitudes are 0 / 0 though the stack's are finite.
    """
    square = index * index - np.square(sine)
    square = np.where(np.abs(square) < smallest, smallest, square)
    q = np.sqrt(square)
    return np.asarray(np.where(q.imag > 0, -q, q))


def admittance(index: ComplexArray, q: ComplexArray, polarisation: Literal["s", "p"]) -> ComplexArray:
    """Tilted admittance (W,) in units of that of free space."""
    return q if polarisation == "s" else index * index / q


def face(above: ComplexArray, below: ComplexArray) -> Face:
    """A smooth face between media of admittance ``above`` and ``below`` (W,)."""
    total = above + below
    r = (above - below) / total
    return Face(r_down=r, t_down=2 * above / total, r_up=-r, t_up=2 * below / total)


def open_face(like: ComplexArray) -> Face:
    """A face between a medium and itself, of the shape of ``like``: all light passes."""
    none, all_of_it = np.zeros_like(like), np.ones_like(like)
    return Face(r_down=none, t_down=all_of_it, r_up=none, t_up=all_of_it)


def roughened(smooth: Face, q_above: ComplexArray, q_below: ComplexArray, rough_nm: float, wavelength_nm: FloatArray) -> Face:
    """The face with an rms roughness: what is left in the specular beam, by scalar theory.

    Notes
    -----
    Reflection falls by exp(-2 (2 pi s Re q / L)^2) with q on the side of the light, transmission by
    exp(-(2 pi s Re(q_above - q_below) / L)^2 / 2). Both are means over Gaussian heights of the phase with which a wave comes and
    goes. Only the phase is taken (Re q): between clear media, fading fields included, a mean of faces that lose nothing gains
    nothing. A face between absorbing media is meant to be smooth against their thickness.

    References
    ----------
    H. E. Bennett and J. O. Porteus, J. Opt. Soc. Am. 51, 123 (1961), for the reflection; the transmission likewise (from memory).
    """
    if rough_nm == 0:
        return smooth
    above, below = (2 * np.pi * rough_nm / wavelength_nm * q.real for q in (q_above, q_below))
    passed = np.exp(-0.5 * (above - below) ** 2)
    return Face(
        r_down=smooth.r_down * np.exp(-2 * above**2),
        t_down=smooth.t_down * passed,
        r_up=smooth.r_up * np.exp(-2 * below**2),
        t_up=smooth.t_up * passed,
    )


def joined(upper: Face, crossing: ComplexArray, lower: Face) -> Face:
    """Two faces with a layer between them that light crosses with the factor ``crossing`` = exp(-i delta) (W,).

    All internal reflections are summed; nothing grows, so that opaque layers do no harm.
    """
    twice = crossing * crossing
    echo = 1 - upper.r_up * twice * lower.r_down
    return Face(
        r_down=upper.r_down + upper.t_down * twice * lower.r_down * upper.t_up / echo,
        t_down=upper.t_down * crossing * lower.t_down / echo,
        r_up=lower.r_up + lower.t_up * twice * upper.r_up * lower.t_down / echo,
        t_up=lower.t_up * crossing * upper.t_up / echo,
    )
