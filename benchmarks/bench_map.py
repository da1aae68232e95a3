"""The inverse against the nearest colour of a search tree on the same pixels, and what memory it takes."""

import sys
import time
import tracemalloc
from pathlib import Path

import numpy as np
from scipy.spatial import cKDTree

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "tests"))

from sheenmap.inversion import Doubts, invert
from simulated import film_on, photograph, table_of

SHAPE = (400, 600)


def main() -> None:
    """Print both ratios for a film of one order and for one of many."""
    for name, low, high, search in (
        ("450 to 550 nm", 450.0, 550.0, (350.0, 650.0)),
        ("0 to 1400 nm", 5.0, 1400.0, (0.0, 1500.0)),
    ):
        table = table_of(film_on("Si", "SiO2"), search)
        truth = np.broadcast_to(np.linspace(low, high, SHAPE[1]), SHAPE)
        signal = photograph(truth, table, np.random.default_rng(1))
        inside = np.ones(SHAPE, bool)
        start = time.perf_counter()
        invert(signal, table, inside, doubts=Doubts())
        ours = time.perf_counter() - start
        start = time.perf_counter()
        cKDTree(table.signal[0]).query(signal.values.reshape(-1, 3))
        theirs = time.perf_counter() - start
        tracemalloc.start()
        invert(signal, table, inside, doubts=Doubts())
        peak = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        print(f"oxide of {name}: search tree over the inverse with order, flags and uncertainty: {theirs / ours:.2f} x")
        print(f"oxide of {name}: peak memory over that of the signal: {peak / signal.values.nbytes:.1f} x")


if __name__ == "__main__":
    main()
