"""``facetwright materials``: what is known, where from, over which wavelengths."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from rich.console import Console

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
def materials(
    name: str | None, nm: tuple[float, float, float] | None, out: Path | None, json_file: str | None
) -> int:
    """List the materials; or show NAME with n and k, sample, range and source; or search for a word.

    An alloy takes its composition after a colon: AlGaAs:0.30.
    """
    import materials as library
    from coatings.cli.shelf import list_result, load_shown, shown_result
    from coatings.errors import InputError, Problem

    found = library.search(name) if name and not _is_entry(name) else None
    if name is not None and not found and not _is_entry(name):
        near = library.nearest(name)
        hint = f"; did you mean {near}?" if near else ""
        raise InputError(
            Problem(name, f"is not a material{hint} 'facetwright materials' lists all")
        )
    if name is None or found:
        if nm is not None or out is not None:
            raise InputError(Problem("--nm, --out", "need the name of one material"))
        infos = library.entries() if name is None else found or ()
        _deliver(list_result(infos), json_file, lambda console: _print_list(console, infos))
        return 0
    material = load_shown(name)
    result = shown_result(material, nm)
    _deliver(result, json_file, lambda console: _print_material(console, material, result))
    if out is not None:
        _draw(material, out)
    return 0


def _is_entry(name: str) -> bool:
    import materials as library

    return ":" in name or name in library.names()


def _deliver(result: Json, json_file: str | None, show: Any) -> None:
    import json
    import sys

    from rich.console import Console

    from coatings.documents.files import check_file, write_files

    text = json.dumps(result, indent=1, allow_nan=False, ensure_ascii=False) + "\n"
    if json_file == "-":
        sys.stdout.write(text)
        return
    if json_file is not None:
        path = Path(json_file)
        check_file(path, option="--json")
        write_files({path: text.encode()})
    show(Console(highlight=False))


def _print_list(console: Console, infos: tuple[Info, ...]) -> None:
    from rich.markup import escape

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
    room = max(console.width - sum(widths) - 2 * len(widths), 8)

    def line(cells: tuple[str, ...], sample: str) -> str:
        cut = sample if len(sample) <= room else f"{sample[: room - 1]}…"
        padded = (cell.ljust(width) for cell, width in zip(cells, widths, strict=True))
        return escape("  ".join([*padded, cut]))

    console.print(f"[bold]{line(heads, 'sample')}[/bold]")
    for use, title in GROUPS.items():
        members = [(info, row) for info, row in zip(infos, rows, strict=True) if info.use == use]
        if members:
            console.print(f"[bold]{title}[/bold]")
        for info, row in members:
            console.print(line(row, info.sample))
    console.print(f"{len(infos)} entries; 'facetwright materials NAME' shows one with its source")


def _print_material(console: Console, material: Material, result: Json) -> None:
    from rich.markup import escape
    from rich.table import Table

    console.print(f"[bold]{escape(result['name'])}[/bold]  {escape(result['sample'])}")
    for label in ("process", "temperature", "k_status", "accuracy", "source", "doi", "notes"):
        if result[label]:
            console.print(f"  {LABELS.get(label, label) + ':':<13}{escape(str(result[label]))}")
    console.print(f"  {'range:':<13}{result['range_nm'][0]:g} to {result['range_nm'][1]:g} nm")
    table = Table(box=None, pad_edge=False, header_style="bold")
    for head in ("wavelength, nm", "n", "k"):
        table.add_column(head, justify="right")
    for nm, n, k in zip(result["wavelength_nm"], result["n"], result["k"], strict=True):
        table.add_row(f"{nm:.6g}", f"{n:.5f}", f"{k:.3g}")
    console.print(table)
    for other in result["others"]:
        console.print(
            f"  {other['name']}: n differs by {other['mean_n']:+.3f} on average, at most "
            f"{other['worst_n']:+.3f} (at {other['worst_nm']:.0f} nm)"
        )


def _draw(material: Material, folder: Path) -> None:
    from coatings.documents.files import check_folder, write_files
    from coatings.documents.pictures import material_picture

    check_folder(folder)
    write_files({folder / f"{material.name.replace(':', '-')}.png": material_picture(material)})
