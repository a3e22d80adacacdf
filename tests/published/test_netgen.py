"""The NETGEN instance inside networkx as a transportation problem; its optimum is published there.

Source: networkx 3.6.1, networkx/algorithms/flow/tests: `netgen-2.gpickle.bz2` and the value that its test
asserts, 6749969302. Generator: Klingman, Napier & Stutz (1974). Brought into the form of a
transportation problem as by Wagner (1959): an arc with a capacity is a customer that orders the
capacity; the arc's tail serves it at the arc's cost with what flows, its head at no cost with the rest.
"""

from __future__ import annotations

import bz2
import pickle
from importlib.resources import files

import numpy as np

from engine.network import Problem, least_cost

PUBLISHED = 6749969302


def netgen() -> Problem:
    """The instance in Wagner's form."""
    source = files("networkx.algorithms.flow.tests").joinpath("netgen-2.gpickle.bz2")
    graph = pickle.loads(bz2.decompress(source.read_bytes()))
    node = {name: i for i, name in enumerate(graph)}
    supply = np.zeros(len(graph), dtype=np.int64)
    for name, given in graph.nodes(data=True):
        supply[node[name]] -= given.get("demand", 0)
    demand, depot, cost = [], [], []
    for tail, head, given in graph.edges(data=True):
        demand.append(given["capacity"])
        supply[node[head]] += given["capacity"]
        depot += [node[tail], node[head]]
        cost += [given["weight"], 0]
    start = np.arange(len(demand) + 1) * 2
    return Problem(supply, np.array(demand), start, np.array(depot), np.array(cost))


def test_netgen_costs_what_is_published() -> None:
    assert least_cost(netgen()).cost == PUBLISHED
