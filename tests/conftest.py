"""Settings of the whole suite."""

from __future__ import annotations

import os

# Before numpy is imported: threads of the linear algebra only fight here, the matrices are small.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

from hypothesis import settings

# The same examples in every run: a failure is a change's fault, not the dice's.
settings.register_profile("steady", derandomize=True, deadline=None)
settings.load_profile("steady")
