"""Runs every ``bench_*.py`` of this folder and writes RESULTS.md: ``make bench``, or ``python benchmarks/run.py [NAME ...]``.

A benchmark is a script of its own, so that its peak memory is its own. Its docstring's first line says what it compares;
what it prints are ratios to a peer or to a floor measured in the same run, which mean something on another machine too.
"""

import ast
import importlib.metadata
import os
import platform
import subprocess
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
LIBRARIES = ("sheenmap", "numpy", "scipy", "opencv-python-headless", "tmm")
HEAD = """# What was measured

Written by `make bench`. Every figure is a ratio to something that was measured in the same run: seconds belong to one machine,
ratios travel a little further.
"""


def machine() -> list[str]:
    """Lines that tell what the figures were taken on: processor, memory, system, versions; no names of hosts or people."""
    cores = len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count()
    return [
        f"- processor: {_processor()}, {cores} cores at hand",
        f"- memory: {_memory()}",
        f"- system: {platform.system()} {platform.machine()}, Python {platform.python_version()}",
        f"- versions: {', '.join(f'{name} {_version(name)}' for name in LIBRARIES)}",
    ]


def _processor() -> str:
    try:
        lines = Path("/proc/cpuinfo").read_text(encoding="utf-8").splitlines()
    except OSError:  # only Linux has that file
        lines = []
    named = [line.partition(":")[2].strip() for line in lines if line.startswith("model name")]
    return named[0] if named else platform.processor() or platform.machine()


def _memory() -> str:
    try:
        return f"{os.sysconf('SC_PAGE_SIZE') * os.sysconf('SC_PHYS_PAGES') / 2**30:.0f} GiB"
    except (AttributeError, ValueError, OSError):  # Windows has no sysconf
        return "not told by this system"


def _version(name: str) -> str:
    try:
        return importlib.metadata.version(name)
    except importlib.metadata.PackageNotFoundError:
        return "missing"


def section(script: Path) -> tuple[str, bool]:
    """A benchmark's part of the page, and whether the script ran to its end."""
    purpose = (ast.get_docstring(ast.parse(script.read_text(encoding="utf-8"))) or "").partition("\n")[0]
    command = [sys.executable, str(script)]
    run = subprocess.run(command, stdout=subprocess.PIPE, text=True, encoding="utf-8", check=False)
    body = run.stdout.rstrip() or "(nothing printed)"
    return f"## {script.stem.removeprefix('bench_')}\n\n{purpose}\n\n```\n{body}\n```\n", run.returncode == 0


def main(names: list[str], folder: Path = HERE) -> int:
    """Run the benchmarks, all when none is named; RESULTS.md is written only by a whole run in which none broke."""
    scripts = sorted(folder.glob("bench_*.py"))
    known = [script.stem.removeprefix("bench_") for script in scripts]
    if not scripts or not set(names) <= set(known):
        print(f"benchmarks: found {', '.join(names) or 'none'}; in {folder.name}/ there are: {', '.join(known) or 'none'}")
        return 2
    parts, broken = [], []
    for script, name in zip(scripts, known):
        if names and name not in names:
            continue
        text, whole = section(script)
        print(text, flush=True)
        parts.append(text)
        broken += [] if whole else [name]
    if broken:
        print(f"broken: {', '.join(broken)}; RESULTS.md stays as it was")
        return 4
    if not names:
        page = "\n".join([HEAD, *machine(), "", *parts])
        (folder / "RESULTS.md").write_text(page, encoding="utf-8", newline="\n")
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
