"""Compile a kernel once and keep it on disk, wherever this machine lets us write.

Compiled code lies beside the source, or in the user's cache folder when the source's folder is
read-only. Where neither can be written the kernel is compiled anew in every process: slower to
start, equal in every other way, and without a word.

The compiler looks at the date of a kernel's own file only. Whoever edits a function that kernels in
another file call (`elementary`, `kernel`) deletes the .nbi files in this folder's __pycache__.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar, cast

from numba import njit

_Kernel = TypeVar("_Kernel", bound=Callable[..., Any])

EXACT = frozenset({"contract"})
"""A product and a sum may become one operation, rounded once: never less accurate."""

SUMS = frozenset({"contract", "reassoc"})
"""Sums may be taken in several strands: for plain totals only, where no order is better."""

PEAKS = frozenset({"contract", "nnan", "nsz"})
"""As EXACT where no nan can occur and +0 is as good as -0: for the largest of many."""


def compiled(flags: frozenset[str] = EXACT) -> Callable[[_Kernel], _Kernel]:
    """Decorator: compile for this machine, free of the interpreter's lock, cached on disk."""

    def decorate(function: _Kernel) -> _Kernel:
        options: dict[str, Any] = {
            "nogil": True,
            "error_model": "numpy",
            "fastmath": set(flags),
        }
        try:
            kernel = njit(cache=True, **options)(function)
        except RuntimeError:  # numba's answer when no folder for its cache can be written
            kernel = njit(**options)(function)
        return cast(_Kernel, kernel)

    return decorate
