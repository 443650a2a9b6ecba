"""A quick search for tests that are about something else than its quality."""

from __future__ import annotations

import pytest

from coatings.design import search


@pytest.fixture
def quick_search(monkeypatch):
    """Few starts, few draws: sound stacks, not the best ones."""
    effort = search._Effort(starts=24, keep=2, finish=3, draws=64, fine_draws=256)
    monkeypatch.setattr(search, "_effort", lambda count: effort)
