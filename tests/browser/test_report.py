"""The report in a real Chromium: pointer, themes, keys, print."""

import base64
import re
import shutil
from dataclasses import replace

import numpy as np
import pytest
import tifffile

from measurements import nothing_claimed, oxide_wafer
from sheenmap.flags import AMBIGUOUS, OFF_CURVE, is_blocked
from sheenmap.report import write_report
from sheenmap.storage import write_measurement

webdriver = pytest.importorskip("selenium.webdriver")

from selenium.webdriver.common.action_chains import ActionChains  # noqa: E402
from selenium.webdriver.common.by import By  # noqa: E402
from selenium.webdriver.common.keys import Keys  # noqa: E402
from selenium.webdriver.support.ui import WebDriverWait  # noqa: E402

CHROMIUM, DRIVER = shutil.which("chromium"), shutil.which("chromedriver")
pytestmark = [
    pytest.mark.browser,
    pytest.mark.skipif(CHROMIUM is None or DRIVER is None, reason="no Chromium and its driver here"),
]
STEP_NM, SIGMA_RATIO = 0.01, 0.0011  # the page's step of thickness; half of the step of sigma's logarithm
PRINTED = 0.00501  # half of the last digit


@pytest.fixture(scope="module")
def browser():
    options = webdriver.ChromeOptions()
    options.binary_location = CHROMIUM
    for argument in ("--headless=new", "--no-sandbox", "--disable-gpu", "--window-size=1300,1400", "--hide-scrollbars"):
        options.add_argument(argument)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL"})
    driver = webdriver.Chrome(options=options, service=webdriver.ChromeService(DRIVER))
    yield driver
    driver.quit()


def widened(measurement, times):
    """Each pixel ``times`` as wide and high, with new noise so that neighbours differ: a picture that the page must thin."""
    grow = lambda plane: np.repeat(np.repeat(plane, times, axis=-2), times, axis=-1)  # noqa: E731
    thickness = grow(measurement.thickness_nm)
    thickness += np.random.default_rng(2).normal(size=thickness.shape).astype(np.float32)
    region = replace(
        measurement.region, inside=grow(measurement.region.inside), mm_per_px=measurement.region.mm_per_px / times,
        origin_px=tuple(times * along + (times - 1) / 2 for along in measurement.region.origin_px), disc=None,
    )  # fmt: skip
    return replace(
        measurement, thickness_nm=thickness, sigma_nm=grow(measurement.sigma_nm), flags=grow(measurement.flags),
        residual=grow(measurement.residual), preview_scale=1 / times, region=region, candidates_nm=None, candidate_odds=None,
        sites=tuple(replace(s, x_px=times * s.x_px + 1, y_px=times * s.y_px + 1) for s in measurement.sites),
    )  # fmt: skip


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """The pages, each beside its arrays."""
    place = tmp_path_factory.mktemp("reports")
    wafer = oxide_wafer()
    for name, measurement in {"plain": wafer, "large": widened(wafer, 3), "empty": nothing_claimed()}.items():
        write_measurement(measurement, place / name)
        write_report(measurement, place / name / "report.html")
    return place


def opened(browser, folder, name, *, scheme="light"):
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": [{"name": "prefers-color-scheme", "value": scheme}]})
    browser.get((folder / name / "report.html").as_uri())
    WebDriverWait(browser, 10).until(lambda page: page.execute_script("return document.documentElement.dataset.ready"))
    return browser


@pytest.fixture
def page(browser, folder):
    return opened(browser, folder, "plain")


def text(page, name):
    return page.find_element(By.ID, name).text


def point_at(page, stage, x_share, y_share):
    element = page.find_element(By.ID, stage)
    width, height = element.size["width"], element.size["height"]
    ActionChains(page, duration=0).move_to_element_with_offset(
        element, round(width * (x_share - 0.5)), round(height * (y_share - 0.5))
    ).perform()
    return tuple(int(number) for number in re.findall(r"\d+", text(page, "r-px")))


PLACES = [(0.5, 0.5), (0.32, 0.28), (0.66, 0.71), (0.61, 0.22), (0.38, 0.66), (0.21, 0.5), (0.02, 0.03)]


@pytest.mark.parametrize("name", ["plain", "large"])
@pytest.mark.parametrize("stage", ["photo-stage", "map-stage"])
def test_the_pointer_reads_the_pixel_of_the_written_arrays(browser, folder, name, stage):
    page = opened(browser, folder, name)
    thickness, sigma, flags = (tifffile.imread(folder / name / f"{which}.tif") for which in ("thickness", "sigma", "flags"))
    claimed, reach = 0, 0.005 * thickness.shape[1]  # three pixels of the screen
    for x_share, y_share in PLACES:
        x, y = point_at(page, stage, x_share, y_share)
        assert abs(x - x_share * thickness.shape[1]) < reach and abs(y - y_share * thickness.shape[0]) < reach
        read = text(page, "r-nm")
        assert (read == "not claimed") == bool(is_blocked(flags[y, x]))
        if read != "not claimed":
            claimed += 1
            assert float(read.split()[0]) == pytest.approx(thickness[y, x], abs=STEP_NM / 2 + PRINTED)
            own = float(re.search(r"alone ([\d.]+)", text(page, "r-u"))[1])
            assert own == pytest.approx(sigma[y, x], abs=PRINTED + SIGMA_RATIO * float(sigma[y, x]))
            u = float(re.search(r"± ([\d.]+)", text(page, "r-u"))[1])
            assert u == pytest.approx(np.hypot(sigma[y, x], 0.9), abs=PRINTED + SIGMA_RATIO * float(sigma[y, x]))
    assert claimed >= 3


def test_the_pointer_tells_flags_millimetres_and_rival_thicknesses(page, folder):
    wafer = oxide_wafer()
    row, column = np.argwhere((wafer.flags & AMBIGUOUS.mask) != 0).mean(axis=0)
    x, y = point_at(page, "photo-stage", (column + 0.5) / 640, (row + 0.5) / 520)
    assert text(page, "r-flags").startswith("ambiguous: ")
    assert f"{wafer.candidates_nm[0, y, x]:.1f} nm (odds 55 %)" in text(page, "r-others")
    right, up = (float(part) for part in text(page, "r-mm").replace("−", "-").replace(" mm", "").split(","))
    scale = wafer.region.mm_per_px
    assert right == pytest.approx((x - 319.5) * scale, abs=0.051)
    assert up == pytest.approx((259.5 - y) * scale, abs=0.051)


def test_keys_move_the_pointer_and_a_reader_hears_it(page):
    stage = page.find_element(By.ID, "map-stage")
    start = text(page, "r-px")
    stage.send_keys(Keys.ARROW_RIGHT, Keys.ARROW_RIGHT, Keys.ARROW_UP)
    assert (start, text(page, "r-px")) == ("x 320, y 260 px", "x 322, y 259 px")
    WebDriverWait(page, 3).until(lambda p: p.execute_script("return spoken.textContent").startswith("x 322, y 259 px"))


def test_dragging_draws_a_line_and_its_profile(page):
    stage = page.find_element(By.ID, "map-stage")
    ActionChains(page, duration=20).move_to_element_with_offset(stage, -80, 60).click_and_hold().move_by_offset(
        160, -120
    ).release().perform()
    ends = [float(n) for n in re.findall(r"[xy] (\d+)", text(page, "profile-words"))]
    assert ends[2] > ends[0] and ends[3] < ends[1]
    assert page.find_elements(By.CSS_SELECTOR, "#profile .curve")
    page.find_element(By.ID, "clear").click()
    across = [float(n) for n in re.findall(r"[xy] (\d+)", text(page, "profile-words"))]
    assert across[1] == across[3]


@pytest.mark.parametrize("layer", ["thickness", "sigma", "tolerance", "flags", "residual", "photo"])
def test_every_layer_can_be_chosen_and_unclaimed_pixels_let_the_hatching_through(page, layer):
    page.execute_script(f"document.querySelector('input[value={layer}]').click()")
    row, column = np.argwhere((oxide_wafer().flags & OFF_CURVE.mask) != 0)[0]
    alpha = page.execute_script(
        f"return document.getElementById('map').getContext('2d').getImageData({column}, {row}, 1, 1).data[3]"
    )
    assert (alpha == 0) == (layer in ("thickness", "sigma", "tolerance"))
    assert text(page, "caption")


def test_a_site_in_the_table_lights_up_on_both_pictures(page):
    button = page.find_element(By.CSS_SELECTOR, "tr[data-site='2'] button")
    button.send_keys(Keys.ENTER)
    assert len(page.find_elements(By.CSS_SELECTOR, "circle.lit[data-site='2']")) == 4  # line and edge, on two pictures
    site = oxide_wafer().sites[2]
    assert text(page, "r-px") == f"x {round(site.x_px)}, y {round(site.y_px)} px"


def luminance(css):
    rgb = [float(part) / 255 for part in re.findall(r"[\d.]+", css)[:3]]
    return float(np.dot([0.2126, 0.7152, 0.0722], [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in rgb]))


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_text_stands_out_in_both_themes(browser, folder, scheme):
    """WCAG 2.1, 1.4.3: contrast of 4.5 to 1 or more."""
    page = opened(browser, folder, "plain", scheme=scheme)
    colour = "return getComputedStyle(document.querySelector(arguments[0]))[arguments[1]]"
    paper = luminance(page.execute_script(colour, "body", "backgroundColor"))
    assert (paper < 0.1) == (scheme == "dark")
    for selector in ("body", ".faint", ".verdict .outcome", "figcaption", "tr.empty", "button"):
        ink = luminance(page.execute_script(colour, selector, "color"))
        assert (max(ink, paper) + 0.05) / (min(ink, paper) + 0.05) >= 4.5, selector


def test_the_button_turns_the_colours_round(browser, folder):
    page = opened(browser, folder, "plain", scheme="dark")
    page.find_element(By.ID, "theme").click()
    assert luminance(page.execute_script("return getComputedStyle(document.body).backgroundColor")) > 0.8
    assert text(page, "theme") == "Dark"


@pytest.mark.parametrize(("name", "scheme"), [("plain", "dark"), ("large", "light"), ("empty", "light")])
def test_it_prints_on_two_a4_pages_at_most(browser, folder, name, scheme):
    page = opened(browser, folder, name, scheme=scheme)
    pdf = base64.b64decode(page.execute_cdp_cmd("Page.printToPDF", {"preferCSSPageSize": True})["data"])
    pages = re.findall(rb"/Type\s*/Page\b", pdf)
    width, height = (float(part) for part in re.search(rb"/MediaBox\s*\[\s*0 0 ([\d.]+) ([\d.]+)", pdf).groups())
    assert 1 <= len(pages) <= 2
    assert (width, height) == pytest.approx((595, 842), abs=1)


def test_paper_is_white_whatever_the_theme(browser, folder):
    page = opened(browser, folder, "plain", scheme="dark")
    page.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print", "features": []})
    try:
        assert luminance(page.execute_script("return getComputedStyle(document.body).backgroundColor")) == pytest.approx(1.0)
        assert not page.find_element(By.ID, "layers").is_displayed()
    finally:
        page.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "", "features": []})


def test_nothing_claimed_shows_flags_and_no_map(browser, folder):
    page = opened(browser, folder, "empty")
    choices = [choice.get_attribute("value") for choice in page.find_elements(By.CSS_SELECTOR, "#layers input")]
    assert choices == ["flags", "residual", "photo"]
    assert text(page, "r-nm") == "not claimed"


def test_a_narrow_screen_needs_no_sideways_scrolling(browser, folder):
    size = {"width": 390, "height": 800, "deviceScaleFactor": 2, "mobile": True}
    browser.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", size)
    try:
        page = opened(browser, folder, "plain")
        assert page.execute_script("return document.documentElement.scrollWidth") <= 390
    finally:
        browser.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


@pytest.mark.parametrize("name", ["plain", "large", "empty"])
def test_the_console_stays_silent(browser, folder, name):
    browser.get_log("browser")
    opened(browser, folder, name)
    assert browser.get_log("browser") == []
