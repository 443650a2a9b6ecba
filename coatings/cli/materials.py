"""``facetwright materials``: what is known, where from, over which wavelengths."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from coatings.cli.screen import Row
    from materials import Info, Material

Json = dict[str, Any]

GROUPS = {
    "semiconductor": "chips and substrates",
    "film": "films",
    "metal": "metals",
    "witness": "witness pieces",
    "ambient": "surroundings",
}
LABELS = {"k_status": "k is"}


@click.command(
    epilog="Examples: facetwright materials Ta2O5 --nm 940 1000 20; facetwright materials oxide"
)
@click.argument("name", required=False)
@click.option(
    "--nm",
    nargs=3,
    type=float,
    metavar="FROM TO STEP",
    help="Wavelengths of the table of NAME, in nm.",
)
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    metavar="DIR",
    help="Draw n and k of NAME into this folder.",
)
@click.option("--json", "json_file", metavar="FILE", help="Write as JSON; '-' is standard output.")
@click.option("--quiet", is_flag=True, help="Print nothing.")
def materials(
    name: str | None,
    nm: tuple[float, float, float] | None,
    out: Path | None,
    json_file: str | None,
    quiet: bool,
) -> int:
    """List the materials; or show NAME with n and k, sample, range and source; or search for a word.

    An alloy takes its composition after a colon: AlGaAs:0.30.
    """
    import materials as library
    from coatings.cli.options import DEFAULT_SEED, Shared
    from coatings.cli.shelf import list_result, load_shown, shown_result
    from coatings.errors import InputError, Problem
    from materials.index import DECLINED

    shared = Shared(out=out, json=json_file, seed=DEFAULT_SEED, workers=1, quiet=quiet)
    found = library.search(name) if name and not _is_entry(name) else None
    if name is not None and not found and not _is_entry(name):
        near = library.nearest(name)
        hint = f"did you mean {near}?" if near else "'facetwright materials' lists all"
        hint = DECLINED.get(name, hint)
        raise InputError(Problem(name, f"is not a material; {hint}"))
    if name is None or found:
        if nm is not None or out is not None:
            raise InputError(Problem("--nm, --out", "need the name of one material"))
        infos = library.entries() if name is None else found or ()
        shared.check_outputs({}, folder=None, inputs=[])
        shared.deliver({}, _text(list_result(infos)), list_rows(infos))
        return 0
    material = load_shown(name)
    result = shown_result(material, nm)
    shared.check_outputs({}, folder=out, inputs=[])
    files = {} if out is None else _picture(material, out)
    shared.deliver(files, _text(result), material_rows(result))
    return 0


def _is_entry(name: str) -> bool:
    import materials as library

    return ":" in name or name in library.names()


def _text(result: Json) -> str:
    import json

    return json.dumps(result, indent=1, allow_nan=False, ensure_ascii=False) + "\n"


def _picture(material: Material, folder: Path) -> dict[Path, bytes]:
    from coatings.documents.pictures import material_picture

    return {folder / f"{material.name.replace(':', '-')}.png": material_picture(material)}


def list_rows(infos: tuple[Info, ...]) -> Iterator[Row]:
    """One row an entry, by use."""
    from rich.markup import escape

    from coatings.cli.screen import new_console

    rows = [
        (
            info.name,
            f"{info.range_nm[0]:.0f}-{info.range_nm[1]:.0f}",
            info.k_status,
            str(info.year or "-"),
        )
        for info in infos
    ]
    heads = ("name", "range, nm", "k", "year")
    widths = [max(len(head), *(len(row[c]) for row in rows)) for c, head in enumerate(heads)]
    room = max(new_console().width - sum(widths) - 2 * len(widths), 8)

    def line(cells: tuple[str, ...], sample: str) -> str:
        cut = sample if len(sample) <= room else f"{sample[: room - 1]}…"
        padded = (cell.ljust(width) for cell, width in zip(cells, widths, strict=True))
        return escape("  ".join([*padded, cut]))

    yield None, f"[bold]{line(heads, 'sample')}[/bold]"
    for use, title in GROUPS.items():
        members = [(info, row) for info, row in zip(infos, rows, strict=True) if info.use == use]
        if members:
            yield None, f"[bold]{title}[/bold]"
        for info, row in members:
            yield None, line(row, info.sample)
    noun = "entry" if len(infos) == 1 else "entries"
    yield None, f"{len(infos)} {noun}; 'facetwright materials NAME' shows one with its source"


def material_rows(result: Json) -> Iterator[Row]:
    """Provenance, n and k, and how far the siblings are."""
    from rich.markup import escape

    yield None, f"[bold]{escape(result['name'])}[/bold]  {escape(result['sample'])}"
    for label in ("process", "temperature", "k_status", "accuracy", "source", "doi", "notes"):
        if result[label]:
            yield f"{LABELS.get(label, label)}:", escape(str(result[label]))
    yield "range:", f"{result['range_nm'][0]:g} to {result['range_nm'][1]:g} nm"
    yield None, f"[bold]{'wavelength, nm':>14}{'n':>10}{'k':>11}[/bold]"
    for nm, n, k in zip(result["wavelength_nm"], result["n"], result["k"], strict=True):
        yield None, f"{nm:>14.6g}{n:>10.5f}{k:>11.3g}"
    for number, other in enumerate(result["others"]):
        yield (
            "siblings:" if number == 0 else "",
            f"{other['name']}: n {other['mean_n']:+.3f} on average, at most "
            f"{other['worst_n']:+.3f} (at {other['worst_nm']:.0f} nm)",
        )
