"""Wafers drawn for these tests, with their truth: the rim is exact to a sixth of a pixel before blur."""

from dataclasses import dataclass, field

import cv2
import numpy as np
import pytest


@dataclass(kw_only=True)
class Scene:
    """What is drawn. Angles in degrees counter-clockwise as a viewer sees them; lengths in pixels."""

    shape: tuple[int, int] = (480, 640)
    x: float = 318.3
    y: float = 241.7
    radius: float = 190.4
    notch_deg: float | None = None
    notch_depth: float = 0.012  # of the radius
    flat_deg: float | None = None
    flat_half_deg: float = 18.0
    clips_deg: tuple[float, ...] = ()
    clip_level: float = 0.5
    film: tuple[float, float, float] = (0.55, 0.4, 0.3)
    swing: float = 0.25  # of the film's level over the wafer, in other phases for each channel
    bench: tuple[float, float, float] = (0.02, 0.02, 0.03)
    vignette: float = 0.0
    reflections: int = 0
    dust: int = 0
    blur: float = 0.8
    noise: float = 0.004
    seed: int = 0
    others: list[tuple[float, float, float]] = field(default_factory=list)


def draw(scene: Scene) -> np.ndarray:
    """The picture, (H, W, 3) float32 of linear signal."""
    rng = np.random.default_rng(scene.seed)
    height, width = scene.shape
    x, y = (plane.astype(np.float32) for plane in np.meshgrid(_fine(width), _fine(height)))
    on = _wafer(scene, x, y)
    for centre_x, centre_y, radius in scene.others:
        on |= np.hypot(x - centre_x, y - centre_y) <= radius
    clip = _clips(scene, x - scene.x, y - scene.y)
    film = _film(scene, rng)
    picture = np.float32(scene.bench) + _averaged(on, scene.shape)[..., None] * (film - np.float32(scene.bench))
    picture += _averaged(clip, scene.shape)[..., None] * (np.float32(scene.clip_level) - picture)
    _reflections(scene, picture, rng)
    away = np.hypot(np.arange(width) - width / 2, np.arange(height)[:, None] - height / 2) / np.hypot(width, height) * 2
    picture *= (1 - scene.vignette * away**2)[..., None].astype(np.float32)
    if scene.blur:
        picture = cv2.GaussianBlur(picture, (0, 0), scene.blur)
    return picture + rng.normal(0, scene.noise, picture.shape).astype(np.float32)


def _fine(length):
    """Three samples a pixel."""
    return (np.arange(3 * length) + 0.5) / 3 - 0.5


def _averaged(mask, shape):
    return cv2.resize(mask.astype(np.float32), shape[::-1], interpolation=cv2.INTER_AREA)


def _film(scene, rng):
    """Interference-like colours that change over the wafer, in other phases for each channel."""
    u = (np.arange(scene.shape[1], dtype=np.float32) - scene.x) / scene.radius
    v = (np.arange(scene.shape[0], dtype=np.float32)[:, None] - scene.y) / scene.radius
    phase = 2.2 * (u * u + v * v) + rng.uniform(-1, 1) * u + rng.uniform(-1, 1) * v + rng.uniform(0, 6)
    levels = [level * (1 + scene.swing * np.sin(phase * factor)) for level, factor in zip(scene.film, (1.0, 1.25, 1.5))]
    return np.stack(levels, axis=-1).astype(np.float32)


def _wafer(scene, x, y):
    on = np.hypot(x - scene.x, y - scene.y) <= scene.radius
    if scene.notch_deg is not None:
        along, across = _turned(scene, x, y, scene.notch_deg)
        on &= ~(along > scene.radius * (1 - scene.notch_depth) + np.abs(across))  # 90 degrees
    if scene.flat_deg is not None:
        along, _ = _turned(scene, x, y, scene.flat_deg)
        on &= along <= scene.radius * np.cos(np.deg2rad(scene.flat_half_deg))
    return on


def _turned(scene, x, y, angle_deg):
    cosine, sine = np.cos(np.deg2rad(angle_deg)), np.sin(np.deg2rad(angle_deg))
    right, up = x - scene.x, -(y - scene.y)
    return right * cosine + up * sine, up * cosine - right * sine


def _clips(scene, right, down):
    """True on bars across the rim."""
    clip = np.zeros(right.shape, bool)
    for angle_deg in scene.clips_deg:
        cosine, sine = np.cos(np.deg2rad(angle_deg)), np.sin(np.deg2rad(angle_deg))
        along, across = right * cosine - down * sine, right * sine + down * cosine
        clip |= (np.abs(across) < 0.06 * scene.radius) & (along > 0.95 * scene.radius) & (along < 1.1 * scene.radius)
    return clip


def _reflections(scene, picture, rng):
    for _ in range(scene.reflections):
        turn, reach = rng.uniform(0, 2 * np.pi), scene.radius * rng.uniform(0, 0.75)
        centre = (int(scene.x + reach * np.cos(turn)), int(scene.y + reach * np.sin(turn)))
        axes = (int(scene.radius * rng.uniform(0.05, 0.25)), int(scene.radius * rng.uniform(0.02, 0.2)))
        layer = np.zeros(picture.shape[:2], np.float32)
        cv2.ellipse(layer, centre, axes, rng.uniform(0, 180), 0, 360, 1.0, -1)
        soft = cv2.GaussianBlur(layer, (0, 0), 1.5)
        picture += (rng.uniform(0.1, 0.4) * soft)[..., None]
    for _ in range(scene.dust):
        place = (int(rng.uniform(0, picture.shape[1])), int(rng.uniform(0, picture.shape[0])))
        cv2.circle(picture, place, int(rng.uniform(1, 5)), tuple(rng.uniform(0, 1, 3)), -1)


def random_scene(seed: int) -> Scene:
    """A wafer as it may stand on a bench: notch, up to three clips, vignette, reflections, dust, blur and noise."""
    rng = np.random.default_rng([seed, 7])
    radius, notch_deg = rng.uniform(110, 215), rng.uniform(-180, 180)
    return Scene(
        x=rng.uniform(radius + 8, 640 - radius - 8), y=rng.uniform(radius + 8, 480 - radius - 8) if radius < 230 else 240.0,
        radius=radius, notch_deg=notch_deg, notch_depth=rng.uniform(0.010, 0.018),
        clips_deg=tuple(notch_deg + rng.uniform(12, 348, rng.integers(0, 4))), clip_level=rng.uniform(0.0, 0.9),
        film=tuple(rng.uniform(0.15, 0.7, 3)), swing=rng.uniform(0, 0.6), bench=tuple(rng.uniform(0.0, 0.05, 3)),
        vignette=rng.uniform(0, 0.5), reflections=int(rng.integers(0, 4)), dust=int(rng.integers(0, 30)),
        blur=rng.uniform(0.4, 1.6), noise=rng.uniform(0.001, 0.012), seed=seed,
    )  # fmt: skip


@pytest.fixture(scope="session")
def drawn():
    """``drawn(scene)`` draws, ``drawn.random(seed)`` gives a random scene, ``drawn.Scene`` makes one."""

    def call(**settings):
        return draw(Scene(**settings))

    call.scene, call.random, call.Scene = draw, random_scene, Scene
    return call
