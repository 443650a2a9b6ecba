"""The input file: closed schema, all problems at once, units in key names."""

from __future__ import annotations

from coatings.recipe.availability import check_available, unavailable
from coatings.recipe.chip import Chip, Guide, GuideLayer
from coatings.recipe.facet import Facet, FacetName, LayerEntry
from coatings.recipe.feedback import Amplifier, External
from coatings.recipe.laser import Laser
from coatings.recipe.load import load_recipe, parse_recipe
from coatings.recipe.paths import KeyPath
from coatings.recipe.process import ProcessErrors
from coatings.recipe.recipe import Recipe
from coatings.recipe.window import Window
from coatings.recipe.witness import Witness

__all__ = [
    "Amplifier",
    "Chip",
    "External",
    "Facet",
    "FacetName",
    "Guide",
    "GuideLayer",
    "KeyPath",
    "Laser",
    "LayerEntry",
    "ProcessErrors",
    "Recipe",
    "Window",
    "Witness",
    "check_available",
    "load_recipe",
    "parse_recipe",
    "unavailable",
]
