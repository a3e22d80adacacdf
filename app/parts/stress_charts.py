"""Charts of a stressed plan, readable without colour: ranked bars with their figures, and a histogram."""

from collections.abc import Sequence
from decimal import Decimal
from typing import Any

import altair as alt
import pandas as pd
import streamlit as st

from app.parts.map_colours import colours
from app.parts.words import number
from engine.compare.stress import Bin

BAR = 24
"""Pixels of a bar and the room below it."""


def ranked_bars(
    bars: Sequence[tuple[str, Decimal]], title: str, mark: str, places: int | None, alt_text: str
) -> None:
    """Bars to the right, in the order given, each with its figure behind it."""
    frame = pd.DataFrame(
        {
            "place": range(len(bars)),
            "name": [name for name, _ in bars],
            "height": [float(amount) for _, amount in bars],
            "said": [number(amount, mark, places) for _, amount in bars],
        }
    )
    tones = colours(st.context.theme.type)
    low, high = min(0.0, frame["height"].min()), max(0.0, frame["height"].max())
    room = (high - low) * 0.2 or 1.0
    across = alt.X(
        "height:Q", title=title, scale=alt.Scale(domain=[low - (room if low < 0 else 0), high + room]),
        axis=alt.Axis(grid=False, tickCount=5),
    )  # fmt: skip
    down = alt.Y("name:N", title=None, sort=alt.EncodingSortField("place", op="min"), axis=_names())
    tips = [alt.Tooltip("name:N", title="Case"), alt.Tooltip("said:N", title=title)]
    base = alt.Chart(frame).encode(x=across, y=down, tooltip=tips)
    bar = base.mark_bar(color=tones.tones[0], height={"band": 0.66})
    side: Any = alt.expr("datum.height < 0 ? 'right' : 'left'")
    text = base.mark_text(align=side, dx=alt.expr("datum.height < 0 ? -5 : 5"), color=tones.ink)
    drawn: Any = bar + text.encode(text="said:N")
    st.altair_chart(drawn.properties(height=BAR * len(bars) + 40), width="stretch", alt=alt_text)


def histogram(bins: Sequence[Bin], today: Decimal, across: str, mark: str, alt_text: str) -> None:
    """How many drawn weeks lie in each range; a dashed rule at today's figure."""
    frame = pd.DataFrame(
        {
            "low": [float(one.low) for one in bins],
            "high": [float(one.high) for one in bins],
            "count": [one.count for one in bins],
            "said": [f"{number(one.low, mark)} to {number(one.high, mark)}" for one in bins],
        }
    )
    tones = colours(st.context.theme.type)
    ends = [min(frame["low"].min(), float(today)), max(frame["high"].max(), float(today))]
    scale = alt.Scale(domain=ends, zero=False, nice=False)
    bar = (
        alt.Chart(frame)
        .mark_bar(color=tones.tones[0], stroke=tones.halo, strokeWidth=1)
        .encode(
            x=alt.X("low:Q", bin="binned", title=across, scale=scale, axis=alt.Axis(grid=False)),
            x2="high:Q",
            y=alt.Y("count:Q", title="Drawn weeks", axis=alt.Axis(tickMinStep=1)),
            tooltip=[alt.Tooltip("said:N", title=across), alt.Tooltip("count:Q", title="Drawn weeks")],
        )
    )
    line = pd.DataFrame({"figure": [float(today)], "label": ["today"]})
    rule = alt.Chart(line).mark_rule(strokeDash=[4, 4], color=tones.ink, strokeWidth=2).encode(x="figure:Q")
    label = (
        alt.Chart(line)
        .mark_text(align="left", dx=5, dy=8, baseline="top", color=tones.ink)
        .encode(x="figure:Q", y=alt.value(0), text="label:N")
    )
    drawn: Any = bar + rule + label
    st.altair_chart(drawn.properties(height=260), width="stretch", alt=alt_text)


def _names() -> alt.Axis:
    return alt.Axis(labelLimit=260, domain=False, ticks=False)
