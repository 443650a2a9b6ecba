"""Places to write that can't be written, and runs that fail: what was there before stays whole."""

from __future__ import annotations

import errno
import os
import shutil
from pathlib import Path

import pytest
from small_product import process, refusal

from coatings.cli.main import run


def tree(folder: Path) -> dict[str, bytes]:
    """Every file under a folder."""
    return {
        str(path.relative_to(folder)): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


@pytest.fixture
def earlier(planned: Path, recipe: Path) -> Path:
    """The working folder with an earlier result in out/small."""
    shutil.copytree(planned, "out/small")
    return recipe.parent


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["--out", "R"], "is not a folder"),
        (["--out", "R/below"], "is not a folder"),
        (["--out", "/proc/x"], "can't be written"),
        (["--json", "missing/x.json"], "missing is not a folder"),
        (["--json", "out"], "out is a folder"),
        (["--json", "/dev/null"], "not a regular file"),
        (["--json", "/dev/stdout"], "not a regular file"),
        (["--json", "R"], "would replace"),
        (["--csv", "R"], "would replace"),
        (["--csv", "missing/x.csv"], "missing is not a folder"),
        (["--csv", "x.csv", "--json", "./x.csv"], "as --csv does"),
    ],
)
def test_places_that_cannot_be_written(
    earlier: Path, capsys: pytest.CaptureFixture[str], arguments: list[str], said: str
) -> None:
    before = tree(earlier)
    recipe = earlier / "small.toml"
    words = [word.replace("R", str(recipe)) if word[0] == "R" else word for word in arguments]
    (line,) = refusal(capsys, "curve", recipe, *words)
    assert said in line
    assert tree(earlier) == before


def test_plan_does_not_replace_its_own_recipe(
    earlier: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    before = tree(earlier)
    (line,) = refusal(capsys, "plan", "out/small/chosen.toml", "--out", "out/small")
    assert "would replace" in line
    assert tree(earlier) == before


@pytest.mark.parametrize("failing", ["fsync", "replace", "mkdir"])
def test_disk_that_fails_leaves_the_earlier_result(
    earlier: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, failing: str
) -> None:
    before = tree(earlier)
    calls = 0
    real = os.replace

    def full(*arguments: object, **_: object) -> None:
        nonlocal calls
        calls += 1
        if failing == "replace" and calls != 3:
            return real(*arguments)  # type: ignore[arg-type]
        raise OSError(errno.ENOSPC, "No space left on device", str(arguments[0]))

    monkeypatch.setattr(Path if failing == "mkdir" else os, failing, full)
    (line,) = refusal(
        capsys, "plan", "small.toml", "--facet", "front", "--json", "result.json", "--seed", "5"
    )
    monkeypatch.undo()
    assert "No space left on device" in line
    assert calls >= 1
    assert tree(earlier) == before


def test_failure_leaves_no_new_folder(
    recipe: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(_: int) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    refusal(capsys, "curve", recipe, "--out", "new/deep")
    monkeypatch.undo()
    assert sorted(path.name for path in recipe.parent.iterdir()) == ["small.toml"]


def test_picture_that_is_a_folder(earlier: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (earlier / "out/small/spectra.png").unlink()
    (earlier / "out/small/spectra.png").mkdir()
    before = tree(earlier)
    (line,) = refusal(capsys, "plan", "small.toml", "--facet", "front")
    assert "spectra.png is a folder" in line
    assert tree(earlier) == before


def test_link_keeps_its_place_and_its_target_is_written(recipe: Path) -> None:
    Path("store").mkdir()
    Path("c.json").symlink_to("store/real.json")
    assert run(["curve", str(recipe), "--json", "c.json", "--quiet"]) == 1
    assert Path("c.json").is_symlink()
    assert Path("store/real.json").read_text().startswith("{")


def test_json_inside_a_new_out_folder(recipe: Path) -> None:
    arguments = ["--out", "new", "--json", "new/c.json", "--csv", "new/c.csv", "--quiet"]
    assert run(["curve", str(recipe), *arguments]) == 1
    assert {path.name for path in Path("new").iterdir()} == {"c.json", "c.csv", "curve.png"}


def test_limit_of_the_shell_on_file_size(earlier: Path) -> None:
    before = tree(earlier)
    ended = process(
        "curve", "small.toml", "--csv", "big.csv", "--nm", "900", "1000", "0.01",
        cwd=earlier,
        preexec_fn=_little_room,
    )  # fmt: skip
    assert ended.returncode == 2
    assert ended.stdout == ""
    assert "can't be written" in ended.stderr
    assert "Traceback" not in ended.stderr
    assert tree(earlier) == before


def _little_room() -> None:
    import resource

    resource.setrlimit(resource.RLIMIT_FSIZE, (20_000, 20_000))


def test_start_writes_a_recipe_and_keeps_what_is_there(
    recipe: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["start", "mine"]) == 0
    assert "next: facetwright plan mine/starter.toml" in capsys.readouterr().out
    (line,) = refusal(capsys, "start", "mine")
    assert "already there" in line
    (line,) = refusal(capsys, "start", str(recipe))
    assert "not a folder" in line


def test_materials_as_json_and_picture(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    arguments = ["materials", "Ta2O5", "--json", "m.json", "--out", "pictures", "--quiet"]
    assert run(arguments) == 0
    assert '"doi"' in Path("m.json").read_text()
    assert Path("pictures/Ta2O5.png").read_bytes().startswith(b"\x89PNG")
