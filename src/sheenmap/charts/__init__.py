"""Reference charts: the colour of a film against its thickness, for the eye and for the camera, as pages and as numbers.

The eye's colours are CIE XYZ under the recipe's light with the perfect mirror at Y = 100; the camera's are relative to the
blank's. Thickness in nm is the first axis (T), colour components are the last.
"""

from sheenmap.charts.build import REPEAT_WITHIN, chart_data
from sheenmap.charts.chart import Chart
from sheenmap.charts.table import chart_record, table_csv, table_json
from sheenmap.charts.twoway import TwoWay, two_way_data
from sheenmap.charts.write import write_chart, write_side_by_side, write_table, write_two_way

__all__ = [
    "REPEAT_WITHIN", "Chart", "TwoWay", "chart_data", "chart_record", "table_csv", "table_json", "two_way_data", "write_chart",
    "write_side_by_side", "write_table", "write_two_way",
]  # fmt: skip
