"""The index of a layer: its material, its density, and what is mixed into it."""

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray
from sheenmap.optics.stack import Layer
from sheenmap.spectra import Spectrum, sample


def index_of(material: Spectrum, wavelength_nm: FloatArray) -> ComplexArray:
    """Index n - ik (W,) of a material between its samples, by a monotone cubic."""
    return np.asarray(sample(material, wavelength_nm, interpolation="monotone cubic"), dtype=complex)


def layer_index(layer: Layer, wavelength_nm: FloatArray) -> ComplexArray:
    """Index n - ik (W,) of a layer, with its inclusion mixed in and then its index scale applied to n - 1 and to k."""
    index = index_of(layer.index, wavelength_nm)
    if layer.inclusion is not None and layer.inclusion_volume > 0:
        index = bruggeman(index, index_of(layer.inclusion, wavelength_nm), layer.inclusion_volume)
    return np.asarray(1 + layer.index_scale * (index - 1))


def bruggeman(host: ComplexArray, inclusion: ComplexArray, volume: float) -> ComplexArray:
    """Index of a mixture with a share ``volume`` of inclusion.

    Notes
    -----
    sum f_i (e_i - e) / (e_i + 2 e) = 0 is quadratic in the permittivity e of the mixture; the root that absorbs or is real
    and positive is taken.

    References
    ----------
    D. A. G. Bruggeman, Annalen der Physik 416, 636 (1935) (from memory).
    """
    first, second = host**2, inclusion**2
    b = (3 * (1 - volume) - 1) * first + (3 * volume - 1) * second
    root = np.sqrt(b * b + 8 * first * second)
    candidates = np.stack([b + root, b - root]) / 4
    index = np.sqrt(candidates)
    index = np.where(index.real < 0, -index, index)
    fits = (index.imag <= 1e-12) & (index.real > 0)
    better = np.where(fits[0] & fits[1], np.argmin(np.abs(candidates - (1 - volume) * first - volume * second), axis=0), fits[1])
    return np.asarray(np.where(better == 1, index[1], index[0]))
