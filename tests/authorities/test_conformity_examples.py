"""Conformance probability and decisions with guard bands: JCGM 106:2012, 7.4, and rows computed with its formula."""

import csv
from pathlib import Path

import numpy as np
import pytest

from sheenmap.uniformity import conformance
from sheenmap.uniformity.conformity import Limits, acceptance_zone, is_accepted, proof

TABLE = Path(__file__).parent / "conformity_examples.csv"
ROWS = list(csv.DictReader(line for line in TABLE.read_text(encoding="utf-8").splitlines() if not line.startswith("#")))
CASES = pytest.mark.parametrize("row", ROWS, ids=[row["case"] for row in ROWS])


def limits(row):
    return Limits(low=float(row["lower_limit"] or -np.inf), high=float(row["upper_limit"] or np.inf))


@CASES
def test_conformance_probability(row):
    found = float(conformance(float(row["y"]), float(row["u"]), limits(row)))
    assert found == pytest.approx(float(row["conformance_probability"]), abs=1e-9)  # ten decimals are printed


@CASES
def test_shared_risk_accepts_inside_the_limits(row):
    assert is_accepted(float(row["y"]), limits(row)) == (row["shared_risk"] == "accept")


@CASES
def test_guarded_acceptance_is_inside_the_drawn_in_limits(row):
    zone = acceptance_zone(float(row["u"]), limits(row), float(row["guard_in_u"]))
    assert is_accepted(float(row["y"]), zone) == (row["guarded_acceptance"] == "accept")


@CASES
def test_acceptance_zone(row):
    zone = acceptance_zone(float(row["u"]), limits(row), float(row["guard_in_u"]))
    assert zone.low == pytest.approx(float(row["acceptance_low"] or -np.inf), abs=1e-9)
    assert zone.high == pytest.approx(float(row["acceptance_high"] or np.inf), abs=1e-9)


@pytest.mark.parametrize("row", [row for row in ROWS if row["proof_both_ways"]], ids=lambda row: row["case"])
def test_proof_counts_uncertainty_against_whoever_has_to_prove(row):
    proven = proof(float(row["y"]), float(row["u"]), limits(row), float(row["guard_in_u"]))
    assert proven == row["proof_both_ways"].removesuffix(" proven")
