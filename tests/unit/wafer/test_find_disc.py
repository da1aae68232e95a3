import cv2
import numpy as np
import pytest

from sheenmap.wafer import NoDiscError, find_disc, find_discs

CENTRE_PX = 0.3  # what sites and edge exclusion can bear: 0.1 mm on 200 mm in 600 pixels


def errors(disc, scene):
    return np.array([disc.x_px - scene.x, disc.y_px - scene.y, disc.radius_px - scene.radius])


def turn(a_deg, b_deg):
    return (a_deg - b_deg + 180) % 360 - 180


@pytest.fixture(scope="module")
def twenty(drawn):
    scenes = [drawn.random(seed) for seed in range(20)]
    return [(scene, find_disc(drawn.scene(scene), notch_near_deg=scene.notch_deg + 8)) for scene in scenes]


def test_twenty_random_wafers_are_found_within_a_third_of_a_pixel(twenty):
    worst = max(np.abs(errors(disc, scene)).max() for scene, disc in twenty)
    assert worst < CENTRE_PX


def test_twenty_random_notches_are_found_within_a_third_of_a_degree(twenty):
    found = [turn(disc.notch_deg, scene.notch_deg) for scene, disc in twenty if disc.notch_deg is not None]
    assert len(found) >= 18  # a notch of 1.4 px under blur and noise may be below the noise
    assert np.abs(found).max() < 0.3


def test_uncertainty_covers_the_error(twenty):
    """The largest of three normal errors is within 3.3 u in 99.7 % of cases; one of twenty beyond happens in 6 %."""
    beyond = sum(np.abs(errors(disc, scene)).max() > 3.3 * disc.u_px for scene, disc in twenty)
    assert beyond <= 1
    assert np.median([disc.u_px for _, disc in twenty]) < 0.05


def test_grey_picture_serves_as_well(drawn):
    scene = drawn.random(3)
    assert np.abs(errors(find_disc(drawn.scene(scene).mean(axis=-1)), scene)).max() < CENTRE_PX


@pytest.mark.parametrize("kind", ["uint8", "uint16", "float64"])
def test_codes_serve_as_well(drawn, kind):
    scene = drawn.Scene()
    picture = np.clip(drawn.scene(scene), 0, 1)
    codes = picture if kind == "float64" else np.round(picture * np.iinfo(kind).max)
    assert np.abs(errors(find_disc(codes.astype(kind)), scene)).max() < CENTRE_PX


@pytest.mark.parametrize(
    "settings",
    [
        {"bench": (0.9, 0.9, 0.9)},
        {"bench": (0.5, 0.5, 0.5), "film": (0.55, 0.4, 0.5), "swing": 0.1},
        {"bench": (0.1, 0.1, 0.1), "film": (0.3, 0.3, 0.3), "swing": 0.95},
        {"noise": 0.1},
        {"blur": 4.0},
        {"radius": 40.3},
        {"flat_deg": -90.0, "flat_half_deg": 22.5},
        {"vignette": 0.8},
    ],
    ids=["bright bench", "other colour only", "as dark as the bench in places", "noise", "blur", "small", "flat", "vignette"],
)
def test_hard_cases(drawn, settings):
    scene = drawn.Scene(**settings)
    assert np.abs(errors(find_disc(drawn.scene(scene)), scene)).max() < CENTRE_PX


def test_textured_bench_does_not_pull_the_rim(drawn):
    scene = drawn.Scene()
    picture = drawn.scene(scene)
    outside = np.hypot(np.arange(640) - scene.x, np.arange(480)[:, None] - scene.y) > scene.radius
    coarse = np.random.default_rng(0).normal(size=(160, 214))
    texture = 0.2 * np.kron(coarse, np.ones((3, 3)))[:480, :640]
    picture[outside] += texture[outside, None]
    assert np.abs(errors(find_disc(picture), scene)).max() < CENTRE_PX


@pytest.mark.parametrize("cut", [0.3, 0.8, 1.2])
def test_disc_cut_by_the_frame_is_fitted_and_says_so(drawn, cut):
    scene = drawn.Scene(x=190.4 * (1 - cut))
    disc = find_disc(drawn.scene(scene))
    share = 1 - np.arccos(np.clip(1 - cut, -1, 1)) / np.pi
    assert np.abs(errors(disc, scene)).max() < CENTRE_PX
    assert disc.in_frame == pytest.approx(share, abs=0.02)


def test_whole_disc_says_that_it_is_whole(drawn):
    assert find_disc(drawn()).in_frame == 1.0


def test_too_short_an_arc_is_refused(drawn):
    with pytest.raises(NoDiscError, match=r"only \d+ % of a disc's rim"):
        find_disc(drawn(x=-150.0))


@pytest.mark.parametrize("angle_deg", [-90.0, -87.3, 33.0])
def test_flat_is_found_with_its_depth(drawn, angle_deg):
    disc = find_disc(drawn(flat_deg=angle_deg, flat_half_deg=19.0))
    assert turn(disc.notch_deg, angle_deg) == pytest.approx(0, abs=0.1)
    assert disc.flat_px == pytest.approx(190.4 * (1 - np.cos(np.deg2rad(19.0))), abs=0.5)


def test_plain_rim_has_no_notch(drawn):
    disc = find_disc(drawn(reflections=2))
    assert disc.notch_deg is None and disc.flat_px == 0


def test_clip_is_no_notch(drawn):
    assert find_disc(drawn(clips_deg=(20.0, 140.0, -100.0), clip_level=0.3)).notch_deg is None


def test_coloured_speck_on_the_rim_is_no_notch(drawn):
    picture = drawn(swing=0.0)
    cv2.circle(picture, (318, 52), 3, (0.02, 0.5, 0.02), -1)  # as dark as the bench in red and blue
    assert find_disc(picture).notch_deg is None


def test_grey_pin_at_the_rim_is_no_notch(drawn):
    """As wide and deep as a notch and nearly as dark as the bench, but it sticks out over that."""
    picture = drawn(swing=0.0).mean(axis=-1)
    picture[40:59, 316:321] = 0.15
    assert find_disc(picture).notch_deg is None


def test_expected_place_decides_between_two_marks(drawn):
    picture = drawn(notch_deg=-90.0)
    other = drawn(notch_deg=10.0)
    both = np.minimum(picture, other)
    assert find_disc(both, notch_near_deg=-90.0).notch_deg == pytest.approx(-90, abs=0.3)
    assert find_disc(both, notch_near_deg=0.0).notch_deg == pytest.approx(10, abs=0.3)
    assert find_disc(both).notch_deg is None


@pytest.mark.parametrize("squash", [0.97, 0.9])
def test_tilted_disc_is_oval_and_keeps_its_radius(drawn, squash):
    rows, columns = np.indices((480, 640)).astype(np.float32)
    picture = cv2.remap(drawn(), (columns - 318.3) / squash + 318.3, rows, cv2.INTER_LINEAR, borderMode=cv2.BORDER_REPLICATE)
    disc = find_disc(picture)
    size = np.hypot(*disc.oval)
    assert (1 - size) / (1 + size) == pytest.approx(squash, abs=1e-3)
    assert [disc.x_px, disc.y_px, disc.radius_px] == pytest.approx([318.3, 241.7, 190.4], abs=CENTRE_PX)


def test_round_disc_is_not_oval(drawn):
    assert find_disc(drawn()).oval == (0.0, 0.0)


@pytest.mark.parametrize("kind", ["black", "noise", "square", "checks", "ellipse", "slope"])
def test_no_disc_is_an_error(kind):
    rows, columns = np.indices((240, 320))
    picture = {
        "black": np.zeros((240, 320)),
        "noise": np.random.default_rng(1).normal(size=(240, 320)),
        "square": ((abs(rows - 120) < 80) & (abs(columns - 160) < 80)).astype(float),
        "checks": ((rows // 20 + columns // 20) % 2).astype(float),
        "ellipse": (((rows - 120) / 60) ** 2 + ((columns - 160) / 120) ** 2 < 1).astype(float),
        "slope": rows / 240 + columns / 320,
    }[kind]
    with pytest.raises(NoDiscError, match="no disc stands out"):
        find_disc(picture)


def test_numbers_that_are_not_finite_do_not_matter(drawn):
    picture = drawn()
    picture[100:104, 300:304] = np.nan
    picture[5, 5] = np.inf
    assert find_disc(picture).radius_px == pytest.approx(190.4, abs=CENTRE_PX)


def test_tiny_picture_is_refused():
    with pytest.raises(NoDiscError, match="too small"):
        find_disc(np.ones((1, 1)))


def test_two_discs_are_ambiguous(drawn):
    with pytest.raises(NoDiscError, match="2 discs in the picture"):
        find_disc(drawn(x=180.0, radius=150.0, others=[(480.0, 240.0, 120.0)]))


def test_small_round_thing_beside_the_part_is_none(drawn):
    assert find_disc(drawn(x=240.0, others=[(560.0, 80.0, 50.0)])).x_px == pytest.approx(240, abs=CENTRE_PX)


def test_five_parts_are_numbered_as_one_reads(drawn):
    places = [(110.0, 120.0), (320.0, 112.0), (530.0, 125.0), (210.0, 350.0), (430.0, 345.0)]
    discs = find_discs(drawn(x=320.0, y=112.0, radius=90.0, swing=0.0, others=[(x, y, 90.0) for x, y in places]))
    assert [(disc.x_px, disc.y_px) for disc in discs] == [pytest.approx(place, abs=CENTRE_PX) for place in places]


def test_shape_of_picture_is_checked():
    with pytest.raises(ValueError, match=r"\(H, W\)"):
        find_disc(np.zeros(5))
