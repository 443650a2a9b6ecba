"""The recipe file as a whole: every section of format version 1."""

from __future__ import annotations

from coatings.recipe.chip import Chip
from coatings.recipe.facet import FacetTable
from coatings.recipe.feedback import Amplifier, External
from coatings.recipe.laser import Laser
from coatings.recipe.material_section import MaterialSection
from coatings.recipe.process import ProcessTable
from coatings.recipe.section import PRINTABLE, Name, Section, entry, number
from coatings.recipe.witness import Witness

FORMAT_VERSION = 1


class RecipeTable(Section):
    """One product: the chip, its two facets, the run that coats them."""

    recipe: int = number("Format version of the recipe", "1", ge=1, le=1)
    title: str = entry(
        "What the product is called",
        default="",
        expects="one line of at most 200 characters",
        otherwise="the file's name",
        max_length=200,
        pattern=PRINTABLE,
    )
    revision: str = entry(
        "Revision of the recipe",
        default="",
        expects="one line of at most 40 characters",
        otherwise="none",
        max_length=40,
        pattern=PRINTABLE,
    )
    chip: Chip = entry("The laser chip as its facets see it")
    laser: Laser | None = entry(
        "From mirror loss to threshold and power",
        default=None,
        otherwise="no threshold or power is estimated",
    )
    external: External | None = entry(
        "A grating, fibre or mirror that feeds light back through the front",
        default=None,
        otherwise="none",
    )
    amplifier: Amplifier | None = entry(
        "For amplifiers and gain chips, below threshold", default=None, otherwise="none"
    )
    front: FacetTable = entry(
        "The front facet", default=FacetTable(), otherwise="a bare cleaved facet"
    )
    rear: FacetTable = entry(
        "The rear facet", default=FacetTable(), otherwise="a bare cleaved facet"
    )
    process: ProcessTable | None = entry(
        "One-sigma errors of the coating run",
        default=None,
        otherwise='method "ion-assisted" is assumed',
    )
    witness: tuple[Witness, ...] = entry(
        "The pieces that the vendor measures, one table [[witness]] a piece",
        default=(),
        expects="at most 50 tables in double brackets, [[witness]]",
        max_length=50,
    )
    materials: dict[Name, MaterialSection] = entry(
        "Materials that this recipe replaces or adds",
        default={},
        expects="tables [materials.NAME]",
    )
