"""Compiles the kernels of this room before they are needed."""

from __future__ import annotations

import numpy as np

from engine.loads.anneal import begin, piece
from engine.loads.problem import LoadProblem
from engine.loads.solve import least_cost_loads
from engine.network import prepare as prepare_network


def prepare() -> None:
    """Compiles all kernels, or loads them from the user's cache folder: some seconds the very first time."""
    prepare_network()
    tiny = LoadProblem.of(
        supply=[5, 5],
        demand=[4, 3],
        start=[0, 2, 4],
        depot=[0, 1, 0, 1],
        per_load=[5, 7, 6, 3],
        load_size=[3, 3, 3, 3],
    )
    plan = least_cost_loads(tiny)
    piece(begin(tiny, plan.quantity, np.zeros(2, dtype=np.int64), 1, 0))
