import numpy as np
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from sheenmap.colour import adapted, decode_srgb, delta_e_2000, encode_srgb, lab, lch, srgb, white_point, xyz, xyz_from_lab

WAVELENGTH_NM = np.arange(380.0, 781.0, 10.0)
OBSERVER = np.stack([np.exp(-(((WAVELENGTH_NM - centre) / 40) ** 2)) for centre in (600.0, 555.0, 450.0)])
curves = arrays(float, WAVELENGTH_NM.size, elements=st.floats(0, 1))
lamps = arrays(float, WAVELENGTH_NM.size, elements=st.floats(0.01, 10))
colours = st.tuples(st.floats(0, 100), st.floats(-120, 120), st.floats(-120, 120)).map(np.array)
whites = st.tuples(st.floats(60, 130), st.just(100.0), st.floats(20, 150)).map(np.array)


@given(lamp=lamps)
def test_the_white_maps_to_lab_100_0_0(lamp):
    white = white_point(WAVELENGTH_NM, lamp, OBSERVER)
    assert np.allclose(lab(white, white), [100, 0, 0], atol=1e-10)


@given(one=curves, other=curves, lamp=lamps, share=st.floats(0, 1))
def test_xyz_is_linear_in_reflectance(one, other, lamp, share):
    def seen(curve):
        return xyz(curve, WAVELENGTH_NM, lamp, OBSERVER)

    mixed = share * one + (1 - share) * other
    assert np.allclose(seen(mixed), share * seen(one) + (1 - share) * seen(other), rtol=1e-12, atol=1e-10)


@given(colour=colours, white=whites)
def test_lab_and_back_is_the_same_colour(colour, white):
    assert np.allclose(lab(xyz_from_lab(colour, white), white), colour, atol=1e-9)


@given(colour=colours)
def test_lch_keeps_the_chroma_plane(colour):
    lightness, chroma, hue_deg = lch(colour)
    assert 0 <= hue_deg < 360
    back = [lightness, chroma * np.cos(np.radians(hue_deg)), chroma * np.sin(np.radians(hue_deg))]
    assert np.allclose(back, colour, atol=1e-9)


@given(one=colours, other=colours)
def test_difference_is_symmetric_and_never_negative(one, other):
    there, back = delta_e_2000(one, other), delta_e_2000(other, one)
    assert there >= 0
    assert np.allclose(there, back, rtol=1e-9, atol=1e-9)


@given(colour=colours)
def test_equal_colours_do_not_differ(colour):
    assert delta_e_2000(colour, colour) == 0


@given(linear=st.floats(0, 1))
def test_srgb_decodes_what_it_encodes(linear):
    # the printed break points 0.0031308 and 0.04045 miss each other by 6e-9 in linear light
    assert abs(decode_srgb(encode_srgb(np.array(linear))) - linear) < 1e-8


@given(one=st.floats(0, 1), other=st.floats(0, 1))
def test_srgb_encoding_keeps_the_order(one, other):
    low, high = sorted((one, other))
    assert encode_srgb(np.array(low)) <= encode_srgb(np.array(high)) + 1e-7  # the standard's own step at the break


@given(colour=colours, white=whites, other=whites)
def test_adaptation_there_and_back_changes_nothing(colour, white, other):
    start = xyz_from_lab(colour, white)
    assert np.allclose(adapted(adapted(start, white, other), other, white), start, rtol=1e-9, atol=1e-8)


@given(grey=st.floats(0, 100), white=whites)
def test_a_grey_stays_grey_on_the_screen(grey, white):
    rgb, in_gamut = srgb(grey / 100 * white, white)
    assert in_gamut
    assert np.ptp(rgb) < 2e-4  # the printed matrix misses its own white by that
