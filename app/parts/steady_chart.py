"""The trade between lanes changed and cost, as steps: more changes, less cost."""

import altair as alt
import pandas as pd
import streamlit as st

from engine.planning.steady import Trade


def trade_chart(found: Trade, currency: str) -> None:
    """Cost above the least against lanes changed, with what is proved beneath."""
    frame = pd.DataFrame(
        {
            "Lanes changed": [point.lanes for point in found.points],
            "Costs more": [float(point.extra) for point in found.points],
            "Cannot cost less than": [float(point.bound) for point in found.points],
        }
    )
    across = alt.X("Lanes changed:Q", axis=alt.Axis(tickMinStep=1, format="d"), scale=alt.Scale(zero=False))
    up = alt.Y("Costs more:Q", title=f"Costs more, {currency}")
    steps = alt.Chart(frame).mark_line(interpolate="step-after", point=True).encode(
        x=across, y=up, tooltip=["Lanes changed", "Costs more", "Cannot cost less than"]
    )  # fmt: skip
    layers = [steps]
    if not found.closed:
        beneath = alt.Y("Cannot cost less than:Q", title=f"Costs more, {currency}")
        layers.append(
            alt.Chart(frame)
            .mark_line(interpolate="step-after", strokeDash=[4, 3], opacity=0.6)
            .encode(x=across, y=beneath)
        )
    st.altair_chart(alt.layer(*layers).properties(height=220))
