"""Facets of a recipe as optics sees them."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from coatings.errors import InputError
from coatings.facets import (
    chip_mode,
    chip_view,
    facet_spectrum,
    light_on,
    modal_index,
    window_views,
)
from coatings.recipe import Recipe, parse_recipe

CHIP = """
recipe = 1
[chip]
wavelength_nm = 1550.0
band_nm = [1530.0, 1570.0]
polarization = "TE"
length_um = 500.0
stripe_um = 2.0
"""
GUIDE = """
[chip.guide]
layers = [{ index = 3.17 }, { index = 3.38, um = 0.2 }, { index = 3.17 }]
"""
COATED = """
[materials.film]
index = 1.8
[front]
layers = [{ material = "film", nm = 215.27777777777777 }]
[[front.windows]]
at_most = 0.01
polarization = "both"
index = 3.25
"""
AT = np.array([1550.0])


def made(*parts: str) -> Recipe:
    return parse_recipe("".join(parts), path=Path("facet.toml"))


def test_bare_and_coated_mode_of_a_published_guide() -> None:
    # Figures computed for this project by two independent codes, a rigorous one among them; the model is
    # held to 4e-4 in |r|, and to 3 % of R for an antireflection coating.
    recipe = made(CHIP, GUIDE, COATED)
    assert chip_mode(recipe, AT, tm=False).n_eff[0].real == pytest.approx(3.207772, abs=1e-6)
    bare = facet_spectrum(recipe, "rear", wavelength_nm=AT)
    assert bare.R[0] == pytest.approx(0.312124, abs=4.5e-4)
    assert facet_spectrum(recipe, "front", wavelength_nm=AT).R[0] == pytest.approx(
        1.31603e-3, rel=2e-2
    )


def test_shares_add_up() -> None:
    seen = facet_spectrum(made(CHIP, GUIDE, COATED), "front", wavelength_nm=AT)
    assert seen.R + seen.T + seen.A + seen.S == pytest.approx([1.0], abs=1e-9)
    assert seen.model == "modal"


def test_a_sister_chip_has_its_index_at_the_wavelength_of_operation() -> None:
    recipe = made(CHIP, GUIDE, COATED)
    views = window_views(recipe.front.windows[0])
    assert [view.tm for view in views] == [False, True]
    for view in views:
        assert modal_index(recipe, AT, view=view)[0].real == pytest.approx(3.25, abs=1e-9)


def test_the_plane_wave_of_a_guide_stands_at_its_effective_index() -> None:
    recipe = made(CHIP, GUIDE)
    flat = chip_view(recipe, plane=True)
    n = modal_index(recipe, AT, view=flat)[0].real
    R = facet_spectrum(recipe, "front", wavelength_nm=AT, view=flat).R[0]
    assert pytest.approx(((n - 1) / (n + 1)) ** 2, abs=1e-12) == R


def test_an_absorbing_outside_is_refused() -> None:
    recipe = made(CHIP, "index = 3.2\n", '[front]\noutside = "Au"\n')
    with pytest.raises(
        InputError, match=r"facet\.toml: front\.outside: Au absorbs, k = .* at 1550 nm"
    ):
        light_on(recipe, recipe.front, wavelength_nm=AT, view=chip_view(recipe))


def test_a_guide_without_a_mode_names_the_recipe() -> None:
    guide = GUIDE.replace("3.38", "3.1")
    with pytest.raises(InputError, match=r"facet\.toml: chip\.guide: .*no.* mode"):
        chip_mode(made(CHIP, guide), AT, tm=False)


def test_a_tilt_beyond_total_reflection_names_its_key() -> None:
    recipe = made(CHIP, "index = 3.2\ntilt_deg = 40.0\nlateral_um = 3.0\n")
    with pytest.raises(InputError, match=r"facet\.toml: chip\.tilt_deg: .*total reflection"):
        facet_spectrum(recipe, "front", wavelength_nm=AT)


def test_no_tilt_is_as_without_the_key() -> None:
    plain, level = made(CHIP, "index = 3.2\n"), made(CHIP, "index = 3.2\ntilt_deg = 0.0\n")
    first, second = (facet_spectrum(r, "front", wavelength_nm=AT) for r in (plain, level))
    assert first.R[0] == second.R[0]
    assert second.model == "plane"
