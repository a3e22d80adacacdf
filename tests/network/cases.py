"""Random small problems for Hypothesis: degenerate, tied, limited, sparse, negative, huge."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from hypothesis import strategies as st

from engine.network import UNLIMITED, Problem

RANGES = {"tied": (0, 2), "zero": (0, 0), "signed": (-9, 9), "plain": (1, 1000), "huge": (-(10**14), 10**14)}


@st.composite
def problems(draw: st.DrawFn, largest_depots: int = 5, largest_customers: int = 7) -> Problem:
    """Any problem: dense or sparse, repeated lanes, limits that may contradict each other."""
    depots = draw(st.integers(1, largest_depots))
    customers = draw(st.integers(1, largest_customers))
    most = draw(st.sampled_from([1, 3, 20, 10**12]))
    low, high = RANGES[draw(st.sampled_from(sorted(RANGES)))]
    demand = draw(st.lists(st.integers(0, most), min_size=customers, max_size=customers))
    density = draw(st.sampled_from(["dense", "sparse", "repeated"]))
    start, depot = [0], []
    for _ in range(customers):
        if density == "dense":
            here = list(range(depots))
        elif density == "sparse":
            here = sorted(draw(st.sets(st.integers(0, depots - 1))))
        else:
            here = draw(st.lists(st.integers(0, depots - 1), max_size=2 * depots))
        depot += here
        start.append(len(depot))
    rows = len(depot)
    cost = draw(st.lists(st.integers(low, high), min_size=rows, max_size=rows))
    limits = draw(st.sampled_from(["none", "upper", "lower", "both", "tight"]))
    at_least = at_most = None
    if limits in ("lower", "both"):
        at_least = draw(st.lists(st.sampled_from([0, 0, 0, 1, 2]), min_size=rows, max_size=rows))
    if limits in ("upper", "both"):
        caps = st.sampled_from([0, most // 2, most, 2 * most, UNLIMITED])
        at_most = draw(st.lists(caps, min_size=rows, max_size=rows))
    if limits == "tight":
        at_most = draw(st.lists(st.integers(0, most), min_size=rows, max_size=rows))
    if at_least is not None and at_most is not None:
        at_most = [max(a, b) for a, b in zip(at_least, at_most, strict=True)]
    supply = _split(draw, sum(demand), depots)
    if draw(st.booleans()) and rows:
        # a supply that some flow within the limits fits, so that most of these have an answer
        flow, demand = _some_flow(draw, start, rows, at_least, at_most, most)
        supply = [sum(x for x, i in zip(flow, depot, strict=True) if i == d) for d in range(depots)]
    return Problem(
        np.array(supply),
        np.array(demand),
        np.array(start),
        np.array(depot, dtype=np.int64),
        np.array(cost, dtype=np.int64),
        None if at_least is None else np.array(at_least, dtype=np.int64),
        None if at_most is None else np.array(at_most, dtype=np.int64),
    )


def _split(draw: st.DrawFn, whole: int, parts: int) -> list[int]:
    """`whole` in `parts` pieces, zeros included."""
    cuts = sorted(draw(st.lists(st.integers(0, whole), min_size=parts - 1, max_size=parts - 1)))
    return [b - a for a, b in zip([0, *cuts], [*cuts, whole], strict=True)]


def _some_flow(
    draw: st.DrawFn,
    start: list[int],
    rows: int,
    at_least: list[int] | None,
    at_most: list[int] | None,
    most: int,
) -> tuple[list[int], list[int]]:
    """Quantities within the limits, and what each customer gets from them."""
    flow = []
    for row in range(rows):
        low = 0 if at_least is None else at_least[row]
        high = low + most if at_most is None else min(at_most[row], low + most)
        flow.append(draw(st.sampled_from([low, high, (low + high) // 2])))
    return flow, [sum(flow[a:b]) for a, b in pairwise(start)]
