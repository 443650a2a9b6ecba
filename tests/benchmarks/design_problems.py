"""Problems on which the search is measured: one facet each, and the layer counts that are compared."""

from __future__ import annotations

from dataclasses import dataclass

from design_recipes import recipe

from coatings.recipe import Recipe

ION_ASSISTED = {"method": "ion-assisted", "position_percent": 0.3}
MAGNETRON = {"method": "magnetron"}
E_BEAM = {"method": "e-beam"}
THICKNESS_ONLY = {"run_percent": 1.5, "layer_percent": 1.5}
LIMITS = {"layer_nm": [15.0, 400.0]}


@dataclass(frozen=True)
class DesignProblem:
    """A facet's recipe and the layer counts whose best stacks are compared."""

    recipe: Recipe
    counts: tuple[int, ...]


def _target(R: float, half: float, low: float, high: float) -> dict[str, object]:
    return {"reflectance": R, "tolerance": half, "band_nm": [low, high]}


PROBLEMS: dict[str, DesignProblem] = {
    "10 % under index errors": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 4, **LIMITS},
            _target(0.10, 0.01, 940.0, 1010.0),
            process=ION_ASSISTED,
        ),
        (1, 2, 3, 4),
    ),
    "5 % under thickness errors": DesignProblem(
        recipe(
            {"palette": ["M", "H"], "max_layers": 4, "layer_nm": [15.0, 400.0], "total_nm": 1200.0},
            _target(0.05, 0.01, 955.0, 997.0),
            process=THICKNESS_ONLY,
        ),
        (1, 2, 3, 4),
    ),
    "3 % with an optical monitor": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 4, "layer_nm": [10.0, 350.0]},
            _target(0.03, 0.01, 950.0, 1000.0),
            process={**E_BEAM, "holds": "optical"},
        ),
        (2, 3, 4),
    ),
    "30 % on a wide band": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 4, **LIMITS},
            _target(0.30, 0.02, 900.0, 1060.0),
            process=ION_ASSISTED,
        ),
        (2, 3, 4),
    ),
    "narrow antireflection": DesignProblem(
        recipe(
            {"palette": ["M", "H"], "max_layers": 4, "layer_nm": [20.0, 500.0]},
            {"at_most": 0.001, "band_nm": [1530.0, 1570.0]},
            process=MAGNETRON,
            chip={"wavelength_nm": 1550.0, "band_nm": [1530.0, 1570.0], "index": 3.2},
        ),
        (1, 2, 3, 4),
    ),
    "wide antireflection": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 4, "layer_nm": [10.0, 400.0]},
            {"at_most": 0.01, "band_nm": [860.0, 1100.0]},
            process=ION_ASSISTED,
        ),
        (2, 3, 4),
    ),
    "wide antireflection without errors": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 4, "layer_nm": [10.0, 400.0]},
            {"at_most": 0.01, "band_nm": [800.0, 1200.0]},
        ),
        (2, 3, 4),
    ),
    "two bands": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 4, "layer_nm": [15.0, 500.0]},
            _target(0.05, 0.015, 964.0, 988.0),
            {"at_most": 0.02, "band_nm": [795.0, 815.0]},
            process=ION_ASSISTED,
        ),
        (2, 3, 4),
    ),
    "three films": DesignProblem(
        recipe(
            {"palette": ["L", "M", "H"], "max_layers": 4, **LIMITS},
            _target(0.08, 0.008, 930.0, 1020.0),
            process=ION_ASSISTED,
        ),
        (2, 3, 4),
    ),
    "base and cap": DesignProblem(
        recipe(
            {
                "palette": ["L", "H"],
                "max_layers": 4,
                "base": [{"material": "M", "nm": 12.0}],
                "cap": [{"material": "M", "nm": 30.0}],
                **LIMITS,
            },
            _target(0.06, 0.01, 940.0, 1010.0),
            process=ION_ASSISTED,
        ),
        (1, 2, 3, 4),
    ),
    "mirror": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 12, **LIMITS},
            {"at_least": 0.89, "band_nm": [940.0, 1010.0]},
            process=ION_ASSISTED,
        ),
        (6, 8, 10),
    ),
    "mirror without errors": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 8, **LIMITS},
            {"at_least": 0.9, "band_nm": [900.0, 1060.0]},
        ),
        (6, 7, 8),
    ),
    "mirror and pump": DesignProblem(
        recipe(
            {"palette": ["L", "H"], "max_layers": 10, **LIMITS},
            {"at_least": 0.93, "band_nm": [964.0, 988.0]},
            {"at_most": 0.10, "band_nm": [800.0, 812.0]},
        ),
        (8, 9),
    ),
    "mirror of a film that absorbs": DesignProblem(
        recipe(
            {"palette": ["L", "X"], "max_layers": 6, "layer_nm": [10.0, 400.0]},
            {"at_least": 0.95, "absorption_at_most": 0.02, "band_nm": [950.0, 1000.0]},
            process=ION_ASSISTED,
        ),
        (4, 5, 6),
    ),
}
