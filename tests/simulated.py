"""Photographs that tests draw themselves: set-ups at random, and signals that have gone through the whole camera."""

from dataclasses import dataclass

import numpy as np
from scipy.ndimage import gaussian_filter

from sheenmap import catalogue
from sheenmap.camera import Encoding, Signal, encode, linear_frame, relative_signal
from sheenmap.lookup import Table, build_table, evaluate
from sheenmap.optics import Layer, Stack, View
from sheenmap.spectra import constant


@dataclass(frozen=True, kw_only=True)
class Sensor:
    """Full well and read noise in electrons, bits, encoding, rms of the shading left, level of the brightest."""

    full_well: float = 12_000.0
    read: float = 5.0
    bits: int = 8
    encoding: str = "linear"
    shading: float = 0.003
    level: float = 0.85


def film_on(substrate: str, film: str, *, fixed: tuple[tuple[str, float], ...] = ()) -> Stack:
    """A searched film over layers of fixed thickness on a substrate, in air."""
    layers = [Layer(index=catalogue.material(film), thickness_nm=None, name="film")]
    layers += [Layer(index=catalogue.material(name), thickness_nm=nm) for name, nm in fixed]
    return Stack(medium=constant(1.0), layers=tuple(layers), substrate=catalogue.material(substrate))


def table_of(
    stack: Stack, search_nm: tuple[float, float], *, light: str = "LED-B3", camera: str = "generic", view: View | None = None
) -> Table:
    """The table of a stack whose blank is its bare substrate."""
    bare = Stack(medium=stack.medium, layers=(), substrate=stack.substrate)
    return build_table(
        stack,
        search_nm,
        light=catalogue.lamp(light),
        response=catalogue.camera(camera),
        blank=bare,
        view=view or View(),
    )


def photograph(
    thickness_nm: np.ndarray,
    table: Table,
    rng: np.random.Generator,
    sensor: Sensor | None = None,
    *,
    painted: tuple[np.ndarray, tuple[float, float, float]] | None = None,
) -> Signal:
    """The signal of a photograph of a film (H, W), taken with its blank and made linear as any other.

    ``painted`` is a mask (H, W) with the ratio to the blank that stands there instead of film.
    """
    sensor = sensor or Sensor()
    ratio = evaluate(table, np.nan_to_num(thickness_nm).ravel())[0].reshape(*thickness_nm.shape, 3)
    if painted is not None:
        ratio[painted[0]] = painted[1]
    smooth = gaussian_filter(rng.normal(size=thickness_nm.shape), min(thickness_nm.shape) / 3, mode="reflect")
    shading = 1 + sensor.shading * (smooth - smooth.mean()) / smooth.std()
    gain = sensor.level / max(1.0, float(np.quantile(ratio, 0.9)))
    encoding = Encoding(kind=sensor.encoding)  # type: ignore[arg-type]
    frames = [_codes(light, rng, sensor, encoding, count) for light, count in (
        (gain * ratio * shading[..., None], 1), (np.full(ratio.shape, gain), 16),
    )]  # fmt: skip
    full_scale = float(2**sensor.bits - 1)
    return relative_signal(*(linear_frame(codes, encoding, full_scale) for codes in frames), None)


def _codes(light: np.ndarray, rng: np.random.Generator, sensor: Sensor, encoding: Encoding, count: int) -> np.ndarray:
    electrons = rng.poisson(light * sensor.full_well * count) / count
    electrons = electrons + rng.normal(0, sensor.read / np.sqrt(count), light.shape)
    full_scale = 2**sensor.bits - 1
    codes = np.rint(encode(encoding, np.clip(electrons / sensor.full_well, 0, 1), full_scale))
    return np.clip(codes, 0, full_scale).astype(np.uint8 if sensor.bits == 8 else np.uint16)


def ramp(low_nm: float, high_nm: float, shape: tuple[int, int] = (96, 96)) -> np.ndarray:
    """A film that rises evenly from left to right."""
    return np.broadcast_to(np.linspace(low_nm, high_nm, shape[1]), shape).copy()
