"""The files that a recipe names, found beside it."""

import hashlib
from pathlib import Path

from sheenmap.recipe.reader import Reader, did_you_mean, shown

LARGEST_CSV_BYTES = 20_000_000


class Folder:
    """Where a recipe stands; it reads the files that the recipe names and remembers their contents for the digest."""

    def __init__(self, place: Path) -> None:
        self.place = place
        self.contents: dict[str, bytes] = {}

    def path(self, reader: Reader, key: str, text: str) -> Path | None:
        """The file of that name, or None after a fault when there is none."""
        path = self.place / text
        try:
            if path.is_file():
                return path
            what = "a folder" if path.is_dir() else "no such file beside the recipe"
        except OSError as fault:
            what = fault.strerror or "cannot be looked at"
        reader.fault(key, f"found {shown(text)}: {what}", "a file, named from the recipe's folder", self._near(text))
        return None

    def _near(self, text: str) -> str:
        try:
            return did_you_mean(text, sorted(path.name for path in self.place.iterdir() if path.is_file()))
        except OSError:
            return ""

    def csv(self, reader: Reader, key: str, text: str) -> str | None:
        """The text of a CSV file, or None after a fault."""
        path = self.path(reader, key, text)
        data = None if path is None else self._bytes(reader, key, text, path)
        if data is None:
            return None
        try:
            content = data.decode("utf-8-sig")
        except UnicodeDecodeError:
            reader.fault(key, f"found {shown(text)}: not UTF-8 text", "a CSV in UTF-8")
            return None
        self.contents[text] = data
        return content

    def _bytes(self, reader: Reader, key: str, text: str, path: Path) -> bytes | None:
        try:
            size = path.stat().st_size
            if size <= LARGEST_CSV_BYTES:
                return path.read_bytes()
        except OSError as fault:
            reader.fault(key, f"found {shown(text)}: {fault.strerror or 'cannot be read'}", "a file that can be read")
            return None
        reader.fault(key, f"found {shown(text)}: {size / 1e6:.0f} MB", f"at most {LARGEST_CSV_BYTES / 1e6:.0f} MB")
        return None

    def digest(self, recipe_text: str) -> str:
        """SHA-256 over the recipe's text and every CSV that it names, each preceded by its name and length."""
        whole = hashlib.sha256(recipe_text.encode())
        for name in sorted(self.contents):
            data = self.contents[name]
            whole.update(name.encode() + b"\0" + str(len(data)).encode() + b"\0" + data)
        return whole.hexdigest()


def is_csv(text: str) -> bool:
    """Whether a name is that of a CSV file."""
    return text.lower().endswith(".csv")


def csv_header(text: str) -> str:
    """The header of a CSV text without blanks: its first line that is no comment."""
    lines = (line.strip() for line in text.splitlines())
    return next((line.replace(" ", "") for line in lines if line and not line.startswith("#")), "")
