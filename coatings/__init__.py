"""facetwright: facet coatings of semiconductor lasers, from windows to orders and verdicts."""

__version__ = "0.1.0"
