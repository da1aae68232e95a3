import csv
import io
import json

import numpy as np
import pytest

from sheenmap.charts import table_csv, table_json


def test_csv_has_the_agreed_columns_and_a_row_for_each_thickness(chart):
    text = table_csv(chart)
    assert text.splitlines()[0] == "thickness_nm,X,Y,Z,L,a,b,srgb_r,srgb_g,srgb_b,red,green,blue"
    rows = list(csv.DictReader(io.StringIO(text)))
    assert [float(row["thickness_nm"]) for row in rows] == chart.thickness_nm.tolist()


def test_csv_numbers_are_the_charts(chart):
    table = np.loadtxt(io.StringIO(table_csv(chart)), delimiter=",", skiprows=1)
    expected = np.column_stack([chart.thickness_nm, chart.xyz, chart.lab, chart.srgb, chart.camera])
    assert table == pytest.approx(expected, rel=1e-9, abs=1e-9)  # ten digits
    assert table[:, 7:10].min() >= 0 and table[:, 7:10].max() <= 1


def test_json_holds_what_csv_has_no_room_for(chart):
    record = json.loads(table_json(chart))
    assert record["light"] == "LED-B3"
    assert record["cautions"]
    row = record["rows"][75]
    assert row["thickness_nm"] == 150
    assert row["xy"] == pytest.approx(chart.xy[75].tolist(), rel=1e-9)
    assert row["name"] == chart.names[75]
    assert row["luminous_reflectance"] == pytest.approx(chart.xyz[75, 1] / 100)
    assert row["looks_like_nm"] == list(chart.look_alikes[75])


def test_json_has_no_value_where_a_perfect_black_has_no_chromaticity(chart):
    from dataclasses import replace

    black = replace(chart, xy=np.full_like(chart.xy, np.nan))
    assert json.loads(table_json(black))["rows"][0]["xy"] == [None, None]
