"""The best range as a window to paste into a recipe."""

from __future__ import annotations

from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal

from coatings.trade.best import NOTHING, BestFront

_PARTS_OF_RANGE = 100
_MOST_DECIMALS = 12


def rounded_inward(low: float, high: float) -> tuple[Decimal, Decimal] | None:
    """Middle and half width of the widest short decimal range inside ``low`` ... ``high``.

    Both ends are rounded inward to about a hundredth of the range; None for a range too narrow to
    write.
    """
    width = Decimal(high) - Decimal(low)
    if width <= Decimal(1).scaleb(2 - _MOST_DECIMALS):
        return None
    step = Decimal(1).scaleb((width / _PARTS_OF_RANGE).adjusted())
    least = Decimal(low).quantize(step, rounding=ROUND_CEILING)
    most = Decimal(high).quantize(step, rounding=ROUND_FLOOR)
    return (least + most) / 2, (most - least) / 2


def window_text(best: BestFront, *, drive_A: float) -> str | None:
    """A [[front.windows]] table with reflectance and tolerance; None where there is no range."""
    if best.R_front is None or best.R_low is None or best.R_high is None:
        return None
    rounded = rounded_inward(best.R_low, best.R_high)
    if rounded is None:
        return None
    middle, half = rounded
    why = "no limit binds" if best.limited_by == NOTHING else f"limited by {best.limited_by}"
    return (
        "[[front.windows]]\n"
        f"reflectance = {middle:f}  # best {best.R_front:.3g} for {drive_A:g} A: "
        f"{best.front_W:.4g} W, {why}\n"
        f"tolerance   = {half:f}  # within 1 % of it, all limits kept\n"
    )
