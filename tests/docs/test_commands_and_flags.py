"""docs/commands.md and docs/outputs.md against the program."""

import re
import sys
from pathlib import Path

import pytest

from measurements import oxide_wafer
from sheenmap.cli import program
from sheenmap.flags import FLAGS
from sheenmap.storage import summary

DOCS = Path(__file__).resolve().parents[2] / "docs"
sys.path.insert(0, str(DOCS))

from make_commands import PAGE, commands_page, help_text  # noqa: E402

OUTPUTS = (DOCS / "outputs.md").read_text(encoding="utf-8")


def rows(heading):
    """Cells of the table under a heading of outputs.md, without its head."""
    section = ("\n" + OUTPUTS).split(f"\n{heading}\n")[1].split("\n## ")[0]
    lines = [line for line in section.splitlines() if line.startswith("|")]
    return [[cell.strip() for cell in line.strip("|").split("|")] for line in lines[2:]]


def test_the_commands_are_written_down_as_they_are():
    assert PAGE.read_text(encoding="utf-8") == commands_page(), "run python docs/make_commands.py"


@pytest.mark.parametrize("name", sorted(program.commands))
def test_every_option_stands_in_the_commands_page(name):
    options = [opt for param in program.commands[name].params for opt in param.opts if opt.startswith("--")]
    assert options
    assert [option for option in options if option not in help_text([name])] == []


def test_the_flags_are_written_down_as_the_registry_has_them():
    expected = [[str(f.bit), f"`{f.name}`", "yes" if f.blocks else "no", f.meaning, f.advice] for f in FLAGS]
    assert rows("## Flags") == expected


def test_the_summarys_keys_are_written_down_in_their_order():
    assert [row[0].strip("`") for row in rows("## summary.json")] == list(summary(oxide_wafer(width=160, height=120)))


@pytest.mark.parametrize("key", ["flags", "statistics", "sites", "budget", "region", "verdict", "picture"])
def test_the_parts_of_each_record_are_named(key):
    value = summary(oxide_wafer(width=160, height=120))[key]
    record = value[0] if isinstance(value, list) else value["weak"] if key == "flags" else value
    [told] = [row[1] for row in rows("## summary.json") if row[0] == f"`{key}`"]
    assert [name for name in record if f"`{name}`" not in told] == []


def test_the_files_that_map_names_are_written_down():
    promised = set(re.findall(r"[a-z]+\.(?:tif|json|html)", help_text(["map"])))
    told = {row[0].strip("`") for row in rows("# What a map writes")}
    assert promised == told
