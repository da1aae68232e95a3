import json
import subprocess
import sys
import time
from dataclasses import dataclass, replace

import pytest
from click.testing import CliRunner

import sheenmap.measure
import sheenmap.recipe
import sheenmap.report
from measurements import nothing_claimed, oxide_wafer
from sheenmap.cli import program
from sheenmap.errors import Failure, Fault, OutputError, PictureError, RecipeError, SettingsError


@dataclass
class Road:
    """Stands in for the main road: gives what it is told to, and notes what it was asked."""

    gives: object
    asked: list

    def measure(self, photo, recipe, *, progress=None, with_candidates=False):
        self.asked.append((photo, with_candidates))
        if isinstance(self.gives, BaseException):
            raise self.gives
        return self.gives

    def explain(self, photo, recipe, x, y):
        return Explanation(text=f"pixel {x}, {y}: two thicknesses fit")


@dataclass
class Explanation:
    text: str

    def as_dict(self):
        return {"text": self.text, "odds": float("nan")}


@pytest.fixture
def road(monkeypatch):
    found = Road(gives=oxide_wafer(width=160, height=130), asked=[])
    monkeypatch.setattr(sheenmap.measure, "measure", found.measure, raising=False)
    monkeypatch.setattr(sheenmap.measure, "explain", found.explain, raising=False)
    monkeypatch.setattr(sheenmap.recipe, "read_recipe", lambda path: "recipe", raising=False)
    monkeypatch.setattr(sheenmap.report, "write_report", lambda measurement, path: path.write_text("page"), raising=False)
    return found


@pytest.fixture
def run(tmp_path):
    def call(*arguments, out=True):
        folder = ["--out", str(tmp_path / "out")] if out else []
        return CliRunner().invoke(program, ["map", "photo.png", "--recipe", "r.toml", *folder, *arguments])

    return call


def outcome(measurement, name):
    return replace(measurement, verdict=replace(measurement.verdict, outcome=name, sentence=f"{name}: because"))


@pytest.mark.parametrize(("name", "status"), [("passed", 0), ("failed", 1), ("not decidable", 3)])
def test_the_exit_status_is_the_verdicts_and_its_sentence_is_last(road, run, name, status):
    road.gives = outcome(road.gives, name)
    result = run()
    assert result.exit_code == status
    assert result.stdout.splitlines()[-1] == f"{name}: because"


def test_a_map_that_nobody_judges_is_done(road, run):
    road.gives = replace(road.gives, verdict=None)
    assert run().exit_code == 0


def test_files_of_the_contract_are_written(road, run, tmp_path):
    run("--candidates")
    names = {path.name for path in (tmp_path / "out").iterdir()}
    assert names == {"thickness.tif", "sigma.tif", "flags.tif", "candidates.tif", "summary.json", "report.html"}
    assert road.asked[0][1] is True


def test_where_nothing_can_be_claimed_files_are_written_and_the_reason_is_last(road, run, tmp_path):
    road.gives = nothing_claimed()
    result = run()
    assert result.exit_code == 3
    assert result.output.splitlines()[-1] == road.gives.sentence
    assert (tmp_path / "out" / "thickness.tif").exists()


def test_json_prints_the_summary_document_and_nothing_else(road, run, tmp_path):
    result = run("--json")
    assert json.loads(result.stdout) == json.loads((tmp_path / "out" / "summary.json").read_text())


def test_explain_prints_the_reason_and_writes_nothing(road, run, tmp_path):
    result = run("--explain", "12,7", out=False)
    assert (result.exit_code, result.stdout) == (0, "pixel 12, 7: two thicknesses fit\n")
    assert json.loads(run("--explain", "12,7", "--json", out=False).stdout)["odds"] is None
    assert not road.asked


@pytest.mark.parametrize("place", ["12", "a,b", "-1,3", "1,2,3"])
def test_a_place_that_is_none_is_refused(road, run, place):
    result = run(f"--explain={place}", out=False)
    assert result.exit_code == 2
    assert place in result.stderr


def test_out_is_asked_for_unless_a_pixel_is_explained(road, run):
    result = run(out=False)
    assert result.exit_code == 2
    assert "--out" in result.stderr


@pytest.mark.parametrize(
    ("fault", "status", "said"),
    [
        (RecipeError([Fault(key="view.angle_deg", found="95", allowed="below 90")], where="r.toml"), 2, "r.toml: 1 fault"),
        (SettingsError([Fault(key="--out", found="a file")]), 2, "--out"),
        (PictureError(Failure(path="photo.png", reason="is cut off")), 2, "photo.png: is cut off"),
        (OutputError("out/thickness.tif: not written, the disk is full"), 4, "the disk is full"),
        (MemoryError(), 4, "memory"),
        (RuntimeError("odd\nthing"), 4, "a fault of sheenmap itself: RuntimeError: odd thing"),
        (KeyboardInterrupt(), 130, "interrupted"),
    ],
)
def test_each_way_to_fail_has_its_lines_and_its_status(road, run, fault, status, said):
    road.gives = fault
    result = run()
    assert result.exit_code == status
    assert said in result.stderr
    assert "Traceback" not in result.stderr
    assert result.stdout == ""


def test_a_traceback_is_there_for_the_asking(road, run):
    road.gives = RuntimeError("odd")
    assert "Traceback" in run("-v").stderr


def test_a_folder_that_cannot_be_is_refused_before_anything_is_read(road, tmp_path):
    (tmp_path / "out").write_text("a file")
    result = CliRunner().invoke(program, ["map", "p.png", "--recipe", "r.toml", "--out", str(tmp_path / "out")])
    assert result.exit_code == 2
    assert "is a file, not a folder" in result.stderr
    assert not road.asked


def test_help_answers_at_once_and_loads_no_heavy_room():
    code = (
        "import sys; from sheenmap.cli import program\n"
        "try: program(['--help'])\n"
        "except SystemExit: pass\n"
        "print(sorted({name.split('.')[0] for name in sys.modules} & {'numpy', 'scipy', 'cv2', 'matplotlib', 'rich', 'jinja2'}))"
    )
    started = time.perf_counter()
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.splitlines()[-1] == "[]"
    assert time.perf_counter() - started < 3  # the aim is 0.3 s; a busy machine must not fail a test
