import numpy as np
import pytest

from sheenmap.flags import AMBIGUOUS
from sheenmap.uniformity import statistics_by_die
from sheenmap.wafer import Region, die_grid

DIES = die_grid(Region(inside=np.ones((40, 40), bool), origin_px=(19.5, 19.5), mm_per_px=1.0), 10.0, 10.0, offset_mm=(5.0, 5.0))


def test_each_die_has_its_own_mean_and_spread():
    rng = np.random.default_rng(0)
    thickness = 500.0 + DIES.index + rng.normal(0, 0.3, (40, 40))
    found = statistics_by_die(thickness, np.full((40, 40), 0.3), np.zeros((40, 40), np.uint16), DIES)
    assert (found.pixels == 100).all() and (found.claimed == 100).all() and found.pixels.size == 16
    assert found.u_mean_nm == pytest.approx(0.03)
    assert (np.abs(found.mean_nm - 500 - np.arange(16)) < 4 * found.u_mean_nm).all()
    assert found.sd_nm == pytest.approx(0.3, rel=0.3)  # 100 values: 7 %, four of them


def test_die_without_claims_is_not_a_number():
    flags = np.where(DIES.index == 3, AMBIGUOUS.mask, 0).astype(np.uint16)
    found = statistics_by_die(np.full((40, 40), 500.0), np.ones((40, 40)), flags, DIES)
    assert found.claimed[3] == 0 and np.isnan(found.mean_nm[3]) and np.isnan(found.u_mean_nm[3]) and found.mean_nm[2] == 500
