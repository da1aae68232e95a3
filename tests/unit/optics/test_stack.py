import pytest

from films import layer, stack
from sheenmap.optics import Back, View
from sheenmap.spectra import constant


@pytest.mark.parametrize("given", [{"angle_deg": 90.0}, {"angle_deg": -1.0}, {"aperture": 1.1}, {"aperture": float("nan")}])
def test_impossible_view_is_refused(given):
    with pytest.raises(ValueError, match=r"angle_deg .* \(0 up to, not including, 90\), aperture .* \(0 to 1\)"):
        View(**given)


@pytest.mark.parametrize("thickness_nm", [-1.0, float("nan"), float("inf")])
def test_impossible_thickness_is_refused(thickness_nm):
    with pytest.raises(ValueError, match=r"thickness_nm is .*; zero or more"):
        layer(1.5, thickness_nm)


@pytest.mark.parametrize("given", [{"index_scale": 0.0}, {"rough_nm": -0.1}, {"inclusion_volume": 1.01}])
def test_impossible_layer_is_refused(given):
    with pytest.raises(ValueError, match=next(iter(given))):
        layer(1.5, 10.0, **given)


def test_back_without_depth_is_refused():
    with pytest.raises(ValueError, match="thickness_mm is 0"):
        Back(medium=constant(1.0), thickness_mm=0.0)


def test_two_searched_layers_are_refused():
    with pytest.raises(ValueError, match="more than one layer is searched"):
        stack(1, layer(1.5), layer(2.0), on=4)


def test_negative_roughness_of_the_substrate_is_refused():
    with pytest.raises(ValueError, match="substrate_rough_nm"):
        stack(1, on=4, substrate_rough_nm=-1.0)


def test_searched_layer_is_found_where_it_stands():
    assert stack(1, layer(1.5, 10.0), layer(2.0), on=4).searched == 1
    assert stack(1, layer(1.5, 10.0), on=4).searched is None
