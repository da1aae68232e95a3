"""docs/recipe.md is the reference: it has every key that a recipe can have, and no other."""

import re
from pathlib import Path
from typing import Any

import pytest

from recipes import changed, dumped, every_key, faults_of, put_files
from sheenmap.recipe import read_recipe
from sheenmap.recipe.reader import Reader
from sheenmap.uniformity import FORMULAS

PAGE = Path(__file__).parents[2] / "docs" / "recipe.md"
ROW = re.compile(r"^\| `([^`]+)` \|", re.MULTILINE)
TABLES = {"stack", "light", "camera", "view", "region", "sites", "tolerance", "shot"}
SHOT_PARTS = re.compile(r"^shot\[\]\.(light|camera|view)\.")
SURFACE = "camera.blank.surface."  # its keys are those of [stack]


def asked_keys(folder: Path, monkeypatch: pytest.MonkeyPatch) -> set[str]:
    """Every key that the reader asks for while it reads recipes that have them all."""
    asked: set[str] = set()
    plain = Reader.raw

    def noting(reader: Reader, key: str) -> Any:
        asked.add(re.sub(r"\[\d+\]", "[]", reader.name(key)))
        return plain(reader, key)

    monkeypatch.setattr(Reader, "raw", noting)
    surface = {"substrate": "Si"}
    for recipe in (*every_key(), changed(every_key()[0], "camera.blank.surface", surface)):
        assert faults_of(folder, recipe) == []
    return {key for key in asked if not SHOT_PARTS.match(key) and not key.startswith(SURFACE)}


def parents(keys: set[str]) -> set[str]:
    """Tables that hold a key of the set; their own rows are the keys in them."""
    return {key.rsplit(".", 1)[0].removesuffix("[]") for key in keys if "." in key}


def test_every_key_stands_in_the_reference_and_no_other(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    put_files(tmp_path)
    known = asked_keys(tmp_path, monkeypatch)
    written = set(ROW.findall(PAGE.read_text(encoding="utf-8")))
    assert written - known == set()
    assert known - written - parents(written) == set()


def test_the_examples_between_them_name_every_key_that_is_asked_for(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    put_files(tmp_path)
    known = asked_keys(tmp_path, monkeypatch)
    assert len(known) > 70
    assert known >= TABLES


def test_the_shortest_recipe_of_the_reference_can_be_read(tmp_path: Path) -> None:
    put_files(tmp_path)
    block = re.search(r"```toml\n(.*?)```", PAGE.read_text(encoding="utf-8"), re.DOTALL)
    assert block is not None
    path = tmp_path / "shortest.toml"
    path.write_text(block[1])
    assert read_recipe(path).shots[0].camera.blank_frames == (tmp_path / "blank.png",)


@pytest.mark.parametrize("formula", sorted(FORMULAS))
def test_every_formula_may_stand_in_a_recipe(tmp_path: Path, formula: str) -> None:
    tolerance = {"target_nm": 500, "plus_nm": 5, "formula": formula}
    text = dumped(every_key()[2] | {"tolerance": tolerance})
    assert faults_of(tmp_path, text) == []
