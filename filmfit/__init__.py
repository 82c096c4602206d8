"""filmfit: from measured R and T of a deposited film to its thickness, its properties and the deposition records.

A narrow, lazy door: nothing heavy is imported until a name is used.
"""

from importlib import import_module
from typing import Any

__version__ = "0.1.0"

_HOMES = {
    "FilmfitError": "filmfit.errors",
    "Quantity": "filmfit.result",
    "Result": "filmfit.result",
    "fit_run": "filmfit.jobs.fit",
    "load_run_file": "filmfit.runfile.load",
    "read_spectrum": "filmfit.spectra.read",
}

__all__ = ["FilmfitError", "Quantity", "Result", "__version__", "fit_run", "load_run_file", "read_spectrum"]


def __getattr__(name: str) -> Any:
    """Import a public name from its home on first use (PEP 562)."""
    home = _HOMES.get(name)
    if home is None:
        raise AttributeError(f"module 'filmfit' has no attribute '{name}'")
    return getattr(import_module(home), name)
