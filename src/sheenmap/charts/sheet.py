"""A sheet of paper in inches: true size, neutral greys, axes placed from the top left, saved the same way every time."""

import io
from contextlib import AbstractContextManager
from typing import Literal

import matplotlib.style
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle

Paper = Literal["a4", "letter"]

LANDSCAPE_IN: dict[str, tuple[float, float]] = {"a4": (297 / 25.4, 210 / 25.4), "letter": (11.0, 8.5)}
DPI = 200
INK, FAINT, MOUNT = "#1c1c1c", "#6a6a6a", "#9a9a9a"  # all neutral: a tinted surround shifts the colours beside it
LEFT_IN, RIGHT_IN = 1.45, 0.75

_SETTINGS: dict[str, str | float] = {
    "font.size": 7.5,
    "text.color": INK,
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "axes.linewidth": 0.6,
    "xtick.color": INK,
    "ytick.color": INK,
    "xtick.major.width": 0.6,
    "ytick.major.width": 0.6,
    "hatch.linewidth": 0.5,
    "svg.hashsalt": "sheenmap",
}
_METADATA: dict[str, dict[str, str | None]] = {"svg": {"Date": None}, "pdf": {"CreationDate": None}, "png": {}}


class Sheet:
    """A page; all lengths in inches from its top left corner."""

    def __init__(self, paper: Paper) -> None:
        self.width, self.height = LANDSCAPE_IN[paper]
        self.figure = Figure(figsize=(self.width, self.height), facecolor="white")

    @property
    def plot_width(self) -> float:
        """Width of the axes that ``axes`` makes."""
        return self.width - LEFT_IN - RIGHT_IN

    def axes(self, top: float, height: float, span_nm: tuple[float, float]) -> Axes:
        """Axes over thickness, as wide as the page's margins allow, without frame or ticks."""
        bottom = 1 - (top + height) / self.height
        box = (LEFT_IN / self.width, bottom, self.plot_width / self.width, height / self.height)
        axes = self.figure.add_axes(box)
        axes.set_xlim(*span_nm)
        axes.set_ylim(0, 1)
        axes.set_facecolor("none")
        axes.tick_params(left=False, bottom=False, labelleft=False, labelbottom=False, length=2.5, pad=2, labelsize=7)
        for spine in axes.spines.values():
            spine.set_visible(False)
        return axes

    def mount(self, top: float, height: float) -> None:
        """The neutral grey on which colours lie."""
        corner = (0.3 / self.width, 1 - (top + height) / self.height)
        size = ((self.width - 0.6) / self.width, height / self.height)
        self.figure.add_artist(Rectangle(corner, *size, facecolor=MOUNT, edgecolor="none", zorder=-5))

    def write(
        self, left: float, top: float, text: str, *, size: float = 7.5, weight: str = "normal", faint: bool = False
    ) -> None:
        """Text whose first line's upper edge is at ``top``; as it is, without mathematics."""
        self.figure.text(
            left / self.width, 1 - top / self.height, text, size=size, weight=weight, color=FAINT if faint else INK,
            va="top", ha="left", parse_math=False, linespacing=1.3,
        )  # fmt: skip

    def label(self, top: float, text: str) -> None:
        """The words left of a row, right-aligned, centred on ``top``."""
        self.figure.text(
            (LEFT_IN - 0.08) / self.width, 1 - top / self.height, text, size=7, va="center", ha="right", linespacing=1.15,
            parse_math=False,
        )  # fmt: skip

    def save(self, kind: str) -> bytes:
        """The page as "svg", "png" or "pdf"."""
        buffer = io.BytesIO()
        self.figure.savefig(buffer, format=kind, dpi=DPI, metadata=_METADATA[kind])
        return buffer.getvalue()


def settled() -> AbstractContextManager[None]:
    """A context in which pages are drawn and saved, whatever the user's own settings are."""
    return matplotlib.style.context(["default", _SETTINGS])


def clipped(text: str, most: int) -> str:
    """``text`` on one line, of at most so many characters."""
    line = " ".join(text.split())
    return line if len(line) <= most else line[: most - 1].rstrip() + "…"
