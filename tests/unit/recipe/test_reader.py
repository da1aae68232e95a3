"""The walker over a table: full names, what was found, what is allowed."""

from typing import Any

import pytest

from sheenmap.errors import CurveError, Fault, SheenmapError, UnknownNameError
from sheenmap.recipe.reader import Reader, as_number, shown


def reader(table: dict[str, Any], path: str = "view") -> Reader:
    return Reader(table, path, [])


def test_names_are_full_and_quoted_where_toml_quotes_them() -> None:
    assert reader({}).name("aperture") == "view.aperture"
    assert reader({}, "").name("title") == "title"
    assert reader({}).name("odd key\n") == 'view."odd key\\n"'


def test_a_number_outside_its_limits_is_a_fault_and_gives_the_default() -> None:
    walker = reader({"angle": 95})
    assert walker.number("angle", 7.0, low=0, high=90, open_high=True) == 7.0
    assert walker.faults == [Fault(key="view.angle", found="found 95", allowed="0 up to, not including, 90")]


@pytest.mark.parametrize("value", [True, "3", [3], float("nan"), float("inf"), 10**400, {}])
def test_what_is_no_finite_number_is_none(value: object) -> None:
    assert as_number(value) is None


@pytest.mark.parametrize(("value", "is_fault"), [(0, True), (0.1, False), (1, True), (0.999, False)])
def test_open_ends_leave_out_the_ends(value: float, is_fault: bool) -> None:
    walker = reader({"share": value})
    walker.number("share", None, low=0, high=1, open_low=True, open_high=True)
    assert bool(walker.faults) is is_fault


def test_numbers_count() -> None:
    walker = reader({"a": [1, 2], "b": [1], "c": [1, "2"], "d": 3})
    assert walker.numbers("a", 2) == (1, 2)
    assert [walker.numbers(key, 2) for key in "bcd"] == [None, None, None]
    assert [fault.key for fault in walker.faults] == ["view.b", "view.c", "view.d"]


def test_a_misspelt_word_gets_the_nearest() -> None:
    walker = reader({"shape": "dsic"})
    assert walker.choice("shape", ("frame", "disc"), "frame") == "frame"
    assert walker.faults[0].hint == "did you mean disc?"
    assert walker.faults[0].allowed == "frame, disc"


def test_tables_in_lists_are_numbered() -> None:
    walker = reader({"layers": [{}, {"materail": 1}]}, "stack")
    inner = walker.tables_of("layers")[1]
    inner.text("material", None)
    inner.finish()
    assert walker.faults == [
        Fault(key="stack.layers[1].materail", found="unknown key", allowed="material", hint="did you mean material?")
    ]


def test_a_key_that_is_missing_because_it_is_misspelt_is_one_fault() -> None:
    walker = reader({"spectrm": "D65"}, "light")
    walker.raw("spectrum")
    walker.require("spectrum", "a lamp")
    walker.finish()
    assert [(fault.key, fault.found) for fault in walker.faults] == [("light.spectrm", "unknown key")]


def test_what_is_not_supported_is_not_offered_as_allowed() -> None:
    walker = reader({"die": {}, "shap": "disc"}, "region")
    walker.raw("shape")
    walker.not_supported(["die"])
    walker.finish()
    assert [(fault.key, fault.found, fault.allowed) for fault in walker.faults] == [
        ("region.die", "not supported yet", ""),
        ("region.shap", "unknown key", "shape"),
    ]


@pytest.mark.parametrize(
    ("error", "expected"),
    [
        (UnknownNameError("lamp", "D66", ["D65"]), Fault(key="light.s", found="found x", allowed="y", hint="did you mean D65?")),
        (CurveError("one row; allowed: two"), Fault(key="light.s", found="found x: one row", allowed="two")),
        (SheenmapError("no database here"), Fault(key="light.s", found="found x: no database here")),
    ],
)
def test_complaints_of_other_rooms_become_faults(error: Exception, expected: Fault) -> None:
    def make() -> None:
        raise error

    walker = reader({}, "light")
    walker.attempt("s", make, found="x", allowed="y")
    assert walker.faults == [expected]


def test_values_are_shown_short_and_on_one_line() -> None:
    assert shown("a\nb\x1b[31m") == '"a\\nb\\x1b[31m"'
    assert shown(True) == "true"
    assert len(shown("x" * 500)) == 80
    assert shown(16**5000) == "a number far too large"
