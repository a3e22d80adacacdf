"""A page with nothing but the map and its table, for the tests; `?case=` chooses what is on it."""

from decimal import Decimal

import streamlit as st

from app.parts.flow_map import Focus, MapFlow, MapPoint, flow_map, flows_table

DEPOTS = {"Northgate": (-46.48, -124.35), "Quarry": (-46.92, -125.95), "Upland": (-48.30, -123.35)}
CUSTOMERS = {"Aster": (-46.85, -124.91), "Birch": (-47.91, -123.65), "Cole": (-47.57, -122.93)}
SENT = (("Northgate", "Aster", 120), ("Upland", "Birch", 60), ("Upland", "Cole", 30), ("Quarry", "Aster", 12))
HOSTILE = {
    "Northgate": "@@=alert(1)",
    "Quarry": "{tip} <img src=http://127.0.0.1:9/a>",
    "Aster": "@@#a.b",
    "Birch": "![b](http://127.0.0.1:9/b)",
}


def figures(case: str) -> tuple[list[MapPoint], list[MapFlow]]:
    """Three depots and four customers: Cole goes short, Elm has no coordinates."""
    called = HOSTILE if case == "hostile" else {}
    nowhere = case == "nowhere"
    points = [
        MapPoint(
            "depot", called.get(name, name), None if nowhere else y, None if nowhere else x, Decimal(200)
        )
        for name, (y, x) in DEPOTS.items()
    ]
    for name, (y, x) in CUSTOMERS.items():
        short = Decimal("20.5") if name == "Cole" else Decimal(0)
        at = (None, None) if nowhere else (y, x)
        points.append(MapPoint("customer", called.get(name, name), *at, Decimal(132), short))
    points.append(MapPoint("customer", "Elm", None, None, Decimal(8)))
    flows = [MapFlow(called.get(i, i), called.get(j, j), Decimal(q), "Oxcart") for i, j, q in SENT]
    return points, [*flows, MapFlow(called.get("Quarry", "Quarry"), "Elm", Decimal(8))]


def page() -> None:
    points, flows = figures(st.query_params.get("case", ""))
    row: Focus | None = st.session_state.get("row")
    picked = flow_map(points, flows, "t", "map", focus=row)
    st.text(f"picked: {picked.depot if picked else None}, {picked.customers if picked else ()}")
    st.session_state.row = flows_table(points, flows, "t", "table")


if __name__ == "__main__":
    page()
