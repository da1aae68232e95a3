"""TOML to types: one set-up, checked, with every fault reported at once."""

from sheenmap.recipe.read import read_recipe
from sheenmap.recipe.types import CameraSetup, NoiseSpec, Quantity, Recipe, Shot, ViewSetup

__all__ = ["CameraSetup", "NoiseSpec", "Quantity", "Recipe", "Shot", "ViewSetup", "read_recipe"]
