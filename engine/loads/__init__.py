"""Weeks whose vehicles are whole: loads, charges per use, openings, drops; bounds proved in integers."""

from engine.loads.answer import Aim, Ended, LoadFlow, NoPlan, Progress
from engine.loads.prepare import prepare
from engine.loads.problem import NO_HAULIER, NO_LIMIT, LoadProblem
from engine.loads.solve import least_cost_loads
from engine.network import UNLIMITED

__all__ = [
    "NO_HAULIER",
    "NO_LIMIT",
    "UNLIMITED",
    "Aim",
    "Ended",
    "LoadFlow",
    "LoadProblem",
    "NoPlan",
    "Progress",
    "least_cost_loads",
    "prepare",
]
