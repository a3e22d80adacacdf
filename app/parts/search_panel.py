"""A search by whole loads, watched: the best plan so far, its bound, stop, look, search on."""

from decimal import Decimal

import streamlit as st

from app import jobs
from app.jobs import Job
from app.parts.words import counted, money, number, plain
from app.search_time import longer_times, remember_seconds, said_seconds
from app.session import Desk
from engine.planning.load_plan import cost_of_wholeness
from engine.planning.plan import Plan

WATCH_SECONDS = 1.0


def search_panel(state: Desk, plan: Plan) -> None:
    """What a plan with whole loads is worth: bound, gap, cost of wholeness; and its search, while one is on.

    Nothing for a plan that is a network's.
    """
    if plan.whole is None:
        return
    with st.container(border=True, key="search"):
        st.markdown(_standing(state, plan))
        if state.searching.job is not None:
            _watch(state)
        elif not plan.proof.exact and not state.only_reads:
            _search_on(state)


def _standing(state: Desk, plan: Plan) -> str:
    """The plan on screen in money: how far it may be above the least, and what whole vehicles cost."""
    rules, mark, whole = plan.week.rules, state.decimal_mark, plan.whole
    said = []
    if state.searching.is_on and plan.proof.lower_bound <= 0 < plan.total_cost:
        said.append("**A first plan; how far it is from the least cost is not known yet.**")
    elif plan.proof.exact:
        said.append("**Proved: no plan with whole loads that serves these aims costs less.**")
    elif plan.proof.gap:
        gap = money(plan.proof.gap, rules.currency, mark)
        said.append(
            f"**At most {gap} above the least cost** ({_percent(plan)}): no plan costs less than "
            f"{money(plan.proof.lower_bound, rules.currency, mark)}, this one "
            f"{money(plan.total_cost, rules.currency, mark)}, charges included."
        )
    else:
        said.append("**The cost is the least; whether a plan could serve the orders better is not clear.**")
    cost = cost_of_wholeness(plan)
    if whole is not None and cost is not None:
        word = "cost" if cost >= 0 else "spare"
        said.append(
            f"Whole vehicles and charges due once {word} {money(abs(cost), rules.currency, mark)} beside a "
            "plan that could send parts of vehicles."
        )
        if whole.divisible_short != sum(one.quantity for one in plan.short):
            said.append("That plan would not leave the same quantities short.")
        if not state.searching.is_on:
            said.append(whole.how(plan.proof.exact))
    return " ".join(said)


def _percent(plan: Plan) -> str:
    if not plan.total_cost:
        return "of nothing"
    part = 100 * plan.proof.gap / abs(plan.total_cost)
    return "under 0.1 %" if part < 1 and part * 10 < 1 else f"{part:.1f} %"


@st.fragment(run_every=WATCH_SECONDS)
def _watch(state: Desk) -> None:
    """Looks every second how far the search is; once it has ended, its plan is shown."""
    job = state.searching.job
    if job is None:
        return
    if job.is_done and (state.proposal is None or job.fault):
        if job.fault:
            state.message = ("error", job.fault)
        state.take_best()
        state.searching.job = None
        st.rerun()
    rules, mark = state.week.rules, state.decimal_mark
    if job.is_waiting:
        before = jobs.waiting_before(job)
        st.caption(f"The search waits: {counted(before, 'other search', 'other searches')} first.")
    elif job.is_done:
        st.caption("The search has ended. Make or leave what is proposed, and its plan is shown.")
    else:
        done = min(1.0, job.seconds / job.time_limit)
        best = job.best
        text = f"{job.seconds:.0f} s of {job.time_limit:.0f} s"
        if best is not None:
            cost, bound, gap = (
                money(amount, rules.currency, mark) for amount in (best.cost, best.lower_bound, best.gap)
            )
            short = f", {number(best.short, mark)} {plain(rules.unit)} short" if best.short else ""
            text += f" · freight and charges: best so far {cost}{short} · at least {bound} · gap {gap}"
        st.progress(done, text=text)
    with st.container(horizontal=True):
        if st.button("Stop and keep the best", key="search-stop", disabled=job.is_done or state.only_reads):
            job.stop.set()
        if st.button("Show the best so far", key="search-show", disabled=not _is_better(state, job)):
            state.take_best()
            st.rerun()


def _is_better(state: Desk, job: Job) -> bool:
    """Whether the search has a better plan than the one on screen: less short, or as much for less."""
    if job.best is None or state.plan is None:
        return False
    shown = sum((one.quantity for one in state.plan.short), start=Decimal(0))
    return (job.best.short, job.best.cost) < (shown, state.plan.total_cost)


def _search_on(state: Desk) -> None:
    """Search on from this plan, for a time that the desk keeps."""
    with st.container(horizontal=True, vertical_alignment="bottom"):
        choices = longer_times(state.searching.seconds)
        chosen = st.selectbox(
            "Time for a search", choices, index=choices.index(state.searching.seconds), width=180,
            format_func=said_seconds, key="search-seconds",
            help="Kept for this desk: every search takes at most so long, and can be stopped before",
        )  # fmt: skip
        if chosen != state.searching.seconds:
            remember_seconds(state.searching, chosen)
        if st.button("Search on", key="search-on"):
            state.search_on()
            st.rerun()
