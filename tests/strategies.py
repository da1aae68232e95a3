"""Makers of random set-ups for laws: indices, layers, stacks, wavelengths, views, lamps, encodings, sensors."""

import numpy as np
from hypothesis import strategies as st

from films import layer, stack
from sheenmap.camera import Encoding
from sheenmap.optics import View
from sheenmap.spectra import Spectrum
from simulated import Sensor

wavelengths_nm = st.floats(380, 780)
thicknesses_nm = st.one_of(st.just(0.0), st.floats(0, 2000))
angles_deg = st.one_of(st.just(0.0), st.floats(0, 89))
polarisations = st.sampled_from(["s", "p"])

clear = st.floats(1.0, 4.0)
narrow = st.just(0.0)
apertures = st.one_of(narrow, narrow, narrow, st.floats(0, 0.3))  # the average over a cone takes its time


@st.composite
def indices(draw, *, lossless=False):
    """n - ik of films and substrates: glasses, semiconductors and metals."""
    n = draw(clear)
    if lossless or draw(st.booleans()):
        return complex(n)
    return complex(draw(st.floats(0.05, 6.0)), -draw(st.one_of(st.floats(0, 0.1), st.floats(0, 8.0))))


@st.composite
def layers(draw, *, lossless=False, thickest_nm=400.0):
    return layer(draw(indices(lossless=lossless)), draw(st.floats(0, thickest_nm)))


@st.composite
def stacks(draw, *, lossless=False, searched=True, back=False, most=4):
    """Stacks of up to ``most`` known layers; the searched one stands anywhere among them."""
    known = draw(st.lists(layers(lossless=lossless), max_size=most))
    if searched:
        known.insert(draw(st.integers(0, len(known))), layer(draw(indices(lossless=lossless))))
    on = complex(draw(clear), -draw(st.sampled_from([0.0, 0.0, 1e-6, 1e-5]))) if back else draw(indices(lossless=lossless))
    return stack(draw(st.sampled_from([1.0, 1.0, 1.33, 1.52])), *known, on=on, back=draw(clear) if back else None)


def views(apertures=narrow):
    return st.builds(View, angle_deg=angles_deg, aperture=apertures, polarisation=st.sampled_from(["none", "s", "p"]))


@st.composite
def lamps(draw):
    """A warm or cool slope with a broad hump and a few sharp lines, sampled at 1 to 10 nm from about 380 to 780 nm."""
    wavelength_nm = np.arange(380.0, 781.0, draw(st.sampled_from([1.0, 2.0, 5.0, 10.0])))
    power = 0.1 + draw(st.floats(0, 2)) * (wavelength_nm - 380) / 400
    power = power + draw(st.floats(0, 2)) * np.exp(-(((wavelength_nm - draw(wavelengths_nm)) / 60) ** 2))
    for line_nm in draw(st.lists(wavelengths_nm, max_size=4)):
        power[np.abs(wavelength_nm - line_nm).argmin()] += draw(st.floats(0, 20))
    return Spectrum(wavelength_nm=wavelength_nm, values=power)


@st.composite
def encodings(draw, full_scale=255.0):
    """Every kind that a recipe can ask for; a curve rises through a few points from no light to full scale."""
    kind = draw(st.sampled_from(["linear", "srgb", "power", "curve"]))
    if kind == "power":
        return Encoding(kind="power", gamma=draw(st.floats(0.2, 5)))
    if kind == "curve":
        parts = st.lists(st.floats(0.1, 1), min_size=4, max_size=4)
        code, linear = (np.concatenate([[0.0], np.cumsum(steps)]) / sum(steps) for steps in (draw(parts), draw(parts)))
        code[-1] = linear[-1] = 1.0
        return Encoding(kind="curve", code=code * full_scale, linear=linear)
    return Encoding(kind=kind)


def sensors():
    """From a small noisy sensor to a large quiet one, 8 or 16 bits, linear or sRGB."""
    return st.builds(
        Sensor,
        full_well=st.floats(3_000, 60_000),
        read=st.floats(1, 15),
        bits=st.sampled_from([8, 16]),
        encoding=st.sampled_from(["linear", "srgb"]),
        level=st.floats(0.5, 0.9),
    )
