"""Thickness maps of thin films from the interference colours of a photograph.

The names below load their room only when first used, so that ``import sheenmap`` costs next to nothing.
"""

from importlib import import_module
from typing import Any

__version__ = "0.1.0"

_HOMES = {
    "measure": "sheenmap.measure",
    "Measurement": "sheenmap.measure",
    "read_recipe": "sheenmap.recipe",
    "Recipe": "sheenmap.recipe",
    "write_measurement": "sheenmap.storage",
}

__all__ = ["__version__", *_HOMES]


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module 'sheenmap' has no attribute {name!r}")
    return getattr(import_module(_HOMES[name]), name)
