import numpy as np
import pytest
from scipy.special import ndtri

from sheenmap.errors import SettingsError, UnknownNameError
from sheenmap.flags import AMBIGUOUS, OFF_CURVE
from sheenmap.uniformity import PixelEvidence, SiteReading, Statistics, Tolerance, judge, tolerance_faults
from sheenmap.uniformity.conformity import guard_factor


def site(number, value, u=0.5, local=None, status="measured"):
    return SiteReading(
        number=number, x_mm=10.0 * number, y_mm=0.0, x_px=5.0, y_px=5.0, thickness_nm=value, u_nm=None if value is None else u,
        u_local_nm=None if value is None else (u if local is None else local), pixels=13, claimed=13, status=status,
    )  # fmt: skip


def empty(number):
    return site(number, None, status="not measured: 2 of 13 pixels are claimed, most are ambiguous")


def stats(mean=500.0, u=0.5, pixels=1000, claimed=1000, **counts):
    return Statistics(
        pixels=pixels, claimed=claimed, mean_nm=mean if claimed else None, median_nm=mean, sd_nm=1.0, sd_noise_corrected_nm=1.0,
        u_mean_nm=u if claimed else None, percentiles={}, **counts,
    )  # fmt: skip


def tolerance(**settings):
    return Tolerance(**{"target_nm": 500.0, "plus_nm": 10.0, "minus_nm": 10.0, **settings})


def verdict(readings=(), statistics=None, *, u_common=0.0, pixels=None, **settings):
    return judge(tolerance(**settings), readings, statistics or stats(), u_common_nm=u_common, pixels=pixels)


GOOD = [site(1, 500.0), site(2, 503.0)]


def test_all_sites_well_inside_pass():
    found = verdict(GOOD)
    assert found.outcome == "passed" and found.sentence == "Passed: All 2 sites are within 490 to 510 nm."


def test_a_site_far_outside_fails_and_is_named():
    found = verdict([*GOOD, site(3, 514.0)])
    assert found.outcome == "failed" and found.sentence == "Failed: 1 of 3 sites are outside 490 to 510 nm."
    assert found.checks[0].places == ("site 3 (x 30.0 mm, y 0.0 mm): 514.00 nm (u 0.5 nm)",)


@pytest.mark.parametrize("value", [509.5, 510.5])
def test_near_a_limit_nothing_is_decided_when_guarded(value):
    found = verdict([*GOOD, site(3, value)])
    assert found.outcome == "not decidable" and "1 of 3 sites are too near a limit" in found.sentence


@pytest.mark.parametrize(("value", "outcome"), [(509.5, "passed"), (510.0, "passed"), (510.5, "failed")])
def test_shared_risk_takes_the_value_for_the_truth(value, outcome):
    assert verdict([*GOOD, site(3, value)], rule="shared risk").outcome == outcome


def test_guard_band_follows_the_risk():
    value = 510 - 2.0 * 0.5
    assert guard_factor(0.05) == pytest.approx(1.645, abs=1e-3)  # JCGM 106, one-sided 5 %
    assert verdict([site(1, value)], risk=0.05).outcome == "passed"
    assert verdict([site(1, value)], risk=0.01).outcome == "not decidable"


def test_among_many_sites_one_a_little_outside_proves_nothing():
    """2 u outside: 2.3 % to conform, proof against a single site, but among 49 at their limit one reads so by chance."""
    assert verdict([site(1, 511.0)]).outcome == "failed"
    assert verdict([site(i + 1, 500.0) for i in range(48)] + [site(49, 511.0)]).outcome == "not decidable"
    assert verdict([site(i + 1, 500.0) for i in range(48)] + [site(49, 511.7)]).outcome == "failed"


def test_unmeasured_site_keeps_a_part_from_passing():
    found = verdict([*GOOD, empty(3)])
    assert found.sentence == "Not decidable: 1 of 3 sites are not measured: 3."
    assert found.checks[0].places[0].endswith("most are ambiguous")


def test_unmeasured_site_does_not_save_a_part_from_failing():
    assert verdict([site(1, 520.0), empty(2)]).outcome == "failed"


@pytest.mark.parametrize("rule", ["guarded", "shared risk"])
def test_nothing_measured_is_not_decidable(rule):
    assert verdict([empty(1)], stats(claimed=0), rule=rule).outcome == "not decidable"


def test_no_sites_says_what_to_add():
    assert "add [sites]" in verdict().sentence


def test_uncertainty_wider_than_the_tolerance_says_so():
    found = verdict([site(1, 500.0, u=10.0)])
    assert found.outcome == "not decidable" and "Not decidable with this set-up" in found.checks[0].reason


def test_many_sites_each_inside_may_be_too_many_together():
    """A site at 1.8 u inside conforms with 96 %; 49 such independent ones all conform with 17 %."""
    one, many = ([site(i + 1, 510 - 0.9) for i in range(n)] for n in (1, 49))
    assert verdict(one).outcome == "passed" and verdict(many).outcome == "not decidable"
    assert verdict(many).checks[0].conformance == pytest.approx(0.964**49, abs=0.01)


def test_sites_that_share_their_error_stand_and_fall_together():
    many = [site(i + 1, 510 - 0.9, u=0.5, local=0.001) for i in range(49)]
    assert verdict(many, u_common=0.5).outcome == "passed"


def test_one_sided_tolerance_has_one_limit():
    found = verdict([site(1, 900.0)], plus_nm=None)
    assert found.outcome == "passed" and found.checks[0].high is None and "at least 490 nm" in found.sentence


def test_mean_is_judged_with_its_own_uncertainty():
    assert verdict((), stats(508.0, 0.5), scope="mean").outcome == "passed"
    assert verdict((), stats(508.0, 2.0), scope="mean").outcome == "not decidable"
    assert verdict((), stats(515.0, 2.0), scope="mean").outcome == "failed"


def test_mean_of_a_small_part_does_not_stand_for_the_whole():
    assert verdict((), stats(claimed=300), scope="mean").outcome == "not decidable"


def test_nonuniformity_near_its_limit_is_not_decided():
    outcomes = [
        verdict([site(1, 500.0), site(2, 500.0 + spread)], nonuniformity_percent=0.5).checks[1].outcome
        for spread in (2.0, 5.0, 8.0)
    ]
    assert outcomes == ["passed", "not decidable", "failed"]


def test_what_noise_adds_to_a_range_makes_no_part_fail():
    """49 equal sites read with u = 1 nm spread over 4.6 nm, 0.46 %; half of that limit would fail them by their noise alone."""
    read = 500 + ndtri((np.arange(49) + 0.5) / 49)
    found = verdict([site(i + 1, value, u=1.0) for i, value in enumerate(read)], nonuniformity_percent=0.3).checks[1]
    assert found.value == pytest.approx(0.46, abs=0.01) and found.outcome == "not decidable"


def test_nonuniformity_over_some_of_the_sites_does_not_pass():
    found = verdict([*GOOD, empty(3)], nonuniformity_percent=5.0).checks[1]
    assert found.outcome == "not decidable" and found.places == ("site 3",)


def test_nonuniformity_of_a_single_site_is_undefined():
    found = verdict([site(1, 500.0)], nonuniformity_percent=5.0).checks[1]
    assert found.outcome == "not decidable" and "undefined" in found.reason


@pytest.mark.parametrize(
    ("off_curve", "unseen", "outcome"), [(5, 0, "passed"), (5, 20, "not decidable"), (20, 0, "failed"), (20, 50, "failed")]
)
def test_defect_area(off_curve, unseen, outcome):
    found = verdict(GOOD, stats(off_curve=off_curve, unseen=unseen), max_defect_percent=1.0)
    assert found.checks[1].outcome == outcome == found.outcome


def test_too_little_measured_is_no_fault_of_the_part():
    assert verdict(GOOD, stats(claimed=800), min_claimed_percent=90.0).outcome == "not decidable"


def test_no_limit_is_not_decidable():
    assert judge(Tolerance(), GOOD, stats()).sentence == "Not decidable: the recipe sets no limit."


def test_rule_is_said_with_its_risk():
    assert "at most 5 %" in verdict(GOOD).rule


def area(thickness=500.0, sigma=0.1, flags=0, candidates=None):
    shape = (40, 40)
    return PixelEvidence(
        thickness_nm=np.broadcast_to(np.asarray(thickness, float), shape), sigma_nm=np.full(shape, sigma),
        flags=np.broadcast_to(np.asarray(flags, np.uint16), shape), inside=np.ones(shape, bool), all_candidates_nm=candidates,
        spot_px=3.0,
    )  # fmt: skip


def left(share, value, otherwise):
    """``value`` in the leftmost columns, ``otherwise`` in the rest."""
    return np.where(np.arange(40) < share * 40, value, otherwise)


@pytest.mark.parametrize(("share", "outcome"), [(0.0, "passed"), (0.05, "passed"), (0.2, "failed")])
def test_area_outside_the_limits(share, outcome):
    assert verdict(pixels=area(left(share, 530.0, 500.0)), scope="area", max_outside_percent=10.0).outcome == outcome


def test_area_that_is_not_measured_counts_against_passing_only():
    pixels = area(flags=left(0.2, OFF_CURVE.mask, 0))
    assert verdict(pixels=pixels, scope="area", max_outside_percent=10.0).outcome == "not decidable"


def test_area_near_a_limit_depends_on_what_all_pixels_share():
    pixels = area(508.0)
    assert verdict(pixels=pixels, scope="area", u_common=0.5).outcome == "passed"
    assert verdict(pixels=pixels, scope="area", u_common=3.0).outcome == "not decidable"


def test_area_without_the_map_is_not_decidable():
    assert verdict(scope="area").outcome == "not decidable"


@pytest.mark.parametrize(("second", "outcome"), [(505.0, "passed"), (690.0, "not decidable")])
@pytest.mark.parametrize("scope", ["area", "sites"])
def test_ambiguous_pixels_conform_when_all_their_candidates_do(second, outcome, scope):
    candidates = np.stack([np.full((40, 40), 497.0), np.full((40, 40), second)])
    pixels = area(np.nan, flags=AMBIGUOUS.mask, candidates=candidates)
    assert verdict([*GOOD, empty(3)], pixels=pixels, scope=scope).outcome == outcome


@pytest.mark.parametrize("scope", ["area", "sites"])
def test_a_single_listed_candidate_is_not_all_of_them(scope):
    pixels = area(np.nan, flags=AMBIGUOUS.mask, candidates=np.full((1, 40, 40), 500.0))
    assert verdict([*GOOD, empty(3)], pixels=pixels, scope=scope).outcome == "not decidable"


def test_tolerance_of_no_width_is_refused():
    with pytest.raises(SettingsError, match="no width"):
        verdict(GOOD, plus_nm=0.0, minus_nm=0.0)


def test_faults_come_all_at_once():
    faults = tolerance_faults(tolerance(plus_nm=-1.0, nonuniformity_percent=0.0, risk=0.7, max_defect_percent=120.0))
    assert [fault.key.removeprefix("tolerance.") for fault in faults] == [
        "plus_nm",
        "nonuniformity_percent",
        "risk",
        "max_defect_percent",
    ]


@pytest.mark.parametrize("formula", ["uniformity (100 times min over max)", "range"])
def test_limit_needs_a_nonuniformity_in_percent(formula):
    assert tolerance_faults(tolerance(nonuniformity_percent=1.0, formula=formula))[0].key == "tolerance.formula"


def test_unknown_formula_is_refused():
    with pytest.raises(UnknownNameError):
        verdict(GOOD, nonuniformity_percent=1.0, formula="halfrange")


def simulate(parts, noise, rule, seed=0, sites=13, u_common=0.3):
    """Parts whose worst site is near the upper limit: true maxima spread over 510 +- 3, and the verdicts on them."""
    rng = np.random.default_rng(seed)
    truly_bad, outcomes = [], []
    for _ in range(parts):
        truth = rng.normal(0, 1.0, sites)
        truth += rng.uniform(507, 513) - truth.max()
        read = truth + rng.normal(0, u_common) + rng.normal(0, noise, sites)
        u = float(np.hypot(noise, u_common))
        readings = [site(i + 1, value, u=u, local=noise) for i, value in enumerate(read)]
        truly_bad.append(truth.max() > 510)
        outcomes.append(verdict(readings, rule=rule, u_common=u_common).outcome)
    return np.array(truly_bad), np.array(outcomes)


@pytest.mark.parametrize("sites", [1, 13])
def test_guarded_rule_passes_at_most_its_risk_of_bad_parts(sites):
    """2000 parts near a limit, half of them bad: at 5 %, 1000 bad parts give 50 passes, 64 at two standard deviations."""
    bad, outcomes = simulate(2000, 0.8, "guarded", sites=sites)
    assert np.mean(outcomes[bad] == "passed") <= 0.05 + 2 * np.sqrt(0.05 * 0.95 / bad.sum())
    assert np.mean(outcomes[~bad] == "failed") <= 0.05 + 2 * np.sqrt(0.05 * 0.95 / (~bad).sum())


def test_shared_risk_passes_more_bad_parts_than_that():
    """The control: without a guard band the same parts exceed 5 %."""
    bad, outcomes = simulate(1000, 0.8, "shared risk", sites=1)
    assert np.mean(outcomes[bad] == "passed") > 0.08


def test_less_noise_decides_more_parts():
    shares = [np.mean(simulate(300, noise, "guarded", u_common=0.1)[1] == "not decidable") for noise in (2.0, 0.8, 0.2)]
    assert shares[0] > shares[1] > shares[2]
