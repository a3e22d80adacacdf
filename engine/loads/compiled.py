"""Kernels of this room: their machine code is kept apart for each version of its source."""

from __future__ import annotations

import hashlib
from functools import cache
from pathlib import Path
from typing import Any

import numba

from engine.network.compiled import Function, code_folder, part

__all__ = ["kernel", "part"]


def kernel(function: Function) -> Function:
    """Compiles a function to run without holding Python's lock, see `engine.network.compiled.kernel`.

    A kernel has the parts that it calls compiled into it, wherever they stand; so a change of any file of
    this room must not find its old code.
    """
    settings: Any = numba.config
    before = settings.CACHE_DIR
    settings.CACHE_DIR = str(_folder())
    options: dict[str, Any] = {"nopython": True, "nogil": True}
    try:
        compiled: Function = numba.jit(cache=True, **options)(function)
    except RuntimeError:
        # no source file to key the cache by: compile at every start
        compiled = numba.jit(**options)(function)
    finally:
        settings.CACHE_DIR = before
    return compiled


@cache
def _folder() -> Path:
    digest = hashlib.sha256()
    for source in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(source.read_bytes())
    folder = code_folder() / f"loads-{digest.hexdigest()[:16]}"
    folder.mkdir(exist_ok=True, mode=0o700)
    return folder
