"""Kernels: functions compiled to machine code, and the folder where that code is kept between runs."""

from __future__ import annotations

import hashlib
import inspect
import os
import tempfile
from collections.abc import Callable
from functools import cache
from pathlib import Path
from typing import Any, TypeVar, overload

import numba
import platformdirs

Function = TypeVar("Function", bound=Callable[..., object])


@overload
def kernel(function: Function, /) -> Function: ...
@overload
def kernel(signature: Any, /) -> Callable[[Function], Function]: ...
def kernel(given: Any, /) -> Any:
    """Compiles a function to run without holding Python's lock; the machine code is kept.

    As `@kernel` it compiles when it is first called: arguments must always come with the same types
    (int64 arrays, contiguous and writable, and named tuples of them), others would compile again.
    As `@kernel(signature)` it compiles at once, so such a module is imported only when it is needed.
    """
    if inspect.isfunction(given):
        return _compiled(given, None)
    return lambda function: _compiled(function, given)


def part(function: Function) -> Function:
    """Compiles `function` to be called by kernels only; its code is kept with theirs.

    Each array that it is given, alone or in a tuple, costs a count of references up and down: functions
    in the innermost loops take few.
    """
    options: Any = {"nogil": True, "no_cpython_wrapper": True, "no_cfunc_wrapper": True, "_nrt": False}
    compiled: Function = numba.njit(**options)(function)
    return compiled


def _compiled(function: Any, signature: Any) -> Any:
    settings: Any = numba.config
    before = settings.CACHE_DIR
    settings.CACHE_DIR = str(code_folder())
    try:
        return numba.jit(signature, nopython=True, nogil=True, cache=True)(function)
    except RuntimeError:
        # no source file to key the cache by (a zipped install): compile at every start
        return numba.jit(signature, nopython=True, nogil=True)(function)
    finally:
        settings.CACHE_DIR = before


@cache
def code_folder() -> Path:
    """Where compiled code is kept: one folder for each version of this package's source.

    In the user's cache folder, or in a temporary one of the user's own if that cannot be written.
    """
    name = f"kernels-{_version()}"
    for folder in (
        platformdirs.user_cache_path("hithe", appauthor=False) / name,
        Path(tempfile.gettempdir()) / f"hithe-{_user()}" / name,
    ):
        try:
            folder.mkdir(parents=True, exist_ok=True, mode=0o700)
            # code in a folder that somebody else may write to is never loaded
            if _is_own(folder) and _is_own(folder.parent) and os.access(folder, os.W_OK):
                return folder
        except OSError:
            continue
    return Path(tempfile.mkdtemp(prefix="hithe-"))


def _version() -> str:
    """A digest of every kernel's source: a cached caller may have an edited callee compiled into it."""
    digest = hashlib.sha256(numba.__version__.encode())
    for source in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(source.read_bytes())
    return digest.hexdigest()[:16]


def _user() -> str:
    return str(os.getuid()) if hasattr(os, "getuid") else "user"


def _is_own(folder: Path) -> bool:
    """Whether `folder` belongs to this user alone; where the system cannot say, it does."""
    if not hasattr(os, "getuid"):
        return True
    status = folder.stat()
    return status.st_uid == os.getuid() and not status.st_mode & 0o022
