"""Front reflectivity traded against threshold, power, load and efficiency; knows no recipes."""

from coatings.trade.best import BestFront, Drift
from coatings.trade.columns import Columns, TradeCase, lossy_front
from coatings.trade.front import Trade, trade
from coatings.trade.sweep import Sweep, sweep_current, sweep_length
from coatings.trade.window import window_text

__all__ = [
    "BestFront",
    "Columns",
    "Drift",
    "Sweep",
    "Trade",
    "TradeCase",
    "lossy_front",
    "sweep_current",
    "sweep_length",
    "trade",
    "window_text",
]
