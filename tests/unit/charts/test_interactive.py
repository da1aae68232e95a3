import json
import re
from dataclasses import replace

from sheenmap.charts.interactive import chart_html


def test_the_page_asks_for_nothing_from_elsewhere(chart):
    html = chart_html(chart)
    addresses = re.findall(r"""(?:src|href|url|@import)\s*[=(]\s*["']?([^"')\s>]+)""", html)
    assert addresses
    assert all(address.startswith("data:image/png;base64,") for address in addresses)


def test_the_pages_data_are_the_tables(chart):
    html = chart_html(chart)
    record = json.loads(re.search(r'<script type="application/json" id="data">(.*?)</script>', html, re.S)[1])
    assert len(record["rows"]) == chart.thickness_nm.size


def test_a_title_cannot_break_out_of_the_page(chart):
    title = "</script><script>alert(1)</script>"
    html = chart_html(replace(chart, setup=replace(chart.setup, title=title)))
    assert "<script>alert" not in html
    assert html.count("</script>") == 2


def test_the_page_says_light_observer_angle_and_caution(chart):
    html = chart_html(chart)
    for words in ("LED-B3", "CIE 1931, 2 degrees", "angle 0 deg", "Screens and printers shift colours"):
        assert words in html
