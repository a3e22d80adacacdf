"""Charts of exact figures: steps for what the next unit costs, straight lines for what all of them cost."""

from collections.abc import Mapping, Sequence
from decimal import Decimal
from typing import Any

import altair as alt
import pandas as pd
import streamlit as st

from app.parts.map_colours import colours

MOST_POINTS = 40
"""With more points than this only the lines are drawn."""


def steps(
    figures: Sequence[Decimal], heights: Sequence[Decimal | None], today: Decimal, across: str, up: str
) -> None:
    """A stepped line: each height holds from its figure to the next; a mark at today's figure.

    The last height may be None; the line then ends where the one before it does.
    """
    drawn = [float(h) if h is not None else float(heights[n - 1] or 0) for n, h in enumerate(heights)]
    frame = pd.DataFrame({"figure": [float(f) for f in figures], "height": drawn})
    line = (
        alt.Chart(frame)
        .mark_line(interpolate="step-after", strokeWidth=2.5, color=_tone(0))
        .encode(x=_across(across), y=alt.Y("height:Q", title=up), tooltip=_tooltip(across, up))
    )
    points = line.mark_point(filled=True, size=45, color=_tone(0))
    _show((line + points if len(frame) <= MOST_POINTS else line) + _today(today))


def straight(
    figures: Sequence[Decimal], series: Mapping[str, Sequence[Decimal]], today: Decimal, across: str, up: str
) -> None:
    """Straight lines between the points of several series, told apart by colour, dash and name."""
    frame = pd.DataFrame(
        [
            {"figure": float(figure), "height": float(height), "what": name}
            for name, heights in series.items()
            for figure, height in zip(figures, heights, strict=True)
        ]
    )
    names = list(series)
    tones = [_tone(place) for place in range(len(names))]
    line = (
        alt.Chart(frame)
        .mark_line(point=len(figures) <= MOST_POINTS, strokeWidth=2)
        .encode(
            x=_across(across),
            y=alt.Y("height:Q", title=up, scale=alt.Scale(zero=False)),
            color=alt.Color(
                "what:N", title=None, scale=alt.Scale(domain=names, range=tones),
                legend=alt.Legend(orient="top", symbolType="stroke", symbolStrokeWidth=3),
            ),
            strokeDash=alt.StrokeDash("what:N", title=None, scale=alt.Scale(domain=names), legend=None),
            tooltip=[alt.Tooltip("what:N", title="What"), *_tooltip(across, up)],
        )
    )  # fmt: skip
    _show(line + _today(today))


def _across(title: str) -> alt.X:
    return alt.X("figure:Q", title=title, scale=alt.Scale(zero=False, nice=False))


def _tooltip(across: str, up: str) -> list[alt.Tooltip]:
    return [alt.Tooltip("figure:Q", title=across), alt.Tooltip("height:Q", title=up)]


def _today(today: Decimal) -> Any:
    """A dashed rule at the figure as it stands."""
    frame = pd.DataFrame({"figure": [float(today)], "label": ["today"]})
    rule = alt.Chart(frame).mark_rule(strokeDash=[4, 4], color=_ink()).encode(x="figure:Q")
    text = (
        alt.Chart(frame)
        .mark_text(align="left", dx=5, dy=8, baseline="top", color=_ink())
        .encode(x="figure:Q", y=alt.value(0), text="label:N")
    )
    return rule + text


def _show(chart: Any) -> None:
    st.altair_chart(chart.properties(height=260), width="stretch")


def _tone(place: int) -> str:
    tones = colours(st.context.theme.type).tones
    return tones[place % len(tones)]


def _ink() -> str:
    return colours(st.context.theme.type).faint_ink
