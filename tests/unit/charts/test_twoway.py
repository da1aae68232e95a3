import numpy as np
import pytest

from sheenmap.charts import chart_data, two_way_data
from sheenmap.errors import SettingsError
from sheenmap.recipe.types import Quantity


def test_each_row_over_angle_is_the_chart_of_that_angle(bench):
    two_way = two_way_data(bench(), values=(0.0, 25.0, 50.0), step_nm=10.0)
    for row, angle in zip(two_way.xyz, two_way.values):
        single = chart_data(bench(angle_deg=Quantity(value=float(angle))), step_nm=10.0)
        assert row == pytest.approx(single.xyz, rel=1e-9)


def test_a_denser_film_turns_its_colours_sooner(oxide):
    two_way = two_way_data(oxide, against="index", values=(0.9, 1.0, 1.1), step_nm=2.0)
    darkest = two_way.thickness_nm[np.argmin(two_way.xyz[:, :100, 1], axis=1)]  # the first dark ring, near 95 nm
    assert darkest[0] > darkest[1] > darkest[2]


@pytest.mark.parametrize(
    "against, values",
    [
        ("angle", (0.0, 90.0)),
        ("angle", (10.0,)),
        ("angle", (0.0, 10.0, 15.0)),
        ("angle", (20.0, 10.0)),
        ("angle", (-5.0, 5.0)),
        ("index", (0.0, 1.0)),
    ],
)
def test_values_that_cannot_be_are_refused(oxide, against, values):
    with pytest.raises(SettingsError, match="values"):
        two_way_data(oxide, against=against, values=values)
