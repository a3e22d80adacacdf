"""The solver's machine code is made once after installation; what the desk shows while that goes on."""

import gc
import threading
from collections.abc import Iterator
from contextlib import contextmanager

import streamlit as st

_begun, _done = threading.Event(), threading.Event()


def begin() -> None:
    """Prepare in the background; at every later start the code lies ready and this takes a moment."""
    _begun.set()
    threading.Thread(target=_prepare, daemon=True).start()


def _prepare() -> None:
    from engine.network import prepare

    try:
        prepare(_done.set)  # from there on weeks can be planned; the rest is made while somebody looks
    finally:
        _done.set()
    from engine.loads import prepare as prepare_loads
    from engine.reasons.prepare import prepare as prepare_reasons

    prepare_reasons()
    prepare_loads()
    _settle()


def _settle() -> None:
    """Take what stays until the end out of the garbage collector's rounds.

    Most objects of the process are modules, which never become garbage, and a round looks at all of them
    while every session waits.
    """
    import altair
    import pydeck

    import engine.compare
    import engine.report

    _ = altair, pydeck, engine
    gc.collect()
    gc.freeze()


@contextmanager
def prepared() -> Iterator[None]:
    """Whatever plans: says that the solver is being prepared as long as it is."""
    if _begun.is_set() and not _done.is_set():
        with st.spinner(
            "Preparing the solver: only at the first start after it was installed", show_time=True
        ):
            _done.wait()
    yield
