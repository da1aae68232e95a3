"""One chart on one page, at true size, to print or to look at."""

import textwrap

from matplotlib.axes import Axes

from sheenmap.charts.chart import Chart
from sheenmap.charts.drawing import (
    Bracket,
    camera_strip,
    draw_classes,
    draw_gamut_marks,
    draw_lab,
    draw_names,
    draw_orders,
    draw_repeats,
    draw_scale,
    draw_speed,
    draw_strip,
    edges,
    place_brackets,
)
from sheenmap.charts.orders import ORDER_WAVELENGTH_NM
from sheenmap.charts.sheet import LEFT_IN, RIGHT_IN, Paper, Sheet, clipped, settled
from sheenmap.charts.words import lit_words
from sheenmap.colour import encode_srgb

NAME_ROWS, REPEAT_ROWS = 4, 7
FOOT_IN = 0.72
LETTERS_PER_IN = 21.5  # of the footer
REPEAT_ROW_IN = 0.165


def page_bytes(chart: Chart, kind: str, *, paper: Paper = "a4") -> bytes:
    """The page as "svg", "png" or "pdf"; landscape, A4 or US letter."""
    with settled():
        sheet = Sheet(paper)
        _heading(sheet, chart)
        below = _strips(sheet, chart)
        _curves(sheet, chart, below)
        _footer(sheet, chart)
        return sheet.save(kind)


def _heading(sheet: Sheet, chart: Chart) -> None:
    setup = chart.setup
    white = "the light" if setup.white == "light" else "the blank"
    sheet.write(0.3, 0.26, clipped(f"Colour against thickness: {setup.title}", 95), size=13, weight="bold")
    sheet.write(0.3, 0.56, clipped(setup.stack, 150), size=9)
    sheet.write(0.3, 0.75, clipped(f"light {setup.light};  eye {setup.observer}, adapted to {white};  {setup.view}", 170), size=9)


def _strips(sheet: Sheet, chart: Chart) -> float:
    """Everything on the grey mount; returns where it ends."""
    verb, amount = lit_words(chart.exposure).split(" ", 1)
    span_nm = edges(chart.thickness_nm)
    nm_per_inch = (span_nm[1] - span_nm[0]) / sheet.plot_width
    below = 4.16 + (0.26 if chart.appearance else 0.0)
    brackets = place_brackets(chart.repeats, span_nm, nm_per_inch, REPEAT_ROWS)
    rows = max([2, *(bracket.row + 1 for bracket in brackets)])
    end = below + rows * REPEAT_ROW_IN + 0.08
    sheet.mount(1.02, end - 1.02)
    draw_names(sheet.axes(1.07, 0.6, span_nm), chart.runs, nm_per_inch, NAME_ROWS)
    wide = sheet.axes(1.70, 1.15, span_nm)
    draw_strip(wide, chart.thickness_nm, chart.shown)
    sheet.label(2.27, f"as an adapted eye\nsees it, {verb}\n{amount}")
    if not chart.shown_in_gamut.all():
        draw_gamut_marks(sheet.axes(2.85, 0.07, span_nm), chart.thickness_nm, chart.shown_in_gamut)
        sheet.label(2.885, "outside sRGB")
    scale = sheet.axes(2.93, 0.001, span_nm)
    draw_scale(scale)
    sheet.label(3.03, "film, nm")
    draw_orders(sheet.axes(3.18, 0.22, span_nm), chart.orders, nm_per_inch)
    sheet.label(3.29, f"at {ORDER_WAVELENGTH_NM:g} nm")
    draw_strip(sheet.axes(3.48, 0.26, span_nm), chart.thickness_nm, chart.srgb)
    if not chart.in_gamut.all():
        draw_gamut_marks(sheet.axes(3.74, 0.04, span_nm), chart.thickness_nm, chart.in_gamut)
    sheet.label(3.61, "beside a mirror" if chart.setup.white == "light" else "beside the blank")
    draw_strip(sheet.axes(3.82, 0.26, span_nm), chart.thickness_nm, encode_srgb(camera_strip(chart.camera)))
    sheet.label(3.95, "camera's signal\nover its reference")
    if chart.appearance:
        draw_classes(sheet.axes(4.16, 0.22, span_nm), chart.appearance)
        sheet.label(4.27, "appearance on water")
    _repeats(sheet, chart, sheet.axes(below, rows * REPEAT_ROW_IN, span_nm), brackets, rows)
    sheet.label(below + rows * REPEAT_ROW_IN / 2, _repeat_words(chart, len(chart.repeats) - len(brackets)))
    return end


def _repeats(sheet: Sheet, chart: Chart, axes: Axes, brackets: tuple[Bracket, ...], rows: int) -> None:
    axes.set_ylim(rows, 0)
    draw_repeats(axes, brackets, chart.thickness_nm, chart.shown)
    if not brackets:
        axes.text(axes.get_xlim()[0], rows / 2, "none on this chart", size=7, va="center")


def _repeat_words(chart: Chart, left_out: int) -> str:
    more = f"\n{left_out} more not drawn" if left_out else ""
    return f"look-alikes within\n{chart.repeat_within:g} (CIEDE2000){more}"


def _curves(sheet: Sheet, chart: Chart, top: float) -> None:
    span_nm = edges(chart.thickness_nm)
    room = sheet.height - FOOT_IN - 0.45 - top - 0.24
    lab_top, lab_height = top + 0.14, 0.58 * room
    speed_top, speed_height = lab_top + lab_height + 0.1, 0.42 * room
    curves = sheet.axes(lab_top, lab_height, span_nm)
    draw_lab(curves, chart.thickness_nm, chart.lab)
    draw_scale(curves, numbers=False)
    sheet.write(0.3, lab_top, "CIE Lab", size=7)
    speed = sheet.axes(speed_top, speed_height, span_nm)
    draw_speed(speed, chart.thickness_nm, chart.de00_per_nm)
    draw_scale(speed)
    sheet.write(0.3, speed_top, "colour change\nper nm (dE00)", size=7)
    sheet.write(LEFT_IN, speed_top + speed_height + 0.19, "thickness of the film in nm", size=7)
    words = "right: nm that a careful eye can just tell side by side (dE00 = 1)"
    sheet.write(sheet.width - RIGHT_IN - 3.25, speed_top + speed_height + 0.19, words, size=7)


def _footer(sheet: Sheet, chart: Chart) -> None:
    text = "  ".join([*chart.cautions, *chart.notes, f"Camera's signal relative to {chart.setup.camera_reference}."])
    lines = textwrap.wrap(text, round(LETTERS_PER_IN * (sheet.width - 0.6)))
    sheet.write(0.3, sheet.height - FOOT_IN, "\n".join(lines[:5]), size=6.3)
    sheet.write(sheet.width - 1.95, sheet.height - 0.2, f"recipe SHA-256 {chart.setup.digest[:16]}", size=5.5, faint=True)
