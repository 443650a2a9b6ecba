"""[process]: one-sigma errors of the coating run, and what the run orders by."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Annotated, Any, Literal

from pydantic import Field

from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.section import Name, Section, entry, number

Method = Literal["e-beam", "ion-assisted", "magnetron", "ion-beam"]
Holds = Literal["physical", "optical"]
_BY_MATERIAL = "a table by material such as {{ Al2O3 = {} }}"


class ProcessTable(Section):
    """[process], [front.process] or [rear.process] as written."""

    method: Method | None = entry(
        "Deposition method: fills the errors that are not given, printed as assumed",
        default=None,
        otherwise='nothing is filled in; without any [process] "ion-assisted" is assumed',
    )
    run_percent: float = number(
        "Thickness error of all layers of a run together", "percent", default=0.0, ge=0.0, le=50.0
    )
    layer_percent: float = number(
        "Thickness error of each layer on its own", "percent", default=0.0, ge=0.0, le=50.0
    )
    thickness_sigma_nm: float = number(
        "Thickness error of each layer on its own, absolute", "nm", default=0.0, ge=0.0, le=100.0
    )
    index: dict[Name, Annotated[float, Field(ge=0.0, le=1.0)]] = entry(
        "Index error of each film, run to run",
        default={},
        unit="1",
        expects=_BY_MATERIAL.format("0.01"),
        item="a number from 0 to 1",
    )
    holds: Holds = entry(
        "What the monitor holds when the index drifts: thickness, or index times thickness",
        default="physical",
    )
    position_percent: float = number(
        "Thickness error from chip to chip within a run: place in the fixture",
        "percent",
        default=0.0,
        ge=0.0,
        le=50.0,
    )
    chip_index: float = number(
        "Error of the modal index from chip to chip; with a guide it shifts every guide index",
        "1",
        default=0.0,
        ge=0.0,
        le=1.0,
    )
    decimals_nm: int = number(
        "Decimals of a nanometre to which thickness is ordered", "1", default=1, ge=0, le=6
    )
    rate_nm_per_s: dict[Name, Annotated[float, Field(gt=0.0, le=1000.0)]] = entry(
        "Deposition rate of each film: deposition time in the shortlist",
        default={},
        unit="nm/s",
        expects=_BY_MATERIAL.format("0.3"),
        item="a rate above 0, in nm/s",
    )
    stress_MPa: dict[Name, Annotated[float, Field(ge=-1e4, le=1e4)]] = entry(
        "Stress of each film; compressive is negative",
        default={},
        unit="MPa",
        expects=_BY_MATERIAL.format("-100"),
        item="a stress, in MPa",
    )
    stress_max_N_per_m: float | None = number(
        "Limit of the sum of stress times thickness, either sign; with stress_MPa",
        "N/m",
        default=None,
        noun="a limit",
        otherwise="no limit",
        gt=0.0,
        le=1e6,
    )
    air_shift_percent: dict[Name, Annotated[float, Field(ge=-10.0, le=20.0)]] = entry(
        "Rise of a film's index when the chamber is vented; the vented film is to be right",
        default={},
        unit="percent",
        expects=_BY_MATERIAL.format("0.5"),
        item="a percentage from -10 to 20",
    )


BY_MATERIAL_KEYS = ("index", "rate_nm_per_s", "stress_MPa", "air_shift_percent")


@dataclass(frozen=True)
class MethodErrors:
    """One-sigma errors that are common practice for a deposition method (from memory)."""

    run_percent: float
    layer_percent: float
    thickness_sigma_nm: float
    index_each_film: float
    position_percent: float
    chip_index: float


METHODS: Mapping[str, MethodErrors] = {
    "e-beam": MethodErrors(2.0, 1.5, 0.5, 0.02, 1.0, 0.005),
    "ion-assisted": MethodErrors(1.0, 1.0, 0.3, 0.01, 0.5, 0.005),
    "magnetron": MethodErrors(0.4, 0.4, 0.2, 0.005, 0.3, 0.005),
    "ion-beam": MethodErrors(0.2, 0.2, 0.1, 0.003, 0.2, 0.005),
}
ASSUMED_METHOD: Method = "ion-assisted"

_SAID = {
    "run_percent": "run {:g} %",
    "layer_percent": "layer {:g} %",
    "thickness_sigma_nm": "thickness {:g} nm",
    "position_percent": "position {:g} %",
    "chip_index": "chip index {:g}",
}


@dataclass(frozen=True)
class ProcessErrors:
    """One-sigma errors of one facet's run, methods and overrides worked in.

    ``index`` names every film of the facet and every film the recipe names; ``assumed`` are
    sentences to be printed: what came from a method and not from the recipe.
    """

    method: Method | None
    run_percent: float
    layer_percent: float
    thickness_sigma_nm: float
    index: Mapping[str, float]
    holds: Holds
    position_percent: float
    chip_index: float
    decimals_nm: int
    rate_nm_per_s: Mapping[str, float] = field(default_factory=dict)
    stress_MPa: Mapping[str, float] = field(default_factory=dict)
    stress_max_N_per_m: float | None = None
    air_shift_percent: Mapping[str, float] = field(default_factory=dict)
    assumed: tuple[str, ...] = ()


def process_errors(
    common: ProcessTable | None, own: ProcessTable | None, *, films: Sequence[str]
) -> ProcessErrors:
    """Errors of one facet's run.

    Parameters
    ----------
    common : [process], or None when the recipe has none
    own : [front.process] or [rear.process]; its keys go before those of ``common``, film by film
        in the tables by material
    films : materials of the facet's films, to which a method's index error applies

    Returns
    -------
    ProcessErrors
    """
    given = _merged(common, own)
    is_assumed = common is None and "method" not in given
    if is_assumed:
        given["method"] = ASSUMED_METHOD
    method = given.get("method")
    index: dict[str, float] = dict(given.pop("index", {}))
    said: list[str] = []
    if method is not None:
        practice = METHODS[method]
        for key, text in _SAID.items():
            if key not in given:
                given[key] = getattr(practice, key)
                said.append(text.format(given[key]))
        said += _fill_index(index, practice, films)
    filled = ProcessTable.model_validate({**given, "index": index})
    keys = set(ProcessTable.model_fields)
    return ProcessErrors(
        **{key: getattr(filled, key) for key in keys},
        assumed=_sentences(method, said, is_assumed=is_assumed),
    )


def _merged(common: ProcessTable | None, own: ProcessTable | None) -> dict[str, Any]:
    given: dict[str, Any] = {}
    for table in (common, own):
        if table is None:
            continue
        for key in table.model_fields_set:
            value = getattr(table, key)
            given[key] = {**given.get(key, {}), **value} if key in BY_MATERIAL_KEYS else value
    return given


def _fill_index(index: dict[str, float], practice: MethodErrors, films: Sequence[str]) -> list[str]:
    missing = [film for film in films if film not in index]
    for film in missing:
        index[film] = practice.index_each_film
    if not missing:
        return []
    return [f"index {practice.index_each_film:g} of {', '.join(missing)}"]


def _sentences(method: str | None, said: list[str], *, is_assumed: bool) -> tuple[str, ...]:
    if not said:
        return ()
    why = "the recipe has no [process]" if is_assumed else "not given in [process]"
    return (f"method {method} assumed ({why}; common practice): {', '.join(said)}",)


def stress_conflicts(
    common: ProcessTable | None,
    own: ProcessTable | None,
    *,
    films: Sequence[str],
    at: KeyPath,
) -> Iterator[Found]:
    """A limit of the stress needs the stress of every film of the facet.

    ``at`` is the section that is blamed: the facet's own when it gives the limit.
    """
    given = _merged(common, own)
    if given.get("stress_max_N_per_m") is None:
        return
    missing = [film for film in films if film not in given.get("stress_MPa", {})]
    if missing:
        yield (
            at / "stress_MPa",
            f"says nothing of {', '.join(missing)}; stress_max_N_per_m needs it for every film",
        )
