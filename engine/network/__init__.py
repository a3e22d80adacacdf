"""The exact solver of transportation problems: integers and arrays only, every answer proved."""

from engine.network.compiling import prepare
from engine.network.flow import Contradiction, Cut, Flow
from engine.network.problem import UNLIMITED, Problem
from engine.network.proof import NotProved, Proof, prove
from engine.network.solve import least_cost

__all__ = [
    "UNLIMITED",
    "Contradiction",
    "Cut",
    "Flow",
    "NotProved",
    "Problem",
    "Proof",
    "least_cost",
    "prepare",
    "prove",
]
