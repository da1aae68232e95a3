"""Spectrum to CIE colour.

Conventions of this room: wavelength (W) is the last axis, in nm, and the caller brings every curve sampled on it; a perfect
mirror under the light has Y = 100; colour components are the last axis (..., 3) and functions broadcast over the leading axes;
hue angles are in degrees, 0 up to 360; sRGB runs from 0 to 1.
"""

from sheenmap.colour.cielab import lab, lch, xyz_from_lab
from sheenmap.colour.difference import delta_e_2000
from sheenmap.colour.names import colour_name
from sheenmap.colour.srgb import adapted, decode_srgb, encode_srgb, srgb
from sheenmap.colour.tristimulus import chromaticity, white_point, xyz

__all__ = [
    "adapted", "chromaticity", "colour_name", "decode_srgb", "delta_e_2000", "encode_srgb", "lab", "lch", "srgb", "white_point",
    "xyz", "xyz_from_lab",
]  # fmt: skip
