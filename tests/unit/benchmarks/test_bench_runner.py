"""The runner of the benchmarks: every script runs, and a broken one leaves the last results whole."""

import importlib.util
from pathlib import Path
from types import ModuleType

import pytest

RUNNER = Path(__file__).resolve().parents[3] / "benchmarks" / "run.py"
QUICK = '"""Time of one over time of another.\n\nMore."""\nprint("ratio 1.25")\n'
BROKEN = '"""Breaks."""\nimport sys\nprint("half a table")\nsys.exit(1)\n'


@pytest.fixture(scope="module")
def runner() -> ModuleType:
    spec = importlib.util.spec_from_file_location("benchmarks_run", RUNNER)
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    for name in ("bench_one.py", "bench_two.py"):
        (tmp_path / name).write_text(QUICK, encoding="utf-8")
    (tmp_path / "helper.py").write_text(BROKEN, encoding="utf-8")
    return tmp_path


def test_every_benchmark_of_the_folder_stands_in_the_results_with_its_purpose(runner, folder):
    assert runner.main([], folder) == 0
    page = (folder / "RESULTS.md").read_text(encoding="utf-8")
    assert page.index("## one") < page.index("## two")
    assert page.count("Time of one over time of another.") == 2 and page.count("ratio 1.25") == 2


def test_the_results_tell_the_machine_but_not_its_name(runner, folder):
    runner.main([], folder)
    page = (folder / "RESULTS.md").read_text(encoding="utf-8")
    assert all(f"- {what}: " in page for what in ("processor", "memory", "system", "versions"))
    assert runner.platform.node() not in page


def test_a_broken_benchmark_is_named_and_leaves_the_last_results_whole(runner, folder, capsys):
    runner.main([], folder)
    before = (folder / "RESULTS.md").read_bytes()
    (folder / "bench_three.py").write_text(BROKEN, encoding="utf-8")
    assert runner.main([], folder) == 4
    assert "broken: three" in capsys.readouterr().out
    assert (folder / "RESULTS.md").read_bytes() == before


def test_one_benchmark_run_by_name_does_not_replace_the_results(runner, folder, capsys):
    assert runner.main(["two"], folder) == 0
    assert "## two" in (out := capsys.readouterr().out) and "## one" not in out
    assert not (folder / "RESULTS.md").exists()


@pytest.mark.parametrize("names", [["three"], ["one", "three"]])
def test_an_unknown_name_is_refused_with_those_that_there_are(runner, folder, names, capsys):
    assert runner.main(names, folder) == 2
    assert "one, two" in capsys.readouterr().out


def test_a_folder_without_benchmarks_is_no_success(runner, tmp_path):
    assert runner.main([], tmp_path) == 2
