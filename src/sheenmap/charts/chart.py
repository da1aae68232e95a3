"""What a chart holds, and where it comes from."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from sheenmap.arrays import BoolArray, FloatArray

White = Literal["light", "blank"]


@dataclass(frozen=True, kw_only=True)
class Order:
    """An order of interference: where the path through the film and back is from ``number - 1`` to ``number`` waves."""

    number: int
    low_nm: float
    high_nm: float


@dataclass(frozen=True, kw_only=True)
class Run:
    """A stretch of thicknesses whose colours go by one name, or which one appearance class covers."""

    name: str
    low_nm: float
    high_nm: float


@dataclass(frozen=True, kw_only=True)
class Repeat:
    """Two thicknesses where the colour comes nearest to itself again, and how far apart those colours are (CIEDE2000)."""

    one_nm: float
    other_nm: float
    de00: float


@dataclass(frozen=True, kw_only=True)
class Setup:
    """What was charted, in words, for the page: the stack, the light, the eye, the way of looking, the camera's reference."""

    title: str
    digest: str
    film: str
    stack: str
    light: str
    observer: str
    white: White
    view: str
    camera_reference: str
    band_nm: tuple[float, float]


@dataclass(frozen=True, kw_only=True, eq=False)
class Chart:
    """Colour against thickness.

    Parameters
    ----------
    thickness_nm : (T,) float
        Equally spaced.
    xyz, xy : (T, 3), (T, 2) float
        Under the light, the perfect mirror at Y = 100.
    lab : (T, 3) float
        Against the white of ``setup.white``: the light, or the blank seen under it.
    srgb, in_gamut : (T, 3) float, (T,) bool
        Screen codes adapted from that white, clipped where ``in_gamut`` is False.
    exposure : float
        Factor that lifts the brightest film of the chart to ``SHOWN_Y``, as an eye or a camera would by adapting.
    shown, shown_in_gamut : (T, 3) float, (T,) bool
        The same colours, brightened by ``exposure``; ``names`` are theirs.
    camera : (T, 3) float
        Red, green, blue of the recipe's camera relative to the blank's.
    de00_per_nm : (T,) float
        How fast the colour ``lab`` moves: CIEDE2000 per nm of film.
    names : (T,) tuple of str
        The colour in plain words.
    runs : tuple of Run
        Stretches of one name, in order.
    orders : tuple of Order
        At ``ORDER_WAVELENGTH_NM``, in order.
    look_alikes : (T,) tuple of tuples of float
        For each thickness the others, in nm, whose colour differs by ``repeat_within`` at most and which do not merely adjoin it.
    repeats : tuple of Repeat
        Where the colour comes nearest to itself again, nearest first.
    appearance : tuple of Run
        For oil on water: the classes of appearance by thickness. Empty for other films.
    notes, cautions : tuple of str
        What the reader of the page has to know about this chart, and about any chart.
    """

    setup: Setup
    thickness_nm: FloatArray
    xyz: FloatArray
    xy: FloatArray
    lab: FloatArray
    srgb: FloatArray
    in_gamut: BoolArray
    exposure: float
    shown: FloatArray
    shown_in_gamut: BoolArray
    camera: FloatArray
    de00_per_nm: FloatArray
    names: tuple[str, ...]
    runs: tuple[Run, ...]
    orders: tuple[Order, ...]
    look_alikes: tuple[tuple[float, ...], ...]
    repeats: tuple[Repeat, ...]
    repeat_within: float
    appearance: tuple[Run, ...] = ()
    notes: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()


def runs_of(names: Sequence[str], thickness_nm: FloatArray) -> tuple[Run, ...]:
    """Neighbours of one name drawn together; a run ends half-way to the next."""
    starts = [0, *(i for i in range(1, len(names)) if names[i] != names[i - 1]), len(names)]
    borders_nm = [
        float(thickness_nm[0]),
        *(float(thickness_nm[i - 1] + thickness_nm[i]) / 2 for i in starts[1:-1]),
        float(thickness_nm[-1]),
    ]
    return tuple(Run(name=names[start], low_nm=low, high_nm=high) for start, low, high in zip(starts, borders_nm, borders_nm[1:]))
