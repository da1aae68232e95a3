"""Tables of reflectance against two ways of the textbook, in one run; prints ratios, and the largest differences.

The stack is 20 nm oxide / searched nitride / 10 nm oxide on silicon, 2000 thicknesses by 401 wavelengths. Full matrices
(Abeles 1950) are written here in numpy, vectorised over the whole table; the general library tmm goes one point at a time, on
a subset, and its time is scaled to the table's size.
"""

import platform
import resource
import sys
from pathlib import Path
from time import perf_counter

import numpy as np
import tmm

from sheenmap.catalogue import material
from sheenmap.optics import Back, Layer, Stack, View, layer_index, reflectance, reflectance_and_slope

WAVELENGTH_NM = np.linspace(380.0, 780.0, 401)
THICKNESS_NM = np.linspace(0.0, 2000.0, 2000)
UNEVEN_NM = THICKNESS_NM**1.5 / 2000**0.5
SUBSET = (slice(None, None, 100), slice(None, None, 20))
NORMAL, OBLIQUE = View(), View(angle_deg=30.0)


def oxide(thickness_nm: float) -> Layer:
    return Layer(index=material("SiO2"), thickness_nm=thickness_nm)


STACK = Stack(
    medium=material("air"),
    layers=(oxide(20.0), Layer(index=material("Si3N4"), thickness_nm=None), oxide(10.0)),
    substrate=material("Si"),
)
ON_GLASS = Stack(
    medium=STACK.medium, layers=STACK.layers, substrate=material("N-BK7"), back=Back(medium=STACK.medium, thickness_mm=1.0)
)


def indices() -> list[np.ndarray]:
    ends = [Layer(index=index, thickness_nm=0.0) for index in (STACK.medium, STACK.substrate)]
    return [layer_index(layer, WAVELENGTH_NM) for layer in (ends[0], *STACK.layers, ends[1])]


def abeles() -> np.ndarray:
    """The product of 2 x 2 matrices, an array to each element: quicker than matrix products of numpy on so small ones."""
    n = indices()
    shape = (THICKNESS_NM.size, WAVELENGTH_NM.size)
    m11, m12, m21, m22 = np.ones(shape, complex), np.zeros(shape, complex), np.zeros(shape, complex), np.ones(shape, complex)
    for index, layer in zip(n[1:-1], STACK.layers):
        depth_nm = THICKNESS_NM if layer.thickness_nm is None else np.full(THICKNESS_NM.size, layer.thickness_nm)
        phase = 2 * np.pi * index * depth_nm[:, None] / WAVELENGTH_NM
        cosine, sine = np.cos(phase), 1j * np.sin(phase)
        right, left = sine / index, sine * index
        m11, m12 = m11 * cosine + m12 * left, m11 * right + m12 * cosine
        m21, m22 = m21 * cosine + m22 * left, m21 * right + m22 * cosine
    b, c = m11 + m12 * n[-1], m21 + m22 * n[-1]
    return np.abs((n[0] * b - c) / (n[0] * b + c)) ** 2


def one_by_one() -> np.ndarray:
    n = np.conj(np.stack(indices()))[:, SUBSET[1]]
    return np.array([
        [
            tmm.coh_tmm("s", n[:, i], [np.inf, 20.0, thickness_nm, 10.0, np.inf], 0.0, wavelength_nm)["R"]
            for i, wavelength_nm in enumerate(WAVELENGTH_NM[SUBSET[1]])
        ]
        for thickness_nm in THICKNESS_NM[SUBSET[0]]
    ])  # fmt: skip


def best(call, times: int = 5) -> float:
    call()
    taken = []
    for _ in range(times):
        start = perf_counter()
        call()
        taken.append(perf_counter() - start)
    return min(taken)


def main() -> None:
    print(f"python {platform.python_version()}, numpy {np.__version__}, {platform.machine()}, {Path(sys.argv[0]).name}")
    ours = reflectance(STACK, THICKNESS_NM, WAVELENGTH_NM, NORMAL)
    print(f"largest difference from full matrices {np.max(np.abs(ours - abeles())):.1e}, ", end="")
    print(f"from tmm {np.max(np.abs(ours[SUBSET] - one_by_one())):.1e}")
    matrices = best(abeles, 2)
    points = ours[SUBSET].size
    loop = best(one_by_one, 1) * ours.size / points
    for name, call in {
        "reflectance": lambda: reflectance(STACK, THICKNESS_NM, WAVELENGTH_NM, NORMAL),
        "reflectance and slope": lambda: reflectance_and_slope(STACK, THICKNESS_NM, WAVELENGTH_NM, NORMAL),
        "the same, uneven thicknesses": lambda: reflectance_and_slope(STACK, UNEVEN_NM, WAVELENGTH_NM, NORMAL),
        "30 degrees, unpolarised, slope": lambda: reflectance_and_slope(STACK, THICKNESS_NM, WAVELENGTH_NM, OBLIQUE),
        "back of glass, slope": lambda: reflectance_and_slope(ON_GLASS, THICKNESS_NM, WAVELENGTH_NM, NORMAL),
        "cone of aperture 0.3, slope": lambda: reflectance_and_slope(STACK, THICKNESS_NM, WAVELENGTH_NM, View(aperture=0.3)),
    }.items():
        ratio = best(call, 3)
        print(f"{name:32s} {matrices / ratio:6.1f} x as quick as full matrices, {loop / ratio:8.0f} x as tmm point by point")
    print(f"peak memory {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MB, most of it the full matrices'")


if __name__ == "__main__":
    main()
