"""One plan of the small product, shared by the tests that look at what it left."""

from __future__ import annotations

from pathlib import Path

import pytest
from small_product import written

from coatings.cli.main import run


@pytest.fixture
def recipe(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The small recipe in the working folder."""
    monkeypatch.chdir(tmp_path)
    return written(tmp_path)


@pytest.fixture(scope="session")
def planned(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Folder that ``plan`` of the small product wrote."""
    folder = tmp_path_factory.mktemp("small")
    path = written(folder)
    out = folder / "planned"
    assert run(["plan", str(path), "--out", str(out), "--quiet", "--workers", "1"]) == 0
    return out
