"""A small set-up, built by hand: oxide on silicon under a white LED."""

from dataclasses import replace
from pathlib import Path

import pytest

from sheenmap.camera import Encoding
from sheenmap.catalogue import camera, lamp, material
from sheenmap.charts import chart_data
from sheenmap.optics import Layer, Stack
from sheenmap.recipe.types import CameraSetup, Quantity, Recipe, Shot, ViewSetup
from sheenmap.wafer import RegionSpec


def build(film="SiO2", substrate="Si", *, search_nm=(0.0, 600.0), light="LED-B3", blank=True, title="a bench", **view):
    base = material(substrate)
    medium = material("air")
    stack = Stack(medium=medium, layers=(Layer(index=material(film), thickness_nm=None, name="film"),), substrate=base)
    surface = Stack(medium=medium, layers=(), substrate=base) if blank else None
    setup = CameraSetup(response=camera("generic"), encoding=Encoding(), blank_surface=surface)
    shot = Shot(light=lamp(light), camera=setup, view=replace(ViewSetup(), **view))
    return Recipe(
        path=Path("bench.toml"), title=title, text="", digest="0123456789abcdef" * 4, stack=stack, search_nm=search_nm,
        index_scale=Quantity(value=1.0), shots=(shot,), region=RegionSpec(),
    )  # fmt: skip


@pytest.fixture(scope="session")
def bench():
    return build


@pytest.fixture(scope="session")
def oxide():
    return build()


@pytest.fixture(scope="session")
def chart(oxide):
    return chart_data(oxide, step_nm=2.0)
