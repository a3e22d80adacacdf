"""Columns of figures turned from one unit into another, exactly."""

from fractions import Fraction

import numpy as np

from engine.exact import DecimalColumn
from engine.intake.units import times


def converted(column: DecimalColumn, by: Fraction | None) -> DecimalColumn:
    """The column times a fraction; None leaves it as it is.

    Raises:
        ValueError: a figure would have no end as a decimal, or does not fit.
    """
    if by is None or by == 1:
        return column
    distinct, place = np.unique(column.values, return_inverse=True)
    numbers = DecimalColumn(distinct, column.places).decimals()
    turned = [None if number is None else times(number, by) for number in numbers]
    if turned.count(None) != numbers.count(None):
        raise ValueError("A figure cannot be turned into the week's unit exactly.")
    return DecimalColumn.of(turned).taken(place)
