"""The compiled copy of `filmstack.wave.arithmetic` and `kernels`; importing this module loads the compiler.

The functions are compiled with a tile of `TILE` points, serial, without fast-math, and release the
interpreter lock. The cache's folder carries a hash of this room and of the package versions, so a
change of either never meets a stale file.
"""

from __future__ import annotations

import hashlib
import os
import tempfile
from collections.abc import Callable
from pathlib import Path
from types import FunctionType
from typing import Any

import numba
import numpy as np

from filmstack.wave import arithmetic, kernels

TILE = 256


def _cache_folder() -> Path:
    """Return the folder of the compile cache, of this user and of exactly this code."""
    digest = hashlib.sha256(f"{numba.__version__} {np.__version__} {os.environ.get('NUMBA_CPU_NAME', '')}".encode())
    for path in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(path.read_bytes())
    home = os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache"
    for base in (Path(home), Path(tempfile.gettempdir())):
        folder = base / "filmstack" / digest.hexdigest()[:16]
        try:
            folder.mkdir(parents=True, exist_ok=True)
        except OSError:
            continue
        return folder
    raise OSError("no writable folder for compiled code")


def _compile() -> dict[str, Callable[..., Any]]:
    namespace: dict[str, Any] = {**vars(arithmetic), **vars(kernels), "TILE": TILE}
    config: Any = numba.config
    before = config.CACHE_DIR
    config.CACHE_DIR = str(_cache_folder())
    try:
        for name in (*arithmetic.COMPILED, *kernels.COMPILED):
            plain = namespace[name]
            copy = FunctionType(plain.__code__, namespace, name, plain.__defaults__)
            copy.__module__, copy.__qualname__ = __name__, name
            namespace[name] = numba.njit(
                nogil=True, cache=True, error_model="numpy", forceinline=not name.startswith("run_")
            )(copy)
    finally:
        config.CACHE_DIR = before
    return {name: namespace[name] for name in kernels.COMPILED}


FUNCTIONS = _compile()
"""Compiled functions by name."""
