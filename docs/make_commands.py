"""Write docs/commands.md from the commands' own help.

python docs/make_commands.py            write it
python docs/make_commands.py --check    say whether it is up to date; exit status 1 if not
"""

import sys
from pathlib import Path

from click.testing import CliRunner

from sheenmap.cli import program

PAGE = Path(__file__).parent / "commands.md"
WIDTH = 96
HEAD = """# Commands

What `--help` prints, command by command. This page is written by `python docs/make_commands.py`; edit the commands instead.
What the files hold that they write: [outputs.md](outputs.md). What a recipe holds: [recipe.md](recipe.md).
"""


def commands_page() -> str:
    """The page as text."""
    sections = [("sheenmap", [])] + [(f"sheenmap {name}", [name]) for name in program.commands]
    return HEAD + "".join(f"\n## `{title}`\n```text\n{help_text(words)}\n```\n" for title, words in sections)


def help_text(words: list[str]) -> str:
    """What the command of these words prints for ``--help``, in lines of ``WIDTH``."""
    result = CliRunner().invoke(program, [*words, "--help"], prog_name="sheenmap", terminal_width=WIDTH)
    return "\n".join(line.rstrip() for line in result.output.rstrip().splitlines())


def main() -> None:
    """Write the page, or check it."""
    if "--check" not in sys.argv:
        PAGE.write_text(commands_page(), encoding="utf-8")
    elif not PAGE.is_file() or PAGE.read_text(encoding="utf-8") != commands_page():
        sys.exit(f"{PAGE.name} is out of date: run python docs/make_commands.py")


if __name__ == "__main__":
    main()
