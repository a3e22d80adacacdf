"""What a change would displace: sentences, the lanes that gain and lose on the map, and the sum."""

from functools import partial

import streamlit as st

from app.parts.flow_map import Focus, MapFlow, MapPoint, flow_map
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import counted, money, number, plain, quantity
from engine.planning.plan import Plan
from engine.reasons import Chain, sentences
from engine.reasons.lanes import LaneChange, cost_of, lane_changes, net_by_lane

MOST_SENTENCES = 6


def chain_panel(plan: Plan, chain: Chain, mark: str, key: str) -> None:
    """Tell a chain, sum it up, and show where it happens."""
    rules = plan.week.rules
    if chain.note:
        st.info(plain(chain.note))
    if not chain.legs:
        st.markdown(plain(chain.ends_early) or "Nothing would move.")
        return
    told = sentences(chain, rules.unit, rules.currency, partial(number, mark=mark))
    for words in told[:MOST_SENTENCES]:
        st.markdown(plain(words))
    if len(told) > MOST_SENTENCES:
        st.caption(f"and {counted(len(told) - MOST_SENTENCES, 'more chain')}, each dearer or further away")
    if chain.ends_early:
        st.caption(plain(chain.ends_early))
    amount = quantity(chain.quantity, rules.unit, mark)
    word = "cheaper" if chain.cost < 0 else "dearer"
    cost = money(abs(chain.cost), rules.currency, mark)
    st.markdown(
        f"**In all: {plain(amount)}, {plain(cost)} {word}.**"
        if chain.cost
        else f"**In all: {plain(amount)}, at no extra cost.**"
    )
    changes = lane_changes(chain)
    if changes:
        _map(plan, changes, mark, f"{key}-map")
        _table(plan, changes, mark, f"{key}-lanes")


def _map(plan: Plan, changes: tuple[LaneChange, ...], mark: str, key: str) -> None:
    unit, depots, customers = plan.week.rules.unit, plan.week.depots, plan.week.customers
    net = net_by_lane(changes)
    concerned = {depot for depot, _ in net}, {customer for _, customer in net}
    points = [
        MapPoint("depot", d.name, d.latitude, d.longitude, d.available)
        for d in depots.values()
        if d.name in concerned[0] or len(depots) <= 40
    ]
    points += [
        MapPoint("customer", c.name, c.latitude, c.longitude, c.ordered)
        for c in customers.values()
        if c.name in concerned[1]
    ]
    if not net or not any(point.place for point in points):
        return
    lines = [MapFlow(*lane, abs(change), "more" if change > 0 else "less") for lane, change in net.items()]
    gain = frozenset(lane for lane, change in net.items() if change > 0)
    focus = Focus(customers=tuple(concerned[1]), lanes=gain or frozenset({("", "")}))
    flow_map(points, lines, unit, key=key, focus=focus, number=partial(number, mark=mark), height=380)
    st.caption("Strong lines would carry more, faint ones less.")


def _table(plan: Plan, changes: tuple[LaneChange, ...], mark: str, key: str) -> None:
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    rows: list[list[Cell]] = [
        [one.depot, one.customer, one.haulier or "", one.change, one.rate, one.cost] for one in changes
    ]
    headings = [
        Heading("Depot"),
        Heading("Customer"),
        Heading("Haulier"),
        Heading(f"More or less, {unit}"),
        Heading(f"Rate, {currency}", "Per unit, with the surcharge", money=True),
        Heading(f"Cost, {currency}", places=2),
    ]
    with st.expander("The lanes that change, and what each adds"):
        reasons_table(headings, rows, key, mark, pick=False)
        st.caption(
            f"The lanes add up to {plain(money(cost_of(changes), currency, mark))}; "
            "what goes short or stays unsent at a charge makes up the rest."
        )
