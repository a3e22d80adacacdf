"""Charts of comparisons: from one cost to another, step by step, and what came of each week.

Nothing in them is told by colour alone: every bar has its figure beside it, with an arrow up or down,
and what falls is drawn hollow.
"""

from collections.abc import Sequence
from decimal import Decimal
from typing import Any

import altair as alt
import pandas as pd
import streamlit as st

from app.parts.map_colours import colours
from app.parts.words import number
from engine.compare.bridge import Bridge
from engine.money import minor_places

ROW, LONGEST_NAME = 34, 44
FEW_WEEKS = 12
"""So many points have their figures beside them; more have an axis instead."""

UP, DOWN, END = "dearer", "cheaper", "end"


def waterfall(bridge: Bridge, mark: str) -> None:
    """From the freight of the first plan to that of the second, one bar a step, top to bottom."""
    frame = waterfall_frame(bridge, mark)
    tones = colours(st.context.theme.type)
    low, high = float(frame[["from", "to"]].min().min()), float(frame[["from", "to"]].max().max())
    room = (high - low or 1.0) * 0.22
    across = alt.X(
        "low:Q",
        title=f"Freight payable, {bridge.currency} (the axis does not start at 0)",
        scale=alt.Scale(domain=[low - room, high + room], zero=False, nice=False),
        axis=alt.Axis(tickCount=5),
    )
    down = alt.Y("label:N", sort=alt.EncodingSortField("place", op="min"), title=None,
                 axis=alt.Axis(labelLimit=270, ticks=False, domain=False))  # fmt: skip
    base = alt.Chart(frame)
    moves = base.transform_filter(f"datum.kind != '{END}'")
    bars = moves.mark_bar(height=16, strokeWidth=2).encode(
        x=across, x2="high:Q", y=down,
        fill=alt.Fill("kind:N", legend=None,
                      scale=alt.Scale(domain=[UP, DOWN], range=[tones.tones[1], tones.halo])),
        stroke=alt.Stroke("kind:N", legend=None,
                          scale=alt.Scale(domain=[UP, DOWN], range=[tones.tones[1], tones.tones[0]])),
        tooltip=[
            alt.Tooltip("label:N", title="Step"),
            alt.Tooltip("written:N", title=bridge.currency),
            alt.Tooltip("about:N", title="What it is"),
        ],
    )  # fmt: skip
    ends = base.transform_filter(f"datum.kind == '{END}'").mark_tick(
        thickness=4, height=24, color=tones.ink
    ).encode(x=across, y=down)  # fmt: skip
    texts = base.mark_text(align="left", dx=8, fontSize=12, color=tones.ink).encode(
        x=alt.X("high:Q"), y=down, text="written:N"
    )
    links = base.transform_filter("isValid(datum.next)").mark_rule(color=tones.faint_ink, strokeDash=[2, 2])
    links = links.encode(x=alt.X("to:Q"), y=down, y2="next:N")
    _show(links + bars + ends + texts, ROW * len(frame) + 40)


def waterfall_frame(bridge: Bridge, mark: str) -> pd.DataFrame:
    """Rows of the waterfall: first plan, steps, second plan; an average is drawn in the stated order."""
    minor = minor_places(bridge.currency)
    rows: list[dict[str, Any]] = [_end(bridge.first, bridge.first_freight, mark, minor)]
    at = bridge.first_freight
    for step in bridge.steps:
        to = at + step.freight
        arrow = "▲ +" if step.freight > 0 else "▼ " if step.freight < 0 else "= "
        rows.append(
            {
                "label": step.name,
                "kind": UP if step.freight >= 0 else DOWN,
                "from": float(at),
                "to": float(to),
                "written": arrow + number(step.freight, mark, minor),
                "about": step.about,
            }
        )
        at = to
    rows.append(_end(bridge.second, bridge.second_freight, mark, minor))
    frame = pd.DataFrame(rows)
    frame["place"] = range(len(frame))
    frame["low"], frame["high"] = frame[["from", "to"]].min(axis=1), frame[["from", "to"]].max(axis=1)
    frame["label"] = _apart([_short(label) for label in frame["label"]])
    frame["next"] = frame["label"].shift(-1)
    return frame


def _end(name: str, freight: Decimal, mark: str, minor: int) -> dict[str, Any]:
    return {
        "label": name,
        "kind": END,
        "from": float(freight),
        "to": float(freight),
        "written": number(freight, mark, minor),
        "about": "freight payable",
    }


def _short(label: str) -> str:
    return label if len(label) <= LONGEST_NAME else label[: LONGEST_NAME - 1] + "…"


def _apart(labels: Sequence[str]) -> list[str]:
    """Labels that differ, so that none is drawn on the line of another."""
    seen: dict[str, int] = {}
    found = []
    for label in labels:
        seen[label] = seen.get(label, 0) + 1
        found.append(label if seen[label] == 1 else f"{label} ({seen[label]})")
    return found


def figures_by_week(
    names: Sequence[str], values: Sequence[Decimal], title: str, mark: str, places: int | None
) -> None:
    """One figure a week as a line with its numbers beside the points."""
    tones = colours(st.context.theme.type)
    frame = pd.DataFrame(
        {
            "place": range(len(names)),
            "Week": _apart(list(names)),
            "figure": [float(value) for value in values],
            "written": [number(value, mark, places) for value in values],
        }
    )
    across = alt.X(
        "Week:N",
        sort=alt.EncodingSortField("place", op="min"),
        title=None,
        axis=alt.Axis(labelAngle=0 if len(names) <= FEW_WEEKS else -60, labelLimit=110, grid=False),
    )
    plain = alt.Axis(labels=False, ticks=False, domain=False, grid=False)
    up = alt.Y("figure:Q", title=None, scale=alt.Scale(zero=False, padding=24),
               axis=plain if len(names) <= FEW_WEEKS else alt.Axis(tickCount=5))  # fmt: skip
    base = alt.Chart(frame, title=title)
    line = base.mark_line(strokeWidth=2, color=tones.tones[0], point={"size": 60, "color": tones.tones[0]})
    line = line.encode(x=across, y=up, tooltip=["Week:N", alt.Tooltip("written:N", title=title)])
    texts = base.mark_text(dy=-13, fontSize=11, color=tones.ink).encode(x=across, y=up, text="written:N")
    _show(line + texts if len(names) <= FEW_WEEKS else line, 230)


def _show(chart: Any, height: int) -> None:
    st.altair_chart(chart.properties(height=height), width="stretch")
