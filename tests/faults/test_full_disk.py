"""A disk that is full, a folder that cannot be, a run that is killed: what was there before stays whole."""

import errno
import os
import signal
import subprocess
import sys
import time

import pytest

from measurements import oxide_wafer
from sheenmap.errors import OutputError, SettingsError
from sheenmap.storage import check_folder, read_map, write_atomically, write_measurement, write_together


def full_disk(stream):
    stream.write(b"half of it")
    raise OSError(errno.ENOSPC, "No space left on device")


def test_a_full_disk_is_said_plainly_and_leaves_the_old_file(tmp_path):
    path = tmp_path / "result.bin"
    write_atomically(path, lambda stream: stream.write(b"old"))
    with pytest.raises(OutputError, match=r"result\.bin: not written, the disk is full"):
        write_atomically(path, full_disk)
    assert path.read_bytes() == b"old"
    assert os.listdir(tmp_path) == ["result.bin"]


def test_a_disk_that_fills_at_the_last_of_several_files_leaves_all_old_ones(tmp_path):
    for name in ("a", "b"):
        write_atomically(tmp_path / name, lambda stream: stream.write(b"old"))
    with pytest.raises(OutputError):
        write_together(tmp_path, {"a": lambda stream: stream.write(b"new"), "b": full_disk})
    assert (tmp_path / "a").read_bytes() == b"old"
    assert sorted(os.listdir(tmp_path)) == ["a", "b"]


def test_a_whole_map_survives_a_disk_that_fills_under_the_next(tmp_path, monkeypatch):
    write_measurement(oxide_wafer(width=120, height=100), tmp_path)
    before = {name: (tmp_path / name).read_bytes() for name in os.listdir(tmp_path)}
    seen = []

    def fails_at_the_fourth(descriptor):
        seen.append(descriptor)
        if len(seen) == 4:
            raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "fsync", fails_at_the_fourth)
    with pytest.raises(OutputError, match="the disk is full"):
        write_measurement(oxide_wafer(width=120, height=100, seed=9), tmp_path)
    assert {name: (tmp_path / name).read_bytes() for name in os.listdir(tmp_path)} == before
    read_map(tmp_path)


def test_a_writer_that_is_broken_leaves_nothing_behind(tmp_path):
    with pytest.raises(ZeroDivisionError):
        write_atomically(tmp_path / "result.bin", lambda stream: 1 // 0)
    assert os.listdir(tmp_path) == []


def test_a_file_in_place_of_the_folder_is_refused_before_the_work(tmp_path):
    (tmp_path / "taken").write_text("a file")
    for folder in (tmp_path / "taken", tmp_path / "taken" / "below"):
        with pytest.raises(SettingsError, match="is a file, not a folder"):
            check_folder(folder)
        with pytest.raises(OutputError, match="not written"):
            write_atomically(folder / "result.bin", lambda stream: stream.write(b""))


def test_a_folder_that_takes_no_files_is_refused_before_the_work():
    with pytest.raises(SettingsError, match="does not let you write"):
        check_folder(_read_only_place())


def test_a_folder_that_can_be_made_is_accepted_and_not_made_yet(tmp_path):
    check_folder(tmp_path / "new" / "deeper")
    assert not (tmp_path / "new").exists()


@pytest.mark.skipif(os.name != "posix", reason="kills by signal")
def test_a_killed_run_leaves_no_half_file_under_a_final_name(tmp_path):
    path = tmp_path / "result.bin"
    write_atomically(path, lambda stream: stream.write(b"old"))
    code = (
        "import sys, time; from pathlib import Path; from sheenmap.storage import write_atomically\n"
        "def slow(stream):\n"
        "    stream.write(b'half'); stream.flush(); print('half', flush=True); time.sleep(60)\n"
        "write_atomically(Path(sys.argv[1]), slow)\n"
    )
    run = subprocess.Popen([sys.executable, "-c", code, str(path)], stdout=subprocess.PIPE)
    assert run.stdout.readline() == b"half\n"
    run.send_signal(signal.SIGKILL)
    run.wait(timeout=10)
    run.stdout.close()
    time.sleep(0.01)
    assert path.read_bytes() == b"old"


def _read_only_place():
    """Even an administrator cannot write into this one; elsewhere the test says that it cannot be made."""
    from pathlib import Path

    place = Path("/proc/self")
    if not place.is_dir() or os.access(place, os.W_OK):
        pytest.skip("no folder here refuses this user")
    return place
