"""A folder with every file that the example recipes name."""

from pathlib import Path

import pytest

from recipes import put_files


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    put_files(tmp_path)
    return tmp_path
