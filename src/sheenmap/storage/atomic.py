"""Files that are whole or not there.

Each file is written beside its place under a name that starts with a dot, forced to the disk, and then renamed. A rename
within one folder either happens or does not, so that a full disk or a killed run leaves the old file as it was.
"""

import errno
import os
import tempfile
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import BinaryIO

from sheenmap.errors import Fault, OutputError, SettingsError

Writer = Callable[[BinaryIO], None]

_PLAIN = {
    errno.ENOSPC: "the disk is full",
    errno.EDQUOT: "the quota of this user is used up",
    errno.EROFS: "the disk is read-only",
    errno.EACCES: "writing is not allowed there",
    errno.EPERM: "writing is not allowed there",
    errno.EFBIG: "the disk does not take a file of this size",
}


def check_folder(path: Path, *, option: str = "--out") -> None:
    """Make sure, without writing, that results can go into ``path``: a folder that is there, or one that can be made.

    Raises
    ------
    SettingsError
        It is a file, or the nearest folder above that exists does not let this user write.
    """
    nearest = path.absolute()
    while not os.path.lexists(nearest):
        nearest = nearest.parent
    allowed = "a folder, or a place where one can be made"
    if not nearest.is_dir():
        _refuse(option, f'"{nearest}" is a file, not a folder', allowed)
    if not os.access(nearest, os.W_OK | os.X_OK):
        _refuse(option, f'"{nearest}" does not let you write', allowed)


def _refuse(option: str, found: str, allowed: str) -> None:
    raise SettingsError([Fault(key=option, found=found, allowed=allowed)], where="output folder")


def write_atomically(path: Path, writer: Writer) -> None:
    """Write one file whole; its folder is made when it is missing.

    Parameters
    ----------
    path : Path
        The final name.
    writer : callable
        Gets a binary file that can be written and sought.

    Raises
    ------
    OutputError
        The file could not be written; what stood at ``path`` is whole, and nothing else is left behind.
    """
    write_together(path.parent, {path.name: writer})


def write_together(folder: Path, writers: Mapping[str, Writer]) -> None:
    """Write several files of one folder: all of them are on the disk before the first gets its final name.

    Files are renamed in the order given. Raises ``OutputError`` as ``write_atomically`` does.
    """
    waiting: dict[Path, Path] = {}
    target = folder
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, writer in writers.items():
            target = folder / name
            waiting[target] = _new_name(target)
            _write_through(waiting[target], writer)
        for target, temporary in list(waiting.items()):
            os.replace(temporary, target)
            del waiting[target]
        _settle(folder)
    except OSError as error:
        raise OutputError(f"{target}: not written, {_PLAIN.get(error.errno or 0, error.strerror or str(error))}") from error
    finally:
        for temporary in waiting.values():
            temporary.unlink(missing_ok=True)


def _new_name(target: Path) -> Path:
    handle, name = tempfile.mkstemp(dir=target.parent, prefix=f".{target.name}.", suffix=".part")
    os.close(handle)
    return Path(name)


def _write_through(path: Path, writer: Writer) -> None:
    with path.open("w+b") as stream:
        writer(stream)
        stream.flush()
        os.fsync(stream.fileno())
    path.chmod(0o666 & ~_umask())  # a temporary file is for its owner alone; a result is as any other file


def _settle(folder: Path) -> None:
    """Force the renames to the disk, where the system knows how to."""
    if os.name != "posix":
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
