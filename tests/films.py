"""Short ways to write stacks, and the reference library tmm asked about the same stack (it takes n + ik: conjugate)."""

import numpy as np
import tmm

from sheenmap.optics import Back, Layer, Stack
from sheenmap.spectra import constant


def layer(index, thickness_nm=None, **more):
    return Layer(index=constant(complex(index)), thickness_nm=thickness_nm, **more)


def stack(medium, *layers, on, back=None, back_mm=1.0, **more):
    """Indices n - ik outside; ``layers`` are Layer records; ``back`` is the index behind the substrate."""
    behind = None if back is None else Back(medium=constant(complex(back)), thickness_mm=back_mm)
    return Stack(medium=constant(complex(medium)), layers=layers, substrate=constant(complex(on)), back=behind, **more)


def index(material):
    return complex(material.values[0])


def with_thickness(given, thickness_nm):
    """The same stack with its searched layer's thickness known."""
    known = tuple(
        Layer(
            index=one.index, name=one.name, index_scale=one.index_scale, rough_nm=one.rough_nm, inclusion=one.inclusion,
            inclusion_volume=one.inclusion_volume, thickness_nm=thickness_nm if one.thickness_nm is None else one.thickness_nm,
        )
        for one in given.layers
    )  # fmt: skip
    return Stack(
        medium=given.medium, layers=known, substrate=given.substrate, back=given.back, substrate_rough_nm=given.substrate_rough_nm
    )


def by_tmm(given, thickness_nm, wavelength_nm, angle_deg, polarisation):
    """R and T of a stack of constant indices by the reference library."""
    layers = with_thickness(given, thickness_nm).layers
    indices = [index(given.medium), *(index(one.index) for one in layers), index(given.substrate)]
    depths_nm = [np.inf, *(one.thickness_nm for one in layers), np.inf]
    coherent = ["i", *"c" * len(layers), "i"]
    angle_rad = np.deg2rad(angle_deg)
    if given.back is None:
        seen = tmm.coh_tmm(polarisation, np.conj(indices), depths_nm, angle_rad, wavelength_nm)
    else:
        indices.append(index(given.back.medium))
        depths_nm[-1:] = [given.back.thickness_mm * 1e6, np.inf]
        seen = tmm.inc_tmm(polarisation, np.conj(indices), depths_nm, [*coherent, "i"], angle_rad, wavelength_nm)
    return float(np.real(seen["R"])), float(np.real(seen["T"]))
