"""Why a plan is as it is: exact answers from its residual network, none of which a plan itself holds."""

from engine.reasons.chains import Chain, Leg, Move, Step, chain, more_on
from engine.reasons.curve import Curve, CurvePoint, curve
from engine.reasons.ground import Withheld
from engine.reasons.options import NearLane, Option, Unquoted, nearest_to_paying, options, unquoted
from engine.reasons.pairs import Pair, pairs
from engine.reasons.rates import RateInterval, RateIntervals, rate_intervals
from engine.reasons.telling import sentence, sentences
from engine.reasons.values import UnitValue, Values, values
from engine.reasons.why import Alternative, Why, why

__all__ = [
    "Alternative",
    "Chain",
    "Curve",
    "CurvePoint",
    "Leg",
    "Move",
    "NearLane",
    "Option",
    "Pair",
    "RateInterval",
    "RateIntervals",
    "Step",
    "UnitValue",
    "Unquoted",
    "Values",
    "Why",
    "Withheld",
    "chain",
    "curve",
    "more_on",
    "nearest_to_paying",
    "options",
    "pairs",
    "rate_intervals",
    "sentence",
    "sentences",
    "unquoted",
    "values",
    "why",
]
