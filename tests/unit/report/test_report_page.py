"""The report as text: what it says, what it may not do, how large it is."""

import re
from dataclasses import replace
from html.parser import HTMLParser

import numpy as np
import pytest

from measurements import nothing_claimed, oxide_wafer
from sheenmap.errors import OutputError
from sheenmap.flags import FLAGS
from sheenmap.report import page_html, write_report

MOST_BYTES = 3_000_000  # what passes as an attachment everywhere
HOSTILE = "<script>alert(1)</script><img src=x onerror=alert(2)>&\"'</title>"


@pytest.fixture(scope="module")
def wafer():
    return oxide_wafer(width=320, height=260)


@pytest.fixture(scope="module")
def page(wafer):
    return page_html(wafer)


class Reader(HTMLParser):
    """Elements, ids and addresses of a page; the visible text."""

    def __init__(self, text):
        super().__init__()
        self.tags, self.attributes, self.words, self.hidden = [], [], [], 0
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        self.attributes += [(tag, name, value) for name, value in attrs]
        self.hidden += tag in ("script", "style")

    def handle_endtag(self, tag):
        self.hidden -= tag in ("script", "style")

    def handle_data(self, data):
        if not self.hidden:
            self.words.append(data)

    @property
    def text(self):
        return re.sub(r"\s+", " ", " ".join(self.words))


def test_the_verdict_stands_above_everything_else(page, wafer):
    text = Reader(page.split("<main>")[0]).text
    assert "Not decidable" in text
    assert "3 of 49 sites are not measured" in text
    assert text.count("Not decidable") == 1
    assert wafer.sentence in text


def test_markup_in_any_text_stays_text(wafer):
    words = (HOSTILE, HOSTILE)
    check = replace(wafer.verdict.checks[0], name=HOSTILE, reason=HOSTILE, places=words)
    hostile = replace(
        wafer, title=HOSTILE, sentence=HOSTILE, notes=words, history=words, verdict=replace(wafer.verdict, checks=(check,)),
        provenance={"recipe_text": HOSTILE, HOSTILE: {HOSTILE: HOSTILE}, "recipe_sha256": "0" * 64},
        budget=tuple(replace(line, name=HOSTILE, note=HOSTILE) for line in wafer.budget),
        sites=tuple(replace(site, status=HOSTILE) for site in wafer.sites), nonuniformity_percent={HOSTILE: 1.0, "range": 2.0},
    )  # fmt: skip
    found, plain = Reader(page_html(hostile)), Reader(page_html(wafer))
    assert found.tags.count("script") == plain.tags.count("script") == 2
    assert found.tags.count("img") == plain.tags.count("img") == 1
    assert [item for item in found.attributes if item[1].startswith("on")] == []
    assert "alert(1)" in found.text


def test_the_page_loads_nothing_from_anywhere(page):
    addresses = [value for _, name, value in Reader(page).attributes if name in ("src", "href", "action", "srcset")]
    assert [address for address in addresses if not address.startswith(("data:", "#"))] == []
    assert "http" not in page.replace("http://www.w3.org/2000/svg", "")
    assert "@import" not in page and "url(" not in page.replace("url(#ramp)", "")


def test_every_label_points_at_something_that_is_there(page):
    found = Reader(page).attributes
    ids = [value for _, name, value in found if name == "id"]
    assert len(ids) == len(set(ids))
    wanted = {value for _, name, value in found if name in ("aria-labelledby", "aria-describedby")}
    assert wanted - set(ids) == set()


def test_every_flag_of_the_registry_is_told_with_its_advice(page):
    text = Reader(page).text
    assert [flag.name for flag in FLAGS if flag.meaning not in text or flag.advice not in text] == []


def test_a_large_noisy_map_with_candidates_stays_small(wafer):
    rng = np.random.default_rng(3)
    height, width = 1500, 2200
    noise = rng.normal(500, 30, size=(3, height, width)).astype(np.float32)
    flags = rng.choice(np.array([f.mask for f in FLAGS[3:]], np.uint16), size=(height, width))
    busy = replace(
        wafer, thickness_nm=noise[0], sigma_nm=np.abs(noise[1]), residual=np.abs(noise[2]), flags=flags,
        candidates_nm=noise, candidate_odds=np.abs(noise) / 700,
        preview=rng.integers(0, 256, size=(900, 1320, 3), dtype=np.uint8),
    )  # fmt: skip
    assert len(page_html(busy).encode()) < MOST_BYTES


def test_thousands_of_sites_are_cut_and_the_page_says_so(wafer):
    many = replace(wafer, sites=tuple(replace(wafer.sites[0], number=k + 1) for k in range(9000)))
    text = page_html(many)
    assert len(text.encode()) < MOST_BYTES
    assert "The first 400 of 9000 sites; all of them stand in summary.json." in text


def test_nothing_claimed_says_why_and_what_to_do_and_shows_no_map():
    text = page_html(nothing_claimed())
    said = Reader(text).text
    assert "Not measured" in said.split("Photograph, and why nothing is claimed")[0]
    assert "100 % of the region is off the curve" in said
    assert "Take no thickness from this picture" in said
    assert "off-curve on 100 %: Look at the part there" in said
    assert '"has_map":false' in text
    assert 'id="histogram"' not in text and 'id="profile"' not in text
    assert "nan" not in said.casefold().split()


def test_values_that_do_not_exist_leave_no_nan_in_the_page(wafer):
    bare = replace(
        wafer, residual=np.full_like(wafer.residual, np.nan), sites=(), verdict=None, budget=(), notes=(), provenance={}
    )
    text = page_html(bare)
    assert not re.search(r"\bNaN\b", text.split('id="data">')[1].split("</script>")[0])
    assert "nan" not in Reader(text).text.casefold().split()
    assert "Measured" in Reader(text).text


def test_a_part_without_a_scale_has_no_millimetres(wafer):
    assert '"to_mm":null' in page_html(replace(wafer, region=replace(wafer.region, mm_per_px=None), sites=()))


def test_the_page_is_written_whole_and_its_folder_made(tmp_path, wafer):
    path = tmp_path / "lot" / "07" / "report.html"
    write_report(wafer, path)
    assert path.read_text(encoding="utf-8").rstrip().endswith("</html>")
    assert [entry.name for entry in path.parent.iterdir()] == ["report.html"]


def test_a_page_that_cannot_be_written_is_one_line(tmp_path, wafer):
    (tmp_path / "file").write_text("in the way")
    with pytest.raises(OutputError, match="not written"):
        write_report(wafer, tmp_path / "file" / "report.html")
