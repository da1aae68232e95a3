"""Variance components of published studies."""

import csv
from pathlib import Path

import numpy as np
import pytest

from sheenmap.uniformity import nested_components
from sheenmap.uniformity.components import Source, components_of, pooled_sd

HERE = Path(__file__).parent


def rows(name):
    text = (HERE / name).read_text(encoding="utf-8")
    return list(csv.DictReader(line for line in text.splitlines() if not line.startswith("#")))


PUBLISHED = {(row["data_set"], row["quantity"]): float(row["value"]) for row in rows("variance_components.csv")}
NAMES = ("lot", "wafer within lot", "site within wafer")


def oxide(*groups):
    data = {
        key: np.array([int(row[key]) for row in rows("nlme_oxide.csv")])
        for key in ("source", "lot", "wafer", "thickness_angstrom")
    }
    names = {"source": "source", "lot": NAMES[0], "wafer": NAMES[1]}
    return nested_components(data["thickness_angstrom"], [(names[key], data[key]) for key in groups], innermost=NAMES[2])


@pytest.mark.parametrize("index", range(3), ids=NAMES)
def test_oxide_analysis_of_variance(index):
    source = oxide("lot", "wafer").sources[index]
    assert source.degrees == PUBLISHED["oxide", f"degrees of freedom, {NAMES[index]}"]
    assert source.sum_of_squares == pytest.approx(PUBLISHED["oxide", f"sum of squares, {NAMES[index]}"], abs=1e-6)
    assert source.mean_square == pytest.approx(PUBLISHED["oxide", f"mean square, {NAMES[index]}"], abs=1e-6)


@pytest.mark.parametrize("index", range(3), ids=NAMES)
def test_oxide_components(index):
    """Balanced data, so restricted maximum likelihood (Pinheiro and Bates: 11.40, 5.99, 3.55) equals this."""
    component = oxide("lot", "wafer").components[index]
    suffix = NAMES[index] + (" (residual)" if index == 2 else "") + ", mean only"
    assert component.variance == pytest.approx(PUBLISHED["oxide", f"variance component, {suffix}"], abs=1e-5)
    assert component.sd == pytest.approx(PUBLISHED["oxide", f"standard deviation, {suffix}"], abs=1e-5)
    assert component.low < component.variance < component.high


def test_oxide_lots_within_their_source():
    """The model of Littell et al. 1996: lots vary about the mean of their source, 119.892 of 129.907."""
    assert oxide("source", "lot", "wafer").components[1].variance == pytest.approx(
        PUBLISHED["oxide", "variance component, lot, source fixed"], abs=1e-5
    )


def furnace():
    names = ("run", "furnace location within run", "within")
    sources = [
        Source(
            name=name, sum_of_squares=PUBLISHED["furnace", f"sum of squares, {name}"],
            degrees=int(PUBLISHED["furnace", f"degrees of freedom, {name}"]),
            mean_square=PUBLISHED["furnace", f"mean square, {name}"],
        )
        for name in names
    ]  # fmt: skip
    # 21 runs, 4 locations, 2 wafers: NIST/SEMATECH e-Handbook 3.5.1.4
    return components_of(0.0, sources, [[8, 2, 1], [0, 2, 1], [0, 0, 1]]).components


@pytest.mark.parametrize("index", range(3))
def test_furnace_study(index):
    component = furnace()[index]
    assert component.variance == pytest.approx(PUBLISHED["furnace", f"variance component, {component.name}"], abs=2e-3)
    assert component.sd == pytest.approx(PUBLISHED["furnace", f"square root, {component.name}"], abs=1e-3)
    assert 100 * component.share == pytest.approx(PUBLISHED["furnace", f"percent of total, {component.name}"], abs=6e-3)


def test_repeatability_pooled_over_five_wafers():
    """NIST/SEMATECH e-Handbook 2.4.4.4: 0.10290 is the root of 3.17635 / 300."""
    wafers = (138, 139, 140, 141, 142)
    squares = [PUBLISHED["repeatability", f"sum of squares, wafer {wafer}"] for wafer in wafers]
    degrees = [PUBLISHED["repeatability", f"degrees of freedom, wafer {wafer}"] for wafer in wafers]
    assert pooled_sd(squares, degrees) == pytest.approx(PUBLISHED["repeatability", "pooled standard deviation"], abs=5e-6)
