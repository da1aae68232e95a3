"""Several charts on one page, strip under strip over a common scale."""

import textwrap
from collections.abc import Sequence

from sheenmap.charts.chart import Chart
from sheenmap.charts.drawing import draw_gamut_marks, draw_names, draw_orders, draw_scale, draw_strip, edges
from sheenmap.charts.sheet import Paper, Sheet, clipped, settled
from sheenmap.charts.words import CAUTIONS, lit_words
from sheenmap.errors import Fault, SettingsError

MOST_STRIPS = 8
TOP_IN, FOOT_IN = 0.75, 0.75
NAMES_IN, ORDERS_IN, CAPTION_IN = 0.32, 0.18, 0.2  # shares of a strip's height that its rows take


def side_by_side_bytes(charts: Sequence[Chart], kind: str, *, paper: Paper = "a4") -> bytes:
    """The page as "svg", "png" or "pdf".

    Raises
    ------
    SettingsError
        No charts, or more than ``MOST_STRIPS``.
    """
    if not 1 <= len(charts) <= MOST_STRIPS:
        raise SettingsError([Fault(key="charts", found=str(len(charts)), allowed=f"1 to {MOST_STRIPS} on a page")], where="chart")
    spans = [edges(chart.thickness_nm) for chart in charts]
    span_nm = min(low for low, _ in spans), max(high for _, high in spans)
    with settled():
        sheet = Sheet(paper)
        sheet.write(0.3, 0.28, clipped("Colour against thickness: " + _common_title(charts), 95), size=13, weight="bold")
        room = sheet.height - TOP_IN - FOOT_IN - 0.25
        sheet.mount(TOP_IN - 0.08, room + 0.42)
        for k, chart in enumerate(charts):
            _row(sheet, chart, TOP_IN + k * room / len(charts), room / len(charts), span_nm)
        draw_scale(sheet.axes(TOP_IN + room, 0.001, span_nm))
        sheet.label(TOP_IN + room + 0.1, "film, nm")
        lines = textwrap.wrap(
            "  ".join((*CAUTIONS, "Each strip is brightened or dimmed as an eye adapts, by the factor beside it.")), 240
        )
        sheet.write(0.3, sheet.height - 0.52, "\n".join(lines[:3]), size=6.3)
        return sheet.save(kind)


def _row(sheet: Sheet, chart: Chart, top: float, height: float, span_nm: tuple[float, float]) -> None:
    nm_per_inch = (span_nm[1] - span_nm[0]) / sheet.plot_width
    setup = chart.setup
    caption = f"{setup.stack};  light {setup.light};  eye {setup.observer};  {setup.view}"
    sheet.write(0.4, top, clipped(caption, 165), size=7.5, weight="bold")
    names_top = top + CAPTION_IN
    strip_top = names_top + NAMES_IN
    strip_height = max(height - CAPTION_IN - NAMES_IN - ORDERS_IN - 0.1, 0.1)
    names = sheet.axes(names_top, NAMES_IN, span_nm)
    draw_names(names, chart.runs, nm_per_inch, 2)
    strip = sheet.axes(strip_top, strip_height, span_nm)
    draw_strip(strip, chart.thickness_nm, chart.shown)
    strip.set_xlim(*span_nm)
    sheet.label(strip_top + strip_height / 2, lit_words(chart.exposure).replace(" ", "\n", 1))
    if not chart.shown_in_gamut.all():
        draw_gamut_marks(sheet.axes(strip_top + strip_height - 0.05, 0.05, span_nm), chart.thickness_nm, chart.shown_in_gamut)
    draw_orders(sheet.axes(strip_top + strip_height, ORDERS_IN, span_nm), chart.orders, nm_per_inch)


def _common_title(charts: Sequence[Chart]) -> str:
    titles = list(dict.fromkeys(chart.setup.title for chart in charts))
    return "; ".join(titles)
