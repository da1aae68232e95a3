"""The interactive chart in a real Chromium."""

import shutil
from pathlib import Path

import pytest

from sheenmap.camera import Encoding
from sheenmap.catalogue import camera, lamp, material
from sheenmap.charts import chart_data, write_chart
from sheenmap.colour import delta_e_2000
from sheenmap.optics import Layer, Stack
from sheenmap.recipe.types import CameraSetup, Quantity, Recipe, Shot, ViewSetup
from sheenmap.wafer import RegionSpec

webdriver = pytest.importorskip("selenium.webdriver")

from selenium.webdriver.common.action_chains import ActionChains  # noqa: E402
from selenium.webdriver.common.by import By  # noqa: E402
from selenium.webdriver.common.keys import Keys  # noqa: E402

DRIVER = shutil.which("chromedriver")
pytestmark = [pytest.mark.browser, pytest.mark.skipif(DRIVER is None, reason="no Chromium driver here")]


@pytest.fixture(scope="module")
def chart():
    stack = Stack(medium=material("air"), layers=(Layer(index=material("SiO2"), thickness_nm=None),), substrate=material("Si"))
    shot = Shot(light=lamp("LED-B3"), camera=CameraSetup(response=camera("generic"), encoding=Encoding()), view=ViewSetup())
    recipe = Recipe(
        path=Path("bench.toml"), title="a bench", text="", digest="0" * 64, stack=stack, search_nm=(0.0, 800.0),
        index_scale=Quantity(value=1.0), shots=(shot,), region=RegionSpec(),
    )  # fmt: skip
    return chart_data(recipe)


@pytest.fixture(scope="module")
def browser():
    options = webdriver.ChromeOptions()
    for argument in ("--headless=new", "--no-sandbox", "--window-size=1280,1200"):
        options.add_argument(argument)
    driver = webdriver.Chrome(options=options, service=webdriver.ChromeService(DRIVER))
    yield driver
    driver.quit()


@pytest.fixture
def page(browser, chart, tmp_path):
    write_chart(chart, tmp_path / "chart.html")
    browser.get((tmp_path / "chart.html").as_uri())
    return browser


def text(page, name):
    return page.find_element(By.ID, name).text


def point_at(page, chart, thickness_nm):
    stage = page.find_element(By.ID, "stage")
    width, height = stage.size["width"], stage.size["height"]
    share = (thickness_nm + 0.5) / (chart.thickness_nm.size)
    return ActionChains(page).move_to_element_with_offset(stage, round(width * (share - 0.5)), 20 - height // 2)


def test_the_pointer_reads_thickness_lab_and_look_alikes(page, chart):
    point_at(page, chart, 439).perform()
    at = int(text(page, "nm").split()[0])
    assert abs(at - 439) <= 1  # a pixel is 0.7 nm wide
    assert [float(part) for part in text(page, "lab").split()] == pytest.approx(chart.lab[at].tolist(), abs=0.006)
    assert text(page, "name") == chart.names[at]
    assert all(f"{other:g} nm" in text(page, "alike") for other in chart.look_alikes[at])
    assert chart.look_alikes[at]


def test_keys_move_by_a_step_and_to_the_ends(page):
    stage = page.find_element(By.ID, "stage")
    stage.send_keys(Keys.HOME)
    assert text(page, "nm") == "0 nm"
    stage.send_keys(Keys.ARROW_RIGHT, Keys.ARROW_RIGHT)
    assert text(page, "nm") == "2 nm"
    stage.send_keys(Keys.END)
    assert text(page, "nm") == "800 nm"
    assert "800 nanometres" in stage.get_attribute("aria-valuetext")


def test_the_difference_to_a_pinned_thickness_is_ciede2000(page, chart):
    stage = page.find_element(By.ID, "stage")
    stage.send_keys(Keys.HOME, Keys.ENTER, Keys.END)
    expected = float(delta_e_2000(chart.lab[0], chart.lab[-1]))
    assert f"difference to here {expected:.2f} " in text(page, "pinned")


def test_the_script_raises_no_error(page):
    assert [entry for entry in page.get_log("browser") if entry["level"] == "SEVERE"] == []
