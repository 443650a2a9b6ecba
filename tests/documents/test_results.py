"""Results as text: no number that JSON does not have."""

from __future__ import annotations

import pytest

from coatings.documents.results import to_text


@pytest.mark.parametrize("value", [float("nan"), float("inf"), -float("inf")])
def test_what_is_no_number_is_not_written(value: float) -> None:
    with pytest.raises(ValueError, match="not JSON compliant"):
        to_text({"R": [value]})


def test_letters_stay_letters() -> None:
    assert to_text({"title": "\u00b5m"}) == '{\n "title": "\u00b5m"\n}\n'
