import pytest

from sheenmap.charts.orders import order_step_nm, orders_between
from sheenmap.optics import Layer, Stack, View
from sheenmap.spectra import constant

AIR = constant(1.0)


def film(index):
    return Stack(medium=AIR, layers=(Layer(index=constant(index), thickness_nm=None),), substrate=constant(3.5))


def test_an_order_is_half_a_wave_of_optical_thickness():
    assert order_step_nm(film(1.46), View()) == pytest.approx(550 / (2 * 1.46))


def test_under_an_angle_an_order_takes_more_film():
    # n cos(theta) = sqrt(1.5^2 - sin(60 deg)^2) = sqrt(1.5)
    assert order_step_nm(film(1.5), View(angle_deg=60.0)) == pytest.approx(550 / (2 * 1.5**0.5))


def test_beyond_total_reflection_there_is_one_order():
    dense = Stack(medium=constant(1.5), layers=(Layer(index=constant(1.2), thickness_nm=None),), substrate=AIR)
    step_nm = order_step_nm(dense, View(angle_deg=80.0))
    assert [order.number for order in orders_between(step_nm, 0, 500)] == [1]


def test_orders_are_cut_to_the_chart():
    orders = orders_between(200.0, 150.0, 500.0)
    assert [(order.number, order.low_nm, order.high_nm) for order in orders] == [(1, 150, 200), (2, 200, 400), (3, 400, 500)]


def test_a_chart_that_ends_on_a_whole_wave_opens_no_further_order():
    assert [order.number for order in orders_between(200.0, 0.0, 400.0)] == [1, 2]


def test_a_stack_without_a_searched_layer_is_refused():
    with pytest.raises(ValueError, match="searched"):
        order_step_nm(Stack(medium=AIR, layers=(), substrate=AIR), View())
