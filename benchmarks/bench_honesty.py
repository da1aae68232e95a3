"""Coverage, wrong orders and error over the limit for 200 set-ups drawn at random: `python benchmarks/bench_honesty.py [N]`.

A set-up is a film on a substrate, a lamp, a camera, a noise level, a bit depth, an encoding, an angle, a polarisation. The
limit is that of Cramer and Rao for one pixel with its own noise and shading. A band is binomial at 1 in 1000 for 150
independent pixels a set-up, since the pixels of one share its shading.
"""

import sys
from pathlib import Path

import numpy as np
from scipy.stats import binom

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "tests"))

from sheenmap.flags import is_blocked
from sheenmap.inversion import Doubts, invert
from sheenmap.inversion.likelihood import Whitener
from sheenmap.lookup import evaluate
from sheenmap.optics import View
from simulated import Sensor, film_on, photograph, ramp, table_of

FILMS = ("SiO2", "Si3N4", "Al2O3", "HfO2", "PMMA", "TiO2", "polystyrene", "Ta2O5", "a-Si", "TiN")
SUBSTRATES = ("Si", "Si", "GaAs", "glass", "Al")
LIGHTS = ("LED-B3", "LED-B1", "LED-V1", "D65", "A", "FL2", "FL11", "LED-RGB1")
CAMERAS = ("generic", "sensor-01", "sensor-02", "sensor-03", "sensor-04", "sensor-05")
LIMIT_CAP_NM = 8.0  # where the limit is beyond, a turning point or no colour is left and the bound is not what sets the error
INDEPENDENT = 150


def one(seed: int) -> dict[str, object]:
    """Draw a set-up and measure it."""
    rng = np.random.default_rng(seed)
    film, substrate, light, camera = (str(rng.choice(names)) for names in (FILMS, SUBSTRATES, LIGHTS, CAMERAS))
    view = View(
        angle_deg=float(rng.choice([0, 0, 20, 45])),
        aperture=float(rng.choice([0, 0, 0.2])),
        polarisation=str(rng.choice(["none", "s", "p"])),
    )
    table = table_of(film_on(substrate, film), (0.0, 700.0), light=light, camera=camera, view=view)
    low = float(rng.uniform(10, 350))
    truth = ramp(low, low + float(rng.uniform(60, 300)), (80, 96))
    sensor = Sensor(
        full_well=float(rng.uniform(4_000, 40_000)), bits=int(rng.choice([8, 16])), encoding=str(rng.choice(["linear", "srgb"])),
        shading=float(rng.uniform(0.001, 0.006)),
    )  # fmt: skip
    signal = photograph(truth, table, rng, sensor)
    found = invert(signal, table, np.ones(truth.shape, bool), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    error = (found.thickness_nm - truth)[claimed]
    expected, slope = evaluate(table, truth.ravel())
    fit = Whitener(signal.variance.reshape(-1, 3), signal.correlation, sensor.shading).fit(expected * 0, expected, slope)
    limit = (1 / np.sqrt(fit.information)).reshape(truth.shape)[claimed]
    sharp = limit < LIMIT_CAP_NM
    return {
        "film": film,
        "substrate": substrate,
        "light": light,
        "claimed": float(claimed.mean()),
        "wrong": int(np.sum(np.abs(error) > np.maximum(10, 8 * np.minimum(limit, LIMIT_CAP_NM)))),
        "z": error / found.sigma_nm[claimed],
        "efficiency": float(np.sqrt(np.mean(error[sharp] ** 2) / np.mean(limit[sharp] ** 2))) if sharp.sum() > 500 else np.nan,
        "weak": float(np.mean(~sharp)) if error.size else 1.0,
    }


def line(name: str, rows: list[dict[str, object]]) -> str:
    """A row of the table over some set-ups."""
    z = np.concatenate([row["z"] for row in rows])
    middle = np.nanmedian([row["efficiency"] for row in rows])
    claimed, weak = (np.mean([row[key] for row in rows]) for key in ("claimed", "weak"))
    wrong = sum(row["wrong"] for row in rows) / max(z.size, 1)
    return (
        f"| {name} | {len(rows)} | {100 * claimed:.1f} % | {100 * wrong:.3f} % | {middle:.2f} "
        f"| {100 * np.mean(np.abs(z) <= 1.96):.1f} % | {100 * weak:.0f} % |"
    )


def main(count: int) -> None:
    """Measure the family and print it by film, substrate and lamp."""
    rows = [one(seed) for seed in range(count)]
    z = np.abs(np.concatenate([row["z"] for row in rows]))
    for level, k in ((0.5, 0.674), (0.8, 1.282), (0.95, 1.96), (0.99, 2.576)):
        low, high = binom.ppf([0.0005, 0.9995], count * INDEPENDENT, level) / (count * INDEPENDENT)
        print(f"coverage at {100 * level:.0f} %: {100 * np.mean(z <= k):.2f} % (band {100 * low:.2f} to {100 * high:.2f} %)")
    print(
        "\n| set-ups | number | claimed | wrong | error over limit | within 95 % | limit beyond 8 nm |"
        "\n|---|---|---|---|---|---|---|"
    )
    print(line("all", rows))
    for key, names in (("film", FILMS), ("substrate", dict.fromkeys(SUBSTRATES)), ("light", LIGHTS)):
        for name in names:
            members = [row for row in rows if row[key] == name]
            if members:
                print(line(f"{key} {name}", members))


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 200)
