"""Settings of the whole suite."""

from __future__ import annotations

from hypothesis import settings

# The same examples in every run: a failure is a change's fault, not the dice's.
settings.register_profile("steady", derandomize=True, deadline=None)
settings.load_profile("steady")
