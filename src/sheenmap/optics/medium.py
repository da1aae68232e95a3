"""The index of a layer: its material, its density, and what is mixed into it."""

from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray
from sheenmap.optics.stack import Layer, Stack
from sheenmap.spectra import Spectrum, sample


@dataclass(frozen=True, kw_only=True, eq=False)
class Media:
    """A stack's indices at its wavelengths, all (W,): medium, layers and substrate in the light's order; then the back's."""

    wavelength_nm: FloatArray
    indices: tuple[ComplexArray, ...]
    behind: ComplexArray | None


def media_of(stack: Stack, wavelength_nm: FloatArray) -> Media:
    """Sample every index of a stack once, for all angles to share."""
    layers = (layer_index(layer, wavelength_nm) for layer in stack.layers)
    return Media(
        wavelength_nm=wavelength_nm,
        indices=(index_of(stack.medium, wavelength_nm), *layers, index_of(stack.substrate, wavelength_nm)),
        behind=None if stack.back is None else index_of(stack.back.medium, wavelength_nm),
    )


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
    """Index n - ik (W,) of a mixture with a share ``volume``, 0 to 1, of inclusion; n and k are zero or more.

    Notes
    -----
    sum f_i (e_i - e) / (e_i + 2 e) = 0 is quadratic in the permittivity e of the mixture, and both roots may absorb. The
    physical one follows e_host without a jump as the inclusion is put in. With z = e_inclusion / e_host it is
    e / e_host = (b + sqrt((3 f - 1)^2 z + m) sqrt(z + (2 - 3 f)^2 / m)) / 4, where b = 2 - 3 f + (3 f - 1) z and
    m = p + 4 + 6 sqrt(2 f (1 - f)), p = (2 - 3 f)(3 f - 1): the discriminant has its two zeros on the negative real z, which
    passive media never meet, so that principal roots stay on one sheet.

    References
    ----------
    D. A. G. Bruggeman, Annalen der Physik 416, 636 (1935) (from memory); the factors of the discriminant are worked out here.
    """
    z = (inclusion / host) ** 2
    a, c = 3 * volume - 1, 2 - 3 * volume
    m = a * c + 4 + 6 * np.sqrt(2 * volume * (1 - volume))
    ratio = (c + a * z + np.sqrt(a * a * z + m) * np.sqrt(z + c * c / m)) / 4
    index = host * np.sqrt(ratio)
    return np.asarray(index.real + 1j * np.minimum(index.imag, 0.0))
