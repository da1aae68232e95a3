"""Stacks against the table of the reference library tmm 0.2.0, and against formulas worked on paper."""

import csv
from itertools import groupby
from pathlib import Path

import numpy as np
import pytest

from films import by_tmm, layer, stack
from sheenmap.catalogue import material
from sheenmap.optics import Stack, View, bare_reflectance, fold, reflectance, transmittance
from sheenmap.optics.back import coated_far_side, through_back, with_back
from sheenmap.optics.film import both_sides, round_trips

HERE = Path(__file__).parent
TABLE_DIGITS = 1e-9  # the table has 12 digits


def table(name):
    with (HERE / name).open(encoding="utf-8") as file:
        return list(csv.DictReader(line for line in file if not line.startswith("#")))


def numbers(text):
    return np.array(text.split(";"), dtype=float)


ROWS = {case: list(rows) for case, rows in groupby(table("multilayer_checks.csv"), key=lambda row: row["case_id"])}
COHERENT = [case for case, rows in ROWS.items() if rows[0]["kind"] == "coherent"]
BARE_BACKS = ["I01", "I02", "I03", "I04", "I06"]


def given(row, searched=None, back=False):
    """Stack of a row; ``searched`` is the layer that is taken as unknown, whose thickness is given back too."""
    indices, depths_nm = numbers(row["n_list"]) - 1j * numbers(row["k_list"]), numbers(row["d_nm_list"])
    last = -2 if back else -1
    layers = [
        layer(n, None if j == searched else d) for j, (n, d) in enumerate(zip(indices[1:last], depths_nm[1:last], strict=True))
    ]
    more = {"back": indices[-1], "back_mm": depths_nm[-2] / 1e6} if back else {}
    whole = stack(indices[0], *layers, on=indices[last], **more)
    return whole, np.array([0.0 if searched is None else depths_nm[1 + searched]])


def conditions(row):
    angle_deg, wavelength_nm = float(row["angle_deg"]), np.array([float(row["wavelength_nm"])])
    return wavelength_nm, View(angle_deg=angle_deg, polarisation=row["polarisation"])


def test_the_table_is_whole():
    assert sum(len(rows) for rows in ROWS.values()) == 870
    assert len(COHERENT) == 23


@pytest.mark.parametrize("case", COHERENT + BARE_BACKS)
def test_powers_agree_with_tmm_whichever_layer_is_searched(case):
    back = case in BARE_BACKS
    for row in ROWS[case]:
        count = len(row["n_list"].split(";")) - (3 if back else 2)
        for searched in [None, *range(count)]:
            whole, thickness_nm = given(row, searched, back)
            at = (whole, thickness_nm, *conditions(row))
            assert reflectance(*at)[0, 0] == pytest.approx(float(row["R"]), abs=TABLE_DIGITS)
            assert transmittance(*at)[0, 0] == pytest.approx(float(row["T"]), abs=TABLE_DIGITS)


@pytest.mark.parametrize("case", COHERENT)
def test_amplitudes_agree_with_tmm(case):
    for row in ROWS[case]:
        whole, _ = given(row)
        wavelength_nm, view = conditions(row)
        angle_rad = np.deg2rad(view.angle_deg)
        folded = fold(whole, wavelength_nm, angle_rad, view.polarisation)
        r, t = folded.upper.r_down[0], folded.upper.t_down[0]
        if view.polarisation == "p":  # ours are ratios of tangential fields, the table's of whole ones
            n = numbers(row["n_list"]) - 1j * numbers(row["k_list"])
            r, t = -r, t * np.cos(angle_rad) / (folded.q_substrate[0] / n[-1])
        for ours, name in ((r, "r"), (t, "t")):
            theirs = complex(float(row[name + "_re"]), float(row[name + "_im"])).conjugate()  # written for n + ik
            assert ours == pytest.approx(theirs, abs=TABLE_DIGITS)


def test_films_on_both_faces_agree_with_tmm():
    for row in ROWS["I05"]:
        n = numbers(row["n_list"]) - 1j * numbers(row["k_list"])
        depths_nm = numbers(row["d_nm_list"])
        wavelength_nm, view = conditions(row)
        angle_rad = np.deg2rad(view.angle_deg)
        front = fold(stack(n[0], layer(n[1]), on=n[2]), wavelength_nm, angle_rad, view.polarisation)
        inside_rad = np.arcsin(n[0].real * np.sin(angle_rad) / n[2].real)
        rear = fold(stack(n[2], layer(n[3], depths_nm[3]), on=n[4]), wavelength_nm, inside_rad, view.polarisation)
        far = coated_far_side(front, rear.upper, rear.eta_substrate, depth_nm=depths_nm[2], wavelength_nm=wavelength_nm)
        ((_, round_trip),) = round_trips(depths_nm[1:2], front.phase_per_nm)
        film = both_sides(front, round_trip)
        assert with_back(front, film, far)[0][0, 0] == pytest.approx(float(row["R"]), abs=TABLE_DIGITS)
        assert through_back(front, film, far)[0, 0] == pytest.approx(float(row["T"]), abs=TABLE_DIGITS)


HAND = {row["id"]: row for row in table("hand_formulas.csv")}
GREEN_NM = np.array([550.0])
SLAB = stack(1, layer(1.5), on=1)  # coherent: a thin sheet, free on both sides
GLASS = stack(1, on=1.5)


def bare(whole, wavelength_nm=550.0, **view):
    return bare_reflectance(whole, np.array([wavelength_nm]), View(**view))[0]


def thin_sheet():
    return reflectance(SLAB, np.linspace(0, 550 / 3, 2001), GREEN_NM, View())[:, 0]  # one period, its half a node


def first_extremum(n, wavelength_nm, angle_deg=0.0):
    """Thickness of the first extremum after zero of a free film, from ours alone."""
    fine_nm = np.linspace(0, 400, 400_001)
    seen = reflectance(stack(1, layer(n), on=1), fine_nm, np.array([wavelength_nm]), View(angle_deg=angle_deg, polarisation="s"))
    return fine_nm[1 + np.flatnonzero(np.diff(np.sign(np.diff(seen[:, 0]))))[0]]


def mirror():
    quarters = [layer(n, 550 / 4 / n) for n in [2.35, 1.46] * 5 + [2.35]]
    return stack(1, *quarters, on=1.52)


HALF_WAVES = stack(1, layer(2.1, 550 / 2 / 2.1), on=1.52)
MEASURED = {
    "H01": lambda: bare(GLASS),
    "H02": lambda: bare(stack(1, on=1.5, back=1)),
    "H03": lambda: transmittance(stack(1, on=1.5, back=1), np.zeros(1), GREEN_NM, View())[0, 0],
    "H04": lambda: thin_sheet().max(),
    "H05": lambda: 4 * bare(GLASS),
    "H06": lambda: thin_sheet().min(),
    "H07": lambda: bare(stack(1, layer(1.38, 550 / 4 / 1.38), on=1.52)),
    "H09": lambda: bare(HALF_WAVES),
    "H11": lambda: bare(GLASS, angle_deg=float(HAND["H10"]["expected"]), polarisation="p"),
    "H12": lambda: bare(GLASS, angle_deg=float(HAND["H10"]["expected"]), polarisation="s"),
    "H14": lambda: bare(stack(1.5, on=1), angle_deg=60.0),
    "H15": lambda: bare(mirror()),
    "H21": lambda: bare(stack(1, on=4.0 - 0.05j)),
    "H22": lambda: reflectance(stack(1, layer(1.7), on=1), np.zeros(1), GREEN_NM, View())[0, 0],
}


@pytest.mark.parametrize("row", list(MEASURED))
def test_agrees_with_the_formula_on_paper(row):
    assert MEASURED[row]() == pytest.approx(float(HAND[row]["expected"]), abs=float(HAND[row]["abs_tolerance"]))


def test_film_of_the_root_of_the_glass_reflects_nothing():
    n = float(HAND["H08"]["expected"])
    assert bare(stack(1, layer(n, 550 / 4 / n), on=1.52)) == pytest.approx(0, abs=1e-25)  # squares of 1e-13, the table's digits


def test_brewster_and_critical_angles_are_where_paper_says():
    brewster, critical = float(HAND["H10"]["expected"]), float(HAND["H13"]["expected"])
    assert all(bare(GLASS, angle_deg=brewster + d, polarisation="p") > 1e-8 for d in (-0.05, 0.05))
    inside = stack(1.5, on=1)
    assert bare(inside, angle_deg=critical + 1e-6) == pytest.approx(1, abs=1e-12)
    assert bare(inside, angle_deg=critical - 1e-6) < 1 - 1e-4


@pytest.mark.parametrize(("row", "angle_deg"), [("H16", 0.0), ("H17", 45.0)])
def test_colour_repeats_after_the_period_on_paper(row, angle_deg):
    period_nm = float(HAND[row]["expected"])
    on_silicon = stack(1, layer(1.46), on=4.0)
    start_nm = np.linspace(0, period_nm, 17)
    one, next_one = (
        reflectance(on_silicon, start_nm + shift, GREEN_NM, View(angle_deg=angle_deg, polarisation="s"))
        for shift in (0, period_nm)
    )
    assert next_one == pytest.approx(one, abs=1e-11)  # the table's period has 12 digits


def test_first_minimum_is_a_quarter_wave():
    fine_nm = np.linspace(0, 180, 180_001)
    seen = reflectance(stack(1, layer(1.46), on=4.0), fine_nm, GREEN_NM, View())[:, 0]
    assert fine_nm[seen.argmin()] == pytest.approx(float(HAND["H18"]["expected"]), abs=1e-3)  # the grid's step


def test_neighbouring_maxima_give_the_thickness_on_paper():
    thickness_nm = np.array([float(HAND["H19"]["expected"])])
    film = stack(1, layer(1.46), on=1)
    low, middle, high = reflectance(film, thickness_nm, np.array([500.0, 1 / (0.5 / 500 + 0.5 / 600), 600.0]), View())[0]
    # 2 n d / L = 6 and 5 there: a free film is absent at both, and brightest half way between them
    assert (low, high) == pytest.approx((0, 0), abs=1e-20)
    assert middle == pytest.approx(((1.46**2 - 1) / (1.46**2 + 1)) ** 2, abs=1e-12)


def test_absorption_coefficient_is_four_pi_k_over_the_wavelength():
    per_um = float(HAND["H20"]["expected"])
    matched = stack(1.5, layer(1.5 - 0.05j), on=1.5)
    one, two = transmittance(matched, np.array([40_000.0, 41_000.0]), np.array([500.0]), View())[:, 0]
    assert np.log(one / two) == pytest.approx(per_um, rel=1e-9)


def test_equal_colours_of_nitride_and_oxide_stand_as_their_indices():
    ratio = float(HAND["H23"]["expected"])
    assert first_extremum(2.02, 550.0) / first_extremum(1.46, 550.0) == pytest.approx(ratio, abs=3e-5)  # steps of 0.001 nm


def test_a_glass_surface_reflects_about_four_percent_at_any_wavelength():
    """Common practice: 4 % per glass surface."""
    window = Stack(medium=material("air"), layers=(), substrate=material("N-BK7"))
    assert bare_reflectance(window, np.linspace(400, 700, 31), View()) == pytest.approx(0.042, abs=0.002)


def test_a_thin_glass_swings_between_nothing_and_fifteen_percent():
    """Common practice says 0 to 16 %, which is two beams of 4 % each; all beams together give 14.79 %."""
    seen = thin_sheet()
    assert seen.min() == pytest.approx(0, abs=1e-12)
    assert 0.14 < seen.max() < 0.16


def test_black_film_of_soap_reflects_a_fifth_of_a_percent_at_ten_nanometres():
    """Ten nm of water reflect 0.2 %, and at best 8 % (worked with the two-beam formula in any optics text)."""
    soap = stack(1, layer(1.335), on=1)
    assert by_tmm(soap, 10.0, 550.0, 0.0, "s")[0] == pytest.approx(
        reflectance(soap, np.array([10.0]), GREEN_NM, View())[0, 0], abs=1e-15
    )
    assert reflectance(soap, np.array([10.0]), GREEN_NM, View())[0, 0] == pytest.approx(0.002, abs=5e-4)
