"""Files that are no recipes: one clear line each."""

from __future__ import annotations

import hashlib
import os
import subprocess
import sys
from pathlib import Path

import pytest
from recipe_texts import document, front

from coatings.errors import RecipeError
from coatings.recipe import load_recipe, parse_recipe


def refused(path: Path) -> str:
    with pytest.raises(RecipeError, match=path.name) as caught:
        load_recipe(path)
    assert len(caught.value.problems) == 1
    line = str(caught.value)
    assert "\n" not in line
    return line


def test_missing_file(tmp_path: Path) -> None:
    assert "no such file" in refused(tmp_path / "gone.toml")


def test_folder_instead_of_file(tmp_path: Path) -> None:
    assert "is a folder; expected a file" in refused(tmp_path)


def test_path_through_a_file(tmp_path: Path) -> None:
    (tmp_path / "plain").write_text("")
    assert "can't be read (not a directory)" in refused(tmp_path / "plain" / "x.toml")


def test_file_name_with_a_zero_byte(tmp_path: Path) -> None:
    with pytest.raises(RecipeError, match="can't be read"):
        load_recipe(tmp_path / "a\0b.toml")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no pipes here")
def test_pipe_is_refused_and_does_not_wait(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.toml")
    assert "is not a regular file" in refused(tmp_path / "pipe.toml")


@pytest.mark.skipif(not Path("/dev/null").exists(), reason="no devices here")
def test_device() -> None:
    assert "is not a regular file" in refused(Path("/dev/null"))


def test_too_large(tmp_path: Path) -> None:
    path = tmp_path / "large.toml"
    path.write_bytes(b"#" * 1_000_001)
    assert "is larger than 1 MB" in refused(path)


@pytest.mark.parametrize("content", ["", "\n \t\n"])
def test_empty(tmp_path: Path, content: str) -> None:
    path = tmp_path / "empty.toml"
    path.write_text(content)
    assert "is empty" in refused(path)


@pytest.mark.parametrize(
    ("content", "place"),
    [
        (b"recipe = 1\0", "byte 11"),
        (b"\x89PNG\r\n\x1a\n", "byte 1"),
        ("recipe = 1".encode("utf-16"), "byte 1"),
        (b'title = "\xe9t\xe9"', "byte 10"),
    ],
)
def test_binary_or_undecodable(tmp_path: Path, content: bytes, place: str) -> None:
    path = tmp_path / "binary.toml"
    path.write_bytes(content)
    assert f"is not text in UTF-8 ({place}" in refused(path)


def test_byte_order_mark_is_no_fault(tmp_path: Path) -> None:
    path = tmp_path / "marked.toml"
    path.write_bytes(b"\xef\xbb\xbf" + document().encode())
    assert load_recipe(path).text == document()


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("recipe = 1\n[chip\n", "line 2, column 6"),
        ("recipe = 1\nlength um = 3\n", "line 2, column 8"),
        ("recipe = 1\nrecipe = 1\n", "line 2"),
        ('title = "a\u0007b"', "line 1"),
    ],
)
def test_not_toml_names_line_and_column(text: str, said: str) -> None:
    with pytest.raises(RecipeError, match=r"^x\.toml: is not TOML: .*" + said) as caught:
        parse_recipe(text, path=Path("x.toml"))
    assert str(caught.value).isprintable()


@pytest.mark.parametrize(
    "text",
    [
        "a = " + "[" * 100_000,
        "a = " + "[" * 400 + "]" * 400 + "\nb = " + "{x = " * 5000,
        "a" + ".a" * 100_000 + " = 1",
        "a" + ".a" * 4000 + " = 1",
    ],
)
def test_deep_nesting(text: str) -> None:
    with pytest.raises(RecipeError, match="is nested too deeply"):
        parse_recipe(text, path=Path("x.toml"))


def test_number_of_too_many_digits_is_one_line() -> None:
    with pytest.raises(RecipeError, match=r"is not TOML: .*digits"):
        parse_recipe("recipe = 1" + "0" * 5000, path=Path("x.toml"))


def test_sha256_is_of_the_bytes(tmp_path: Path) -> None:
    content = document(front()).replace("\n", "\r\n").encode() + "# µ".encode()
    path = tmp_path / "x.toml"
    path.write_bytes(content)
    recipe = load_recipe(path)
    assert recipe.sha256 == hashlib.sha256(content).hexdigest()
    assert recipe.text.encode() == content
    assert parse_recipe(recipe.text, path=path).sha256 == recipe.sha256


def test_import_leaves_heavy_packages_alone() -> None:
    code = (
        "import sys, coatings.recipe; "
        "print([m for m in ('scipy', 'numba', 'matplotlib') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
