"""The map of a plan: who sends how much to whom, who goes short; and a table that says the same."""

from collections.abc import Mapping, Sequence
from decimal import Decimal
from functools import partial
from math import isnan
from typing import Any

import pandas as pd
import streamlit as st

from app.parts.map_colours import colours
from app.parts.map_drawing import (
    FEW_DEPOTS,
    Drawing,
    Focus,
    Line,
    MapFlow,
    MapPoint,
    Mark,
    Number,
    drawing,
    lines,
)
from app.parts.map_labels import Wish, placed
from app.parts.map_layers import deck, layer_ids
from app.parts.map_legend import in_words, legend

__all__ = ["Focus", "MapFlow", "MapPoint", "flow_map", "flows_frame", "flows_table"]

NO_COORDINATES = (
    "No map: no depot or customer has coordinates. Columns Latitude and Longitude on the sheets Depots and"
    " Customers put them on it."
)
MOST_NAMED = 12
"""How many names a sentence lists before it only counts."""


def plain(quantity: Decimal) -> str:
    """A quantity as digits, without exponent or trailing zeros."""
    text = f"{quantity:f}"
    return text.rstrip("0").rstrip(".") if "." in text else text


def flow_map(
    points: Sequence[MapPoint],
    flows: Sequence[MapFlow],
    unit: str,
    key: str,
    *,
    focus: Focus | None = None,
    instead: Focus | None = None,
    number: Number = plain,
    height: int = 560,
) -> Focus | None:
    """Draws the map and answers what was picked on it, None for nothing.

    Args:
        points: depots and customers; those without coordinates are named below the map instead.
        flows: what goes where, in `unit`.
        unit: the week's unit, shown behind quantities.
        key: the widget's own, constant key.
        focus: what stands out while nothing is picked, a row picked in a table for instance.
        instead: what stands out whatever is picked.
        number: how a quantity is written.
        height: in pixels.
    """
    drawn = drawing(points, flows)
    if drawn is None:
        st.info(NO_COORDINATES)
        return None
    picked = _picked(drawn, st.session_state.get(key))
    looked_at = instead or picked or focus
    highlighted = _highlighted(drawn, flows, looked_at)
    shown_in = colours(st.context.theme.type)
    labels = placed(_wishes(drawn, highlighted, looked_at, unit, number), drawn.depots, drawn.customers)
    st.pydeck_chart(
        deck(drawn, highlighted, looked_at, labels, shown_in, unit, number),
        height=height,
        on_select="rerun",
        selection_mode="single-object",
        key=key,
        alt=summary(drawn, unit, number),
    )
    st.image(legend(drawn, shown_in, unit, number), alt=in_words(drawn, unit, number))
    named = [label.kind for label in labels]
    for sentence in remarks(drawn, named.count("short"), named.count("depot")):
        st.text(sentence)
    return picked


def picked_on_map(points: Sequence[MapPoint], flows: Sequence[MapFlow], key: str) -> Focus | None:
    """What is picked on the map with this key, before it is drawn again."""
    if not st.session_state.get(key):
        return None
    drawn = drawing(points, flows)
    return None if drawn is None else _picked(drawn, st.session_state.get(key))


def flows_frame(points: Sequence[MapPoint], flows: Sequence[MapFlow], unit: str) -> pd.DataFrame:
    """What the map shows, as a table: a row a flow, and a row for each customer that gets nothing.

    Quantities are exact decimals; None where nothing is sent, ordered or short.
    """
    of = {point.name: point for point in points if point.kind == "customer"}
    moving = [flow for flow in flows if flow.quantity > 0]
    served = {flow.customer for flow in moving}
    rows: list[tuple[str, str, Decimal | None, str]] = [
        (flow.depot, flow.customer, flow.quantity, flow.label) for flow in moving
    ]
    rows += [("", name, None, "") for name, point in of.items() if name not in served and point.quantity > 0]
    return pd.DataFrame(
        [
            (
                depot,
                customer,
                quantity,
                of[customer].quantity if customer in of else None,
                of[customer].short if customer in of and of[customer].short > 0 else None,
                " ".join(label.split()),
            )
            for depot, customer, quantity, label in rows
        ],
        columns=["Depot", "Customer", f"Send ({unit})", f"Ordered ({unit})", f"Short ({unit})", "Note"],
    )


def flows_table(
    points: Sequence[MapPoint],
    flows: Sequence[MapFlow],
    unit: str,
    key: str,
    *,
    number: Number = plain,
    height: int = 300,
) -> Focus | None:
    """Shows the table and answers the row picked in it, None for none."""
    frame = flows_frame(points, flows, unit)
    names = frame[["Depot", "Customer"]]
    if not any(frame["Note"]):
        frame = frame.drop(columns="Note")
    figures = [str(name) for name in frame.columns[2:5]]
    sortable = frame.astype(dict.fromkeys(figures, float))  # the browser sorts floats, and shows our texts
    shown: Any = sortable.style.format(dict.fromkeys(figures, partial(_written, number)))
    event = st.dataframe(
        shown,
        key=key,
        height=height,
        hide_index=True,
        placeholder="",
        on_select="rerun",
        selection_mode="single-row",
    )
    picked = [row for row in event.selection.rows if 0 <= row < len(names)]
    if not picked:
        return None
    depot, customer = names.iloc[picked[0]]
    return Focus(depot or None, (customer,))


def _written(number: Number, value: float) -> str:
    """A quantity of the table; blank where there is none."""
    return "" if isnan(value) else number(Decimal(repr(float(value))))


def summary(drawn: Drawing, unit: str, number: Number = plain) -> str:
    """The map in one sentence, for those who do not see it."""
    short = sorted((mark for mark in drawn.customers if mark.short > 0), key=lambda mark: -mark.short)
    customers = sum(len(mark.names) for mark in drawn.customers)
    worst = f", most of all {short[0].title} by {number(short[0].short)} {unit}" if short else ""
    return (
        f"Map of {_count(len(drawn.depots), 'depot')}, {_count(customers, 'customer')} and"
        f" {_count(drawn.flows_drawn, 'flow')}; {_count(len(short), 'customer')} going short{worst}."
        " The table of flows says the same."
    )


def remarks(drawn: Drawing, short_named: int, depots_named: int) -> list[str]:
    """What the map does not show, or shows together, a sentence each."""
    said: list[str] = []
    if drawn.flows_drawn > len(drawn.lines) or any(len(mark.names) > 1 for mark in drawn.customers):
        customers = sum(len(mark.names) for mark in drawn.customers)
        said.append(
            f"{customers:,} customers are drawn as {len(drawn.customers):,} dots and"
            f" {drawn.flows_drawn:,} flows as {len(drawn.lines):,} lines:"
            " customers near each other share them. Nothing is left out."
        )
    short = sum(mark.short > 0 for mark in drawn.customers)
    if short > short_named:
        said.append(f"{short - short_named} more going short are ringed, without room for a name.")
    if len(drawn.depots) > depots_named:
        said.append(f"{len(drawn.depots) - depots_named} depots are drawn without room for a name.")
    if drawn.unplaced:
        names = [point.name for point in drawn.unplaced]
        more = f" and {len(names) - MOST_NAMED} more" if len(names) > MOST_NAMED else ""
        said.append(f"Without usable coordinates, so not on the map: {', '.join(names[:MOST_NAMED])}{more}.")
    if drawn.flows_not_drawn:
        said.append(f"{_count(drawn.flows_not_drawn, 'flow')} from or to them: in the table only.")
    return said


def _count(number: int, word: str) -> str:
    return f"{number} {word}" if number == 1 else f"{number} {word}s"


def _picked(drawn: Drawing, state: Any) -> Focus | None:
    """What the browser says is picked, as far as it is on this map."""
    selection = state.get("selection") if isinstance(state, Mapping) else None
    indices = selection.get("indices") if isinstance(selection, Mapping) else None
    if not isinstance(indices, Mapping):
        return None
    ids = layer_ids(drawn)
    layers: dict[str, Sequence[Mark | Line]] = {
        ids["depots"]: drawn.depots,
        ids["customers"]: drawn.customers,
        ids["lines"]: drawn.lines,
    }
    for layer, chosen in indices.items():
        for index in chosen:
            if layer in layers and isinstance(index, int) and 0 <= index < len(layers[layer]):
                return _focus_on(layers[layer][index], is_depot=layer == ids["depots"])
    return None


def _focus_on(item: Mark | Line, is_depot: bool) -> Focus:
    if isinstance(item, Line):
        return Focus(item.depot, item.customers)
    return Focus(depot=item.names[0]) if is_depot else Focus(customers=item.names)


def _highlighted(drawn: Drawing, flows: Sequence[MapFlow], focus: Focus | None) -> tuple[Line, ...]:
    if focus is None:
        return ()
    chosen = [flow for flow in flows if flow.quantity > 0 and focus.holds(flow)]
    return lines(chosen, drawn.depots, drawn.customers, like=drawn.lines)


def _wishes(
    drawn: Drawing, highlighted: Sequence[Line], focus: Focus | None, unit: str, number: Number
) -> list[Wish]:
    """Names in the order in which they claim room: depots, those looked at, those going short."""
    few = len(drawn.depots) <= FEW_DEPOTS
    wishes = [Wish(mark.title, mark, 14 if few else 12, "depot", must=few) for mark in drawn.depots]
    looked_at = {name for line in highlighted for name in line.customers}
    looked_at.update(focus.customers if focus else ())
    short = sorted((mark for mark in drawn.customers if mark.short > 0), key=lambda mark: -mark.short)
    for mark in short:
        wishes.append(Wish(f"{mark.title} −{number(mark.short)} {unit}", mark, 12, "short"))
    if looked_at:
        for mark in drawn.customers:
            if mark.short <= 0 and looked_at.intersection(mark.names):
                wishes.append(Wish(mark.title, mark, 12, "customer"))
    return wishes
