"""Compiled code is kept where that is possible, and nobody hears of it where it is not."""

import os
import shutil
import subprocess
import sys
from pathlib import Path

import coatings
from coatings.optics.cache import compiled

USES = """
from coatings.optics.cache import compiled

@compiled()
def double(x):
    return x + x

print(double(2.0), type(double._cache).__name__)
"""


def _run(folder, **environment):
    """Run a script that lies in ``folder`` and compiles one function."""
    script = folder / "uses.py"
    script.write_text(USES)
    plain = {k: v for k, v in os.environ.items() if not k.startswith(("NUMBA_", "XDG_"))}
    plain["PYTHONPATH"] = str(Path(coatings.__file__).parents[1])
    done = subprocess.run(
        [sys.executable, str(script)],
        env={**plain, **environment},
        capture_output=True,
        text=True,
        timeout=120,
        check=True,
    )
    return done.stdout.split(), done.stderr


def test_code_is_kept_in_the_folder_asked_for(tmp_path):
    kept = tmp_path / "kept"
    out, err = _run(tmp_path, NUMBA_CACHE_DIR=str(kept))
    assert out == ["4.0", "FunctionCache"]
    assert err == ""
    assert list(kept.rglob("*.nbc"))
    shutil.rmtree(kept)


def test_without_a_folder_to_write_in(tmp_path):
    """A file stands where every folder would have to be made (root may write anywhere else)."""
    (tmp_path / "__pycache__").write_text("")
    wall = tmp_path / "wall"
    wall.write_text("")
    out, err = _run(tmp_path, HOME=str(wall), XDG_CACHE_HOME=str(wall))
    assert out == ["4.0", "NullCache"]
    assert err == ""


def test_a_cached_kernel_runs_like_its_source():
    @compiled()
    def scale(x: float, y: float) -> float:
        return x * y

    assert scale(3.0, 0.5) == 1.5
