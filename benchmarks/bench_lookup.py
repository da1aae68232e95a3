"""The colour table against a matrix for each thickness and wavelength, and against the reference library in a loop."""

import time

import numpy as np
import tmm

from sheenmap import catalogue
from sheenmap.lookup import build_table
from sheenmap.optics import Layer, Stack, View
from sheenmap.spectra import constant, sample

THICKNESS_NM = np.linspace(0.0, 1000.0, 2000)
WAVELENGTH_NM = np.arange(380.0, 781.0)
LIGHT, CAMERA = catalogue.lamp("LED-B3"), catalogue.camera("generic")
LAYERS = (("Si3N4", 60.0), ("SiO2", None), ("a-Si", 30.0))
LOOPED = 40  # of thickness times wavelength, in the loop over the reference library


def stack() -> Stack:
    """Three layers on silicon, the lowest absorbing."""
    layers = tuple(Layer(index=catalogue.material(name), thickness_nm=nm) for name, nm in LAYERS)
    return Stack(medium=constant(1.0), layers=layers, substrate=catalogue.material("Si"))


def indices() -> list[np.ndarray]:
    """Complex indices n - ik (401,) from the medium down."""
    names = [*(name for name, _ in LAYERS), "Si"]
    return [np.ones(401, complex), *(sample(catalogue.material(n), WAVELENGTH_NM, interpolation="monotone cubic") for n in names)]


def abeles() -> np.ndarray:
    """Signals (2000, 3) by characteristic matrices, fixed layers broadcast."""
    n = indices()
    b, c = np.ones((1, 401), complex), n[-1][None]
    for index, (_, nm) in zip(n[-2:0:-1], LAYERS[::-1]):
        depth = THICKNESS_NM[:, None] if nm is None else np.array([[nm]])
        delta = 2 * np.pi * index * depth / WAVELENGTH_NM
        cosine, sine = np.cos(delta), np.sin(delta)
        b, c = cosine * b + 1j * sine / index * c, 1j * index * sine * b + cosine * c
    reflectance = np.abs((b - c) / (b + c)) ** 2
    return reflectance @ (sample(LIGHT, WAVELENGTH_NM) * sample(CAMERA, WAVELENGTH_NM)).T


def looped() -> float:
    """Seconds that the reference library takes for the whole table, from a few of its points."""
    n = [index.conj() for index in indices()]
    start = time.perf_counter()
    for k in range(LOOPED):
        depths = [np.inf, 60.0, float(THICKNESS_NM[k]), 30.0, np.inf]
        tmm.coh_tmm("s", [index[k] for index in n], depths, 0.0, WAVELENGTH_NM[k])
    return (time.perf_counter() - start) / LOOPED * THICKNESS_NM.size * WAVELENGTH_NM.size


def best(work) -> float:
    """Least of five runs, in seconds."""
    times = []
    for _ in range(5):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def main() -> None:
    """Print how many times quicker our table is."""
    bare = Stack(medium=constant(1.0), layers=(), substrate=catalogue.material("Si"))
    ours = best(lambda: build_table(stack(), (0.0, 1975.0), light=LIGHT, response=CAMERA, blank=bare, view=View()))
    print(f"table of 2000 thicknesses with slopes, against vectorised matrices at 401 wavelengths: {best(abeles) / ours:.1f} x")
    print(f"the same, against the reference library in a loop: {looped() / ours:.0f} x")


if __name__ == "__main__":
    main()
