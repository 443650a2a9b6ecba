"""Layers and stacks as the coating house sees them: chip outward, in the order of deposition."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from coatings.errors import InputError, Problem


@dataclass(frozen=True)
class Layer:
    """One film: its material's name and its physical thickness [nm]."""

    material: str
    nm: float

    def __post_init__(self) -> None:
        if not 0.0 <= self.nm < float("inf"):
            raise InputError(
                Problem(f"layer of {self.material}", f"thickness is {self.nm} nm; give 0 or more")
            )


@dataclass(frozen=True)
class Stack:
    """Layers, chip outward."""

    layers: tuple[Layer, ...]

    @classmethod
    def of(cls, materials: Sequence[str], nm: Sequence[float]) -> Stack:
        """Stack from material names and thicknesses [nm] of equal length."""
        if len(materials) != len(nm):
            raise InputError(f"{len(materials)} materials but {len(nm)} thicknesses; give as many")
        return cls(tuple(Layer(m, float(t)) for m, t in zip(materials, nm, strict=True)))

    @property
    def materials(self) -> tuple[str, ...]:
        """Material of each layer, chip outward."""
        return tuple(layer.material for layer in self.layers)

    @property
    def nm(self) -> tuple[float, ...]:
        """Thickness of each layer [nm], chip outward."""
        return tuple(layer.nm for layer in self.layers)

    @property
    def total_nm(self) -> float:
        """Sum of the thicknesses [nm]."""
        return float(sum(self.nm))

    def __len__(self) -> int:
        return len(self.layers)

    def __iter__(self) -> Iterator[Layer]:
        return iter(self.layers)
