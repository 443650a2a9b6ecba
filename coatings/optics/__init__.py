"""Light through layers: spectra of stacks and their exact derivatives. No file access here."""

from coatings.optics.delay import Dispersion, group_delay
from coatings.optics.gradients import (
    amplitude_gradient,
    gradient,
    index_gradient,
    weighted_gradient,
)
from coatings.optics.scene import Scene
from coatings.optics.spectrum import Response, reflectance, reflection, response
from coatings.optics.threads import get_threads, set_threads

__all__ = [
    "Dispersion",
    "Response",
    "Scene",
    "amplitude_gradient",
    "get_threads",
    "gradient",
    "group_delay",
    "index_gradient",
    "reflectance",
    "reflection",
    "response",
    "set_threads",
    "weighted_gradient",
]
