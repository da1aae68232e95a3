"""The documents against what they speak of: links, commands, flags, statuses, the first recipe."""

import re
import shutil
from pathlib import Path

import pytest

from sheenmap.cli import program
from sheenmap.flags import FLAGS
from sheenmap.recipe import read_recipe

ROOT = Path(__file__).resolve().parents[2]
PLACES = ("*.md", "docs/**/*.md", "calibration/*.md", "demo_images/*.md", "benchmarks/*.md")
DOCUMENTS = sorted({path for place in PLACES for path in ROOT.glob(place)})
LINK = re.compile(r"\]\(([^)\s]+)\)")
README = (ROOT / "README.md").read_text(encoding="utf-8")


def without_code(text: str) -> str:
    """The text less its fenced blocks and code spans, where a bracket is no link."""
    return re.sub(r"`[^`\n]*`", "", re.sub(r"```.*?```", "", text, flags=re.DOTALL))


def relative_links(document: Path) -> list[str]:
    found = LINK.findall(without_code(document.read_text(encoding="utf-8")))
    return [link.split("#")[0] for link in found if not re.match(r"[a-z]+:|#", link)]


@pytest.mark.parametrize("document", DOCUMENTS, ids=lambda path: str(path.relative_to(ROOT)))
def test_every_relative_link_leads_to_a_file(document):
    lost = [link for link in relative_links(document) if not (document.parent / link).exists()]
    assert lost == []


def test_the_links_are_found_at_all():
    assert "docs/cautions.md" in relative_links(ROOT / "README.md")


@pytest.mark.parametrize(
    "name", ["README.md", "DEVELOPERS.md", "CHANGELOG.md", "LICENSE", "docs/ARCHITECTURE.md", "docs/GLOSSARY.md"]
)
def test_a_document_that_others_count_on_is_there(name):
    assert (ROOT / name).is_file()


@pytest.mark.parametrize("command", ["make demo", "make test"])
def test_the_readme_shows_both_commands_and_make_knows_them(command):
    assert re.search(rf"^    {command}\b", README, flags=re.MULTILINE)
    target = command.removeprefix("make ")
    assert re.search(rf"^{target}:", (ROOT / "Makefile").read_text(encoding="utf-8"), flags=re.MULTILINE)


def test_the_readme_opens_with_the_job():
    first = README.split("\n\n")[1]
    assert "photograph" in first and "thick" in first and not first.startswith("#")


def test_the_readme_names_every_command():
    assert [name for name in program.commands if f"`{name}`" not in README and f"sheenmap {name}" not in README] == []


def test_the_readme_names_every_flag():
    assert [flag.name for flag in FLAGS if f"`{flag.name}`" not in README] == []


def test_the_readme_lists_the_exit_statuses():
    assert [status for status in range(5) if f"| {status} |" not in README] == []


def test_the_readmes_recipe_reads_without_a_fault(tmp_path):
    [text] = re.findall(r"```toml\n(.*?)```", README, flags=re.DOTALL)
    (tmp_path / "recipe.toml").write_text(text, encoding="utf-8")
    for name in ("dark.png", "blank.png"):
        shutil.copy(ROOT / "demo_images" / "oxide-wafer" / name, tmp_path / name)
    shutil.copy(ROOT / "calibration" / "cameras" / "generic.csv", tmp_path / "camera.csv")
    recipe = read_recipe(tmp_path / "recipe.toml")
    assert recipe.search_nm == (350.0, 650.0)
    assert recipe.tolerance is not None and recipe.sites is not None


def test_the_glossary_is_in_alphabetical_order():
    words = re.findall(r"^- \*\*([^*,]+)", (ROOT / "docs" / "GLOSSARY.md").read_text(encoding="utf-8"), flags=re.MULTILINE)
    assert len(words) > 30
    assert words == sorted(words)
