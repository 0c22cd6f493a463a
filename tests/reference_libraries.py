"""General-purpose frame solvers that our answers are compared with, where they can be had."""

from __future__ import annotations

import ctypes
import importlib
import importlib.util
import sys
from pathlib import Path
from types import ModuleType

_OWN_LIBRARIES = (
    "libquadmath.so.0",
    "libgfortran.so.4",
    "libgfortran.so.5",
    "libblas.so.3",
    "liblapack.so.3",
)


def opensees() -> ModuleType:
    """The OpenSeesPy module, or ImportError with how to get it.

    Its Linux wheel carries BLAS and LAPACK, but version 3.7 looks for BLAS in the system only.
    A library of the same name that is already loaded is taken instead, so its own is loaded first.
    """
    name = "openseespylinux" if sys.platform.startswith("linux") else "openseespy"
    found = importlib.util.find_spec(name)
    if found is None or found.origin is None:
        raise ImportError(f"OpenSeesPy is not here: pip install {name} (64-bit Python 3.11-3.13)")
    own = Path(found.origin).parent / "lib"
    for library in _OWN_LIBRARIES:
        if (own / library).exists():
            ctypes.CDLL(str(own / library))
    try:
        return importlib.import_module(f"{name}.opensees")
    except (ImportError, RuntimeError, OSError) as error:  # it hides the cause in a RuntimeError
        cause = error.__context__ or error
        raise ImportError(
            f"OpenSeesPy does not start ({cause}); on Debian: apt install libblas3 liblapack3"
        ) from error


def pynite() -> ModuleType:
    """The Pynite module, or ImportError with how to get it."""
    try:
        return importlib.import_module("Pynite")
    except ImportError as error:
        raise ImportError("Pynite is not here: pip install PyNiteFEA") from error
