"""Parts of a page: strips of colour, scale, names, orders, gamut marks, look-alikes, curves."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from matplotlib.axes import Axes
from matplotlib.ticker import AutoMinorLocator, MaxNLocator

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.charts.chart import Order, Repeat, Run
from sheenmap.charts.layout import centred_extent, rows_without_overlap
from sheenmap.charts.sheet import FAINT, INK, MOUNT

SLIVER_IN = 0.05  # narrower runs get no name
LETTER_IN = 0.056  # mean width of a letter at size 6.5, in inches
SPEED_TICKS_NM = (0.2, 0.3, 0.5, 1.0, 2.0, 5.0, 10.0, 30.0, 100.0)
CAMERA_TOP = 0.9  # of full scale, for the strongest signal of the camera's strip


@dataclass(frozen=True, kw_only=True)
class Bracket:
    """A pair of look-alikes with its words, where those are centred, and the row that it takes."""

    repeat: Repeat
    words: str
    middle_nm: float
    row: int


def edges(thickness_nm: FloatArray) -> tuple[float, float]:
    """Where the first cell begins and the last ends: half a step outside the samples."""
    half = (thickness_nm[1] - thickness_nm[0]) / 2
    return float(thickness_nm[0] - half), float(thickness_nm[-1] + half)


def draw_strip(axes: Axes, thickness_nm: FloatArray, rgb: FloatArray, *, frame: bool = False) -> None:
    """Colours (T, 3) side by side."""
    axes.imshow(rgb[None], extent=(*edges(thickness_nm), 0, 1), aspect="auto", interpolation="nearest", zorder=1)
    axes.set_ylim(0, 1)
    for spine in axes.spines.values():
        spine.set_visible(frame)


def draw_scale(axes: Axes, *, numbers: bool = True) -> None:
    """A ruler in nm below the axes."""
    axes.xaxis.set_major_locator(MaxNLocator(nbins=17, steps=[1, 2, 2.5, 5, 10]))
    axes.xaxis.set_minor_locator(AutoMinorLocator(5))
    axes.tick_params(axis="x", which="both", bottom=True, labelbottom=numbers)
    axes.tick_params(axis="x", which="minor", length=1.5, width=0.4)


def draw_gamut_marks(axes: Axes, thickness_nm: FloatArray, in_gamut: BoolArray) -> None:
    """Hatching along the stretches that a screen cannot show."""
    half = (thickness_nm[1] - thickness_nm[0]) / 2
    padded = np.concatenate([[False], ~in_gamut, [False]])
    starts_ends = np.flatnonzero(padded[1:] != padded[:-1]).reshape(-1, 2)
    spans = [(thickness_nm[a] - half, thickness_nm[b - 1] - thickness_nm[a] + 2 * half) for a, b in starts_ends]
    axes.broken_barh(spans, (0, 1), facecolor="white", edgecolor=INK, hatch="//////", linewidth=0.3)


def draw_names(axes: Axes, runs: Sequence[Run], nm_per_inch: float, rows: int) -> None:
    """Names over the strip, the widest runs served first, each with a line down to its run; slivers go without."""
    low, high = axes.get_xlim()
    wide = [run for run in runs if run.high_nm - run.low_nm >= SLIVER_IN * nm_per_inch]
    by_width = sorted(wide, key=lambda run: run.low_nm - run.high_nm)
    extents = [
        centred_extent((run.low_nm + run.high_nm) / 2, LETTER_IN * nm_per_inch * len(run.name), low, high) for run in by_width
    ]
    for run, extent, row in zip(by_width, extents, rows_without_overlap(extents, rows, 0.05 * nm_per_inch)):
        if row is None:
            continue
        level = (row + 0.5) / rows
        centre = (run.low_nm + run.high_nm) / 2
        axes.plot([centre, centre], [0, level], color=INK, linewidth=0.35, zorder=1)
        box = {"facecolor": MOUNT, "edgecolor": "none", "pad": 0.6}
        axes.text(sum(extent) / 2, level, run.name, size=6.5, ha="center", va="center", bbox=box, zorder=2)


def draw_orders(axes: Axes, orders: Sequence[Order], nm_per_inch: float) -> None:
    """A bar cut at each whole wave, with the orders' numbers where there is room."""
    axes.set_ylim(0, 1)
    for order in orders:
        axes.broken_barh(
            [(order.low_nm, order.high_nm - order.low_nm)], (0.1, 0.8), facecolor="#c4c4c4" if order.number % 2 else "#e2e2e2",
            edgecolor=INK, linewidth=0.5,
        )  # fmt: skip
        width_in = (order.high_nm - order.low_nm) / nm_per_inch
        word = f"order {order.number}"
        text = word if width_in > LETTER_IN * len(word) + 0.05 else str(order.number)
        if width_in > LETTER_IN * len(text):
            axes.text((order.low_nm + order.high_nm) / 2, 0.48, text, size=6.5, ha="center", va="center")


def draw_classes(axes: Axes, classes: Sequence[Run]) -> None:
    """A bar of appearance classes."""
    for k, run in enumerate(classes):
        shade = "#c4c4c4" if k % 2 else "#e2e2e2"
        axes.broken_barh([(run.low_nm, run.high_nm - run.low_nm)], (0.1, 0.8), facecolor=shade, edgecolor=INK, linewidth=0.5)
        axes.text((run.low_nm + run.high_nm) / 2, 0.48, run.name, size=6.5, ha="center", va="center", clip_on=True)


def draw_repeats(axes: Axes, brackets: Sequence[Bracket], thickness_nm: FloatArray, rgb: FloatArray) -> None:
    """Brackets from a thickness to its look-alike, with both colours at the ends."""
    for bracket in brackets:
        ends_nm, top = (bracket.repeat.one_nm, bracket.repeat.other_nm), bracket.row + 0.1
        level = top + 0.52
        axes.plot(np.repeat(ends_nm, 2), [top, level, level, top], color=INK, linewidth=0.6, zorder=1)
        colours = rgb[[int(np.argmin(np.abs(thickness_nm - end))) for end in ends_nm]]
        axes.scatter(
            ends_nm, [level, level], s=22, marker="s", c=colours, edgecolors=INK, linewidths=0.4, zorder=3, clip_on=False
        )
        box = {"facecolor": MOUNT, "edgecolor": "none", "pad": 0.6}
        axes.text(bracket.middle_nm, level, bracket.words, size=6.5, ha="center", va="center", bbox=box, zorder=2)


def place_brackets(repeats: Sequence[Repeat], span_nm: tuple[float, float], nm_per_inch: float, rows: int) -> tuple[Bracket, ...]:
    """The look-alikes that find room in so many rows, the most alike first."""
    words = [f"{repeat.one_nm:g} and {repeat.other_nm:g} nm ({repeat.de00:.1f})" for repeat in repeats]
    inside = [_word_extent(repeat, LETTER_IN * nm_per_inch * len(word), *span_nm) for repeat, word in zip(repeats, words)]
    extents = [(min(left, r.one_nm), max(right, r.other_nm)) for r, (left, right) in zip(repeats, inside)]
    placed = rows_without_overlap(extents, rows, 0.12 * nm_per_inch)
    return tuple(
        Bracket(repeat=repeat, words=word, middle_nm=(left + right) / 2, row=row)
        for repeat, word, (left, right), row in zip(repeats, words, inside, placed)
        if row is not None
    )


def _word_extent(repeat: Repeat, width: float, low: float, high: float) -> tuple[float, float]:
    """In the bracket's middle, or beside it where the bracket is too narrow."""
    span = repeat.other_nm - repeat.one_nm
    if span > 1.15 * width:
        return centred_extent((repeat.one_nm + repeat.other_nm) / 2, width, low, high)
    beside = repeat.other_nm + 0.65 * width
    return centred_extent(beside if beside + width / 2 <= high else repeat.one_nm - 0.65 * width, width, low, high)


def draw_lab(axes: Axes, thickness_nm: FloatArray, lab: FloatArray) -> None:
    """L*, a*, b* as curves that grey print keeps apart, named at their right ends."""
    axes.set_ylim(min(0, float(lab.min())) - 4, float(lab.max()) + 4)
    axes.axhline(0, color=FAINT, linewidth=0.4)
    styles = (("L*", INK, "-"), ("a*", "#a3243b", "--"), ("b*", "#1f4e8c", "-."))
    ends = _spread([float(v) for v in lab[-1]], 0.13 * float(np.ptp(axes.get_ylim())))
    for (name, colour, dash), values, end in zip(styles, lab.T, ends):
        axes.plot(thickness_nm, values, color=colour, linestyle=dash, linewidth=1.0)
        axes.annotate(name, (1, end), xycoords=("axes fraction", "data"), xytext=(4, 0), textcoords="offset points",
                      va="center", color=colour, size=7.5)  # fmt: skip
    open_frame(axes)


def draw_speed(axes: Axes, thickness_nm: FloatArray, de00_per_nm: FloatArray) -> None:
    """Colour change per nm; on the right the thickness that makes a just visible change."""
    top = 1.08 * float(max(de00_per_nm.max(), 1e-3))
    axes.set_ylim(0, top)
    axes.fill_between(thickness_nm, de00_per_nm, color="#b9b9b9", linewidth=0)
    axes.plot(thickness_nm, de00_per_nm, color=INK, linewidth=0.8)
    open_frame(axes)
    right = axes.twinx()
    right.set_ylim(0, top)
    shown = _clear_ticks([nm for nm in SPEED_TICKS_NM if 1 / nm <= top], 0.14 * top)
    right.set_yticks([1 / nm for nm in shown], [f"{nm:g} nm" for nm in shown])
    right.tick_params(length=2.5, pad=2, labelsize=7)
    for spine in right.spines.values():
        spine.set_visible(False)


def _clear_ticks(ticks_nm: Sequence[float], gap: float) -> list[float]:
    """The ticks, rising in nm and so falling on the axis, that stay ``gap`` above zero and below the one before."""
    shown: list[float] = []
    for nm in ticks_nm:
        if 1 / nm >= gap and (not shown or 1 / shown[-1] - 1 / nm >= gap):
            shown.append(nm)
    return shown


def open_frame(axes: Axes) -> None:
    """Left and lower edges with their numbers."""
    for side in ("left", "bottom"):
        axes.spines[side].set_visible(True)
    axes.yaxis.set_major_locator(MaxNLocator(nbins=5))
    axes.tick_params(axis="y", left=True, labelleft=True)
    axes.grid(axis="x", color="#dcdcdc", linewidth=0.4)
    axes.set_axisbelow(True)


def _spread(values: list[float], gap: float) -> list[float]:
    """The values, pushed apart upwards where nearer than ``gap``."""
    order = sorted(range(len(values)), key=lambda k: values[k])
    spread = list(values)
    for below, above in pairwise(order):
        spread[above] = max(spread[above], spread[below] + gap)
    return spread


def camera_strip(camera: FloatArray) -> FloatArray:
    """The camera's signal as linear light for a screen; one factor for all keeps its strongest value under full scale."""
    return np.asarray(np.clip(camera * (CAMERA_TOP / max(float(camera.max()), 1e-9)), 0, 1))
