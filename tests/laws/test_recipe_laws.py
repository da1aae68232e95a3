"""What holds for every recipe: a misspelt key is reported by its own path, and nothing in a recipe ends in a traceback."""

import copy
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from recipes import every_key, faults_of, put_files

RECIPES = every_key()


def keys_of(table: Any, way: tuple[str | int, ...] = ()) -> Iterator[tuple[str | int, ...]]:
    items = table.items() if isinstance(table, dict) else enumerate(table) if isinstance(table, list) else ()
    for step, value in items:
        if isinstance(step, str):
            yield (*way, step)
        yield from keys_of(value, (*way, step))


KEYS = [(number, way) for number, recipe in enumerate(RECIPES) for way in keys_of(recipe)]


def full_name(way: tuple[str | int, ...]) -> str:
    return "".join(f"[{step}]" if isinstance(step, int) else f".{step}" for step in way).lstrip(".")


def holder(table: Any, way: tuple[str | int, ...]) -> Any:
    for step in way[:-1]:
        table = table[step]
    return table


@st.composite
def slips(draw: st.DrawFn) -> tuple[dict[str, Any], tuple[str | int, ...], str, str]:
    """A recipe with one key misspelt: a letter lost, doubled or swapped with the next."""
    number, way = draw(st.sampled_from(KEYS))
    recipe = copy.deepcopy(RECIPES[number])
    table, right = holder(recipe, way), str(way[-1])
    at = draw(st.integers(0, len(right) - 1))
    wrong = draw(st.sampled_from([right[:at] + right[at + 1 :], right[:at] + right[at] + right[at:], _swapped(right, at)]))
    wrong = wrong if wrong != right and wrong else right + right[-1]
    renamed = {wrong if key == right else key: value for key, value in table.items()}
    table.clear()
    table.update(renamed)
    return recipe, (*way[:-1], wrong), right, wrong


def _swapped(word: str, at: int) -> str:
    return word[:at] + word[at : at + 2][::-1] + word[at + 2 :]


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    place = tmp_path_factory.mktemp("bench")
    put_files(place)
    return place


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(slip=slips())
def test_a_misspelt_key_is_reported_by_exactly_its_path(folder: Path, slip: Any) -> None:
    recipe, way, right, wrong = slip
    unknown = [fault for fault in faults_of(folder, recipe) if fault.found == "unknown key"]
    assert [fault.key for fault in unknown] == [full_name(way)]
    if len(wrong) > 2:  # of two letters or fewer, any key is as near
        assert unknown[0].hint.startswith("did you mean ")
    assert right in unknown[0].allowed.split(", ")


ANYTHING = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=8) | st.sampled_from(["Si", "tile.csv", "."]),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.sampled_from(["material", "photo", "value", "u"]), inner),
    max_leaves=4,
)


@settings(max_examples=250, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(key=st.sampled_from(KEYS), value=ANYTHING)
def test_whatever_stands_at_a_key_it_is_read_or_it_is_a_fault(folder: Path, key: Any, value: Any) -> None:
    number, way = key
    recipe = copy.deepcopy(RECIPES[number])
    holder(recipe, way)[way[-1]] = _as_toml(value)
    faults_of(folder, recipe)  # anything but a RecipeError comes through and fails the test


def _as_toml(value: Any) -> Any:
    """TOML has no null; infinities are left to the rows of faults."""
    if isinstance(value, dict):
        return {key: _as_toml(item) for key, item in value.items()}
    if isinstance(value, list):
        return [_as_toml(item) for item in value]
    return 0 if value is None or value in (float("inf"), float("-inf")) else value
