"""The frontier of cost against emissions as a line through its breakpoints, readable without colour."""

from decimal import Decimal
from typing import Any

import altair as alt
import pandas as pd
import streamlit as st

from app.parts.map_colours import colours
from app.parts.words import number
from engine.compare.frontier import Frontier

MOST_MARKS = 120
"""With more breakpoints only the line is drawn."""


def frontier_chart(found: Frontier, picked: int | None, mark: str) -> None:
    """Emissions across, cost up; today's plan is a diamond, what is picked a ring."""
    rules, tones = found.plan.week.rules, colours(st.context.theme.type)
    frame = pd.DataFrame(
        {
            "emissions": [float(point.emissions) for point in found.points],
            "cost": [float(point.cost) for point in found.points],
            "said": [_said(point.cost, point.emissions, rules.currency, mark) for point in found.points],
            "number": range(1, len(found.points) + 1),
        }
    )
    across = alt.X("emissions:Q", title="Emissions, kg CO2e", scale=alt.Scale(zero=False, padding=18))
    up = alt.Y(
        "cost:Q", title=f"Freight and charges, {rules.currency}", scale=alt.Scale(zero=False, padding=18)
    )
    base = alt.Chart(frame).encode(
        x=across,
        y=up,
        tooltip=[alt.Tooltip("number:Q", title="Breakpoint"), alt.Tooltip("said:N", title="At")],
    )
    drawn: Any = base.mark_line(color=tones.tones[0], strokeWidth=2)
    if len(frame) <= MOST_MARKS:
        drawn += base.mark_point(color=tones.tones[0], filled=True, size=45, opacity=1)
    today = pd.DataFrame(
        {"emissions": [float(found.today.emissions)], "cost": [float(found.today.cost)], "label": ["today"]}
    )
    here = alt.Chart(today).encode(x=across, y=up)
    drawn += here.mark_point(shape="diamond", filled=True, size=190, color=tones.tones[1], opacity=1)
    drawn += here.mark_text(align="right", dx=-11, dy=-10, color=tones.ink).encode(text="label:N")
    if picked is not None:
        drawn += alt.Chart(frame.iloc[[picked]]).mark_point(
            size=260, color=tones.ink, strokeWidth=2, filled=False
        ).encode(x=across, y=up)  # fmt: skip
    words = "Cost against emissions, from least cost to least emissions; the table says the same."
    st.altair_chart(drawn.properties(height=320), width="stretch", alt=words)


def _said(cost: Decimal, emissions: Decimal, currency: str, mark: str) -> str:
    return f"{number(cost, mark, 2)} {currency}, {number(emissions, mark, 1)} kg CO2e"
