"""Recipes for tests: as nested dictionaries, written as TOML beside the files that they name."""

import copy
import json
from pathlib import Path
from typing import Any

import cv2
import numpy as np

from sheenmap.errors import Fault, RecipeError
from sheenmap.recipe import read_recipe

GRID_NM = range(380, 781, 10)
MATERIAL_CSV = "wavelength_nm,n,k\n" + "".join(f"{nm},{1.5 + 5000 / nm**2:.6f},0\n" for nm in GRID_NM)
LAMP_CSV = "# a lamp\nwavelength_nm,power\n" + "".join(f"{nm},{nm / 500:.4f}\n" for nm in GRID_NM)
CAMERA_CSV = "wavelength_nm,red,green,blue\n" + "".join(f"{nm},0.{nm},0.5,{800 - nm}\n" for nm in GRID_NM)
SURFACE_CSV = "wavelength_nm,reflectance\n380,0.9\n780,0.8\n"
ENCODING_CSV = "code,linear\n0,0\n128,0.2\n255,1\n"
SITES_CSV = "x_mm,y_mm\n0,0\n# the rim\n-30.5,12\n"
CSVS = {
    "film.csv": MATERIAL_CSV,
    "lamp.csv": LAMP_CSV,
    "camera.csv": CAMERA_CSV,
    "tile.csv": SURFACE_CSV,
    "curve.csv": ENCODING_CSV,
    "sites.csv": SITES_CSV,
}
PICTURES = ("blank.png", "blank2.png", "dark.png", "stray.png", "angle.tif", "shot.png")


def bench() -> dict[str, Any]:
    """The shortest recipe that describes a bench with a camera; names no file."""
    return {
        "stack": {"layers": [{"name": "oxide", "material": "SiO2", "search_nm": [0, 800]}], "substrate": "Si"},
        "light": {"spectrum": "D65"},
        "camera": {"response": "cie-1931", "encoding": "linear"},
    }


def every_key() -> tuple[dict[str, Any], ...]:
    """Recipes without a fault that between them use every key there is; the files are those of ``put_files``."""
    film = {"name": "film", "material": "film.csv", "search_nm": [100, 900], "index_scale": {"value": 1.01, "u": 0.004}}
    cap = {"name": "cap", "material": 1.38, "thickness_nm": 20, "rough_nm": 2, "index_scale": 0.98}
    cap["fraction"] = {"material": "air", "volume": 0.1}
    disc = {
        "title": "every key",
        "allow_extrapolation": False,
        "stack": {
            "medium": "air",
            "layers": [cap, film],
            "substrate": "BK7",
            "substrate_rough_nm": 1.5,
            "back": {"medium": "air", "thickness_mm": 0.7},
        },
        "light": {"spectrum": "lamp.csv"},
        "camera": {
            "response": "camera.csv",
            "encoding": "curve.csv",
            "dark": "dark.png",
            "stray": ["stray.png"],
            "blank": {"photo": ["blank.png", "blank2.png"], "surface": "BK7"},
            "noise": {"full_well_e": 12000, "read_noise_e": 4},
            "level_u": 0.01,
            "colour_u": 0.004,
            "shading_u": 0.002,
        },
        "view": {"angle_deg": {"value": 30, "u": 0.5}, "aperture": 0.1, "polarisation": "s"},
        "region": {"shape": "disc", "diameter_mm": 200, "edge_exclusion_mm": 3, "width_mm": 260, "notch": "left"},
        "sites": {"layout": "rings-49", "radius_mm": 2},
        "tolerance": {
            "target_nm": 500,
            "plus_nm": 10,
            "minus_nm": 8,
            "nonuniformity_percent": 1.5,
            "formula": "half-range over mean",
            "rule": "shared risk",
            "risk": 0.1,
            "scope": "area",
            "max_defect_percent": 2,
            "min_claimed_percent": 90,
            "max_outside_percent": 3,
        },
        "shot": [
            {
                "photo": "shot.png",
                "name": "under A",
                "light": {"spectrum": "A"},
                "camera": {"blank": {"photo": "blank2.png", "surface": "tile.csv"}},
                "view": {"camera_mm": [0, -50, 300]},
            }
        ],
    }
    masked = bench() | {
        "view": {"angle_deg": {"photo": "angle.tif", "u": 0.2}},
        "region": {"shape": "mask", "mask": "mask.png", "width_mm": 12},
        "sites": {"layout": "grid 2.5"},
    }
    cornered = bench() | {"region": {"shape": "polygon", "points": [[0, 0], [90, 0], [45.5, 60]]}}
    return disc, masked, cornered


def put_files(folder: Path) -> None:
    """Every file that the recipes here name."""
    for name, content in CSVS.items():
        (folder / name).write_text(content, encoding="utf-8")
    for name in PICTURES:
        (folder / name).write_bytes(b"looked for, not opened")
    mask = np.zeros((6, 8), np.uint8)
    mask[1:4, 2:6] = 255
    (folder / "mask.png").write_bytes(cv2.imencode(".png", mask)[1].tobytes())


def changed(table: dict[str, Any], path: str, value: Any) -> dict[str, Any]:
    """A copy in which the key of that path ("stack.layers.0.material") is ``value``; None takes it out."""
    whole = copy.deepcopy(table)
    at: Any = whole
    *way, last = path.split(".")
    for step in way:
        at = at[int(step)] if isinstance(at, list) else at.setdefault(step, {})
    if value is None:
        del at[last]
    elif isinstance(at, list):
        at[int(last)] = value
    else:
        at[last] = value
    return whole


def dumped(table: dict[str, Any]) -> str:
    """TOML text of a nested dictionary, one line for each key of the root."""
    return "".join(f"{_key(key)} = {_value(value)}\n" for key, value in table.items())


def _key(key: str) -> str:
    return json.dumps(key)


def _value(value: Any) -> str:
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{_key(key)} = {_value(item)}" for key, item in value.items()) + " }"
    if isinstance(value, list):
        return "[" + ", ".join(_value(item) for item in value) + "]"
    if isinstance(value, float) and value != value:
        return "nan"
    return json.dumps(value)


def write(folder: Path, recipe: dict[str, Any] | str | bytes) -> Path:
    """The recipe's file in that folder."""
    path = folder / "bench.toml"
    text = dumped(recipe) if isinstance(recipe, dict) else recipe
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


def faults_of(folder: Path, recipe: dict[str, Any] | str | bytes) -> list[Fault]:
    """Every fault of a recipe; none when it can be read."""
    try:
        read_recipe(write(folder, recipe))
    except RecipeError as error:
        return list(error.faults)
    return []
