"""Makers of random optics for laws: indices, layers, stacks, wavelengths, views."""

from hypothesis import strategies as st

from films import layer, stack
from sheenmap.optics import View

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
