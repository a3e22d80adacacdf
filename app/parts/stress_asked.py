"""What to try in a stress run, as the desk types it."""

from collections.abc import Mapping, Sequence
from decimal import Decimal

import streamlit as st

from app.parts.words import plain
from app.session import Desk
from engine.columns import Column, Kind
from engine.compare.stress_cases import Case, all_by, depots_lost, drawn, hauliers_lost, lanes_lost
from engine.compare.stress_draws import Draws, Spread, spread_of
from engine.compare.stress_ground import is_no_network
from engine.compare.stress_whole import MOST_DEAREST, SECONDS_A_CASE, dearest_lanes_lost
from engine.intake.fields import read_field
from engine.planning.plan import Plan

LOSSES = {"depots": "each depot", "hauliers": "each haulier", "lanes": "each lane in use"}
MOST_LANES = 500
"""Of the lanes in use, so many that carry most are tried on the page; the command tries all."""

MOST_DRAWN = 5_000
LONGEST_CASE = 120
"""Seconds."""

_PERCENT = Column("Percent", "percent", Kind.PERCENT, "")
_STRAYS = (
    ("orders", "Orders stray", "triangular -20 0 20"),
    ("stock", "Stock strays", "even -10 0"),
    ("rates", "Rates stray", "triangular 0 2 8"),
)
_HOW = (
    "In percent. triangular: lowest, most likely, highest. normal: mean, deviation, lowest, highest. even: "
    "lowest, highest. Each customer, depot or haulier strays by itself; with 'together' behind, all alike. "
    "Blank: as the week says."
)


def cases_asked(state: Desk, plan: Plan) -> tuple[list[Case], float] | None:
    """The cases chosen, and with whole loads how long each is searched for.

    None, and why, where something that was typed cannot be read.
    """
    if is_no_network(plan):
        return _with_whole_loads(state, plan)
    losses = _losses(LOSSES)
    with st.container(horizontal=True, vertical_alignment="bottom"):
        orders = st.text_input("Orders up and down by, %", "10", key="stress-orders", width=180)
        rates = st.text_input("Rates up by, %", "10", key="stress-rates", width=180)
        count = st.text_input("Drawn weeks", "200", key="stress-draw", width=180)
        seed = st.text_input(
            "Seed", "1", key="stress-seed", width=180, help="The same seed draws the same weeks."
        )
    with st.container(horizontal=True, vertical_alignment="bottom"):
        strays = {
            what: st.text_input(label, default, key=f"stress-stray-{what}", width=300, help=_HOW)
            for what, label, default in _STRAYS
        }
    wrong: list[str] = []
    by = [_percent(state, text, wrong) for text in (orders, rates)]
    number, start = (_whole(text, label, wrong) for text, label in ((count, "Drawn weeks"), (seed, "Seed")))
    spreads = {what: _spread(text, wrong) for what, text in strays.items()}
    if number > MOST_DRAWN:
        wrong.append(f"The page draws at most {MOST_DRAWN:,} weeks; hithe stress --draw draws more.")
    draws = Draws(start, spreads["orders"], spreads["stock"], spreads["rates"])
    if number and draws.is_empty and not wrong:
        wrong.append("Drawn weeks need something that strays: orders, stock or rates.")
    for sentence in wrong:
        st.error(plain(sentence))
    if wrong:
        return None
    cases = _lost_or_moved(plan, losses, lanes_lost(plan, MOST_LANES), by)
    return [*cases, *drawn(draws, number)], SECONDS_A_CASE


def _with_whole_loads(state: Desk, plan: Plan) -> tuple[list[Case], float] | None:
    """Fewer cases, since each is a search, and no sample."""
    losses = _losses({**LOSSES, "lanes": f"the {MOST_DEAREST} dearest lanes"})
    with st.container(horizontal=True, vertical_alignment="bottom"):
        orders = st.text_input("Orders up and down by, %", "10", key="stress-orders", width=180)
        rates = st.text_input("Rates up by, %", "10", key="stress-rates", width=180)
        seconds = st.text_input(
            "Seconds a case", f"{SECONDS_A_CASE:g}", key="stress-seconds", width=180,
            help="The longer each case is searched for, the less is left between its plan and what is proved",
        )  # fmt: skip
    wrong: list[str] = []
    by = [_percent(state, text, wrong) for text in (orders, rates)]
    bare = seconds.strip()
    limit = int(bare) if bare.isascii() and bare.isdigit() and len(bare) < 5 else 0
    if not 1 <= limit <= LONGEST_CASE:
        wrong.append(f"Seconds a case: '{seconds}' is no whole number between 1 and {LONGEST_CASE}.")
    for sentence in dict.fromkeys(wrong):
        st.error(plain(sentence))
    if wrong:
        return None
    return _lost_or_moved(plan, losses, dearest_lanes_lost(plan), by), float(limit)


def _lost_or_moved(
    plan: Plan, losses: Sequence[str], lanes: Sequence[Case], by: Sequence[Decimal]
) -> list[Case]:
    """The losses that are asked for, of lanes these; then orders up and down and rates up, by percentages."""
    cases: list[Case] = []
    cases += depots_lost(plan) if "depots" in losses else ()
    cases += hauliers_lost(plan) if "hauliers" in losses else ()
    cases += lanes if "lanes" in losses else ()
    return [*cases, *all_by("orders", [by[0], -by[0]]), *all_by("rates", [by[1]])]


def _losses(called: Mapping[str, str]) -> list[str]:
    return st.pills(
        "Lose, one by one", list(called), selection_mode="multi", default=list(called), key="stress-lose",
        format_func=called.__getitem__,
    )  # fmt: skip


def _percent(state: Desk, text: str, wrong: list[str]) -> Decimal:
    value, finding = read_field(_PERCENT, text, state.style)
    if finding is not None:
        wrong.append(finding.message)
    found = value if isinstance(value, Decimal) else Decimal(0)
    if not 0 <= found <= 100:
        wrong.append(f"{text} % is no change between 0 and 100 %.")
        return Decimal(0)
    return found


def _whole(text: str, label: str, wrong: list[str]) -> int:
    bare = text.strip().replace(",", "").replace(".", "") or "0"
    if not bare.isascii() or not bare.isdigit() or len(bare) > 18:
        wrong.append(f"{label}: '{text}' is no whole number.")
        return 0
    return int(bare)


def _spread(text: str, wrong: list[str]) -> Spread | None:
    if not text.strip():
        return None
    try:
        return spread_of(text)
    except ValueError as refused:
        wrong.append(str(refused))
        return None
