"""Stack to reflectance.

Conventions of this room: fields go as exp(+iwt), so an index is n - ik with k >= 0; layers are listed as the light meets
them; lengths are in nm, wavelength is the last axis (W); angles are in radians inside and in degrees in ``View``.
"""

from sheenmap.optics.fold import Folded, fold
from sheenmap.optics.medium import bruggeman, layer_index
from sheenmap.optics.reflectance import bare_reflectance, reflectance, reflectance_and_slope, transmittance
from sheenmap.optics.stack import Back, Layer, Polarisation, Stack, View

__all__ = [
    "Back", "Folded", "Layer", "Polarisation", "Stack", "View",
    "bare_reflectance", "bruggeman", "fold", "layer_index", "reflectance", "reflectance_and_slope", "transmittance",
]  # fmt: skip
