"""Stress: what each loss would do to the week, ranked, and how its cost is distributed if figures stray."""

from collections.abc import Hashable
from decimal import Decimal
from io import BytesIO

import streamlit as st

from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.stress_asked import MOST_LANES, cases_asked
from app.parts.stress_case import case_view
from app.parts.stress_charts import histogram, ranked_bars
from app.parts.words import counted, money, number, plain, quantity
from app.session import Desk
from app.stress_job import Job, begin, job_of
from engine.compare.stress import Stressed, short_often, spreading
from engine.compare.stress import histogram as bins_of
from engine.compare.stress_ground import is_no_network
from engine.compare.stress_solve import Outcome
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.report.stress_sheet import strays_in_words, stress_sheet
from engine.report.workbook import header_of, write_workbook

MOST_BARS = 15
OWN = "stress-own"
_PROVED = "Each case is a plan of its own, proved, beside today's. Nothing here changes the week."
_WHOLE = (
    "With whole loads each case is a plan that is searched for, with a proved least cost beside it; no weeks "
    "are drawn, since a sample takes hundreds of plans. Nothing here changes the week."
)
XLSX = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"


def stress_view(state: Desk, plan: Plan) -> None:
    """What to try, the run, and what it found; kept until the week is changed, whichever tab looks."""
    key, version = run_key(state), len(state.history.entries)
    job = job_of(key, version)
    with st.expander("What to try", expanded=job is None):
        whole = is_no_network(plan)
        st.caption(_WHOLE if whole else _PROVED)
        asked = cases_asked(state, plan)
        if whole and state.searching.is_on:
            _plan_awaited(state)
        elif asked is not None and asked[0]:
            cases, seconds = asked
            about = f", about {_minutes(len(cases) * seconds)}" if whole else ""
            if st.button(f"Try {counted(len(cases), 'case')}{about}", type="primary", key="stress-run"):
                job = begin(key, version, _latest(state, plan), cases, seconds)
                st.rerun()
    if job is None:
        return
    if not job.is_done:
        _watched(job)
        return
    if job.fault:
        st.error(plain(job.fault))
    elif job.found is not None:
        _shown(state, job.found)
        st.caption(f"Tried at {job.begun:%H:%M}, {job.begun:%d %b}; kept here until the week is changed.")


def _minutes(seconds: float) -> str:
    return f"{seconds:.0f} s" if seconds < 90 else f"{seconds / 60:.0f} min"


def _latest(state: Desk, plan: Plan) -> Plan:
    """The plan on the desk, or the better one that its search has ended with."""
    job = state.searching.job
    return plan if job is None or not job.is_done or job.fault else job.so_far()


@st.fragment(run_every=1.0)
def _plan_awaited(state: Desk) -> None:
    """With whole loads a run begins from the plan that the search ends with."""
    if not state.searching.is_on:
        st.rerun()
    st.info(
        "This week's own plan is still being searched for: cases can be tried once that has ended, or is "
        "stopped on *Plan*."
    )


def run_key(state: Desk) -> Hashable:
    """What a run goes by. Who only reads the week runs apart from those who change it."""
    if state.kept is not None:
        return state.kept.records.where, state.kept.week_id, state.only_reads
    held = st.session_state.get(OWN)
    if held is None or held[0] is not state.week:  # in no records: this session's, as long as the week is
        held = st.session_state[OWN] = (state.week, object())
    found: Hashable = held[1]
    return found


@st.fragment(run_every=0.5)
def _watched(job: Job) -> None:
    """The progress of a run; once it is done the page shows what it found."""
    if job.is_done:
        st.rerun()
    st.progress(job.share, f"{job.finished:,} of {counted(len(job.cases), 'case')}")
    if job.stop.is_set():
        st.caption("Stopping; what is done is kept.")
    else:
        st.button("Stop", key="stress-stop", on_click=job.stop.set)


def _shown(state: Desk, found: Stressed) -> None:
    """What the run found, beside the plan that it started from."""
    plan = found.plan
    if found.seconds is not None:
        st.caption(_searched(found, state.decimal_mark))
    if found.stopped:
        st.info(f"Stopped: {len(found.outcomes):,} of {counted(found.asked, 'case')} are done.")
    picked = _ranked(state, found)
    if picked is not None:
        case_view(state, plan, picked)
    _drawn(state, found)

    def workbook() -> bytes:
        file = BytesIO()
        write_workbook(plan, file, more=[stress_sheet(found, header_of(plan))])
        return file.getvalue()

    st.download_button(
        "Workbook with sheet Stress", workbook, f"{_file_name(plan)} stressed.xlsx", XLSX, key="stress-book",
        on_click="ignore",
    )  # fmt: skip


def _file_name(plan: Plan) -> str:
    return "".join(c for c in plan.week.rules.week if c.isalnum() or c in " -_")[:60].strip() or "Week"


def _ranked(state: Desk, found: Stressed) -> Outcome | None:
    """The worst case in words, bars and the table; answers the case picked."""
    ranked = found.ranked()
    if not ranked:
        return None
    rules, mark = found.plan.week.rules, state.decimal_mark
    st.markdown(_worst(found, ranked, mark))
    planned = [one for one in ranked if not one.why][:MOST_BARS]
    named = [(_name(one), one) for one in planned]
    if named:
        left, right = st.columns(2, gap="medium")
        with left:
            ranked_bars(
                [(name, found.more_short(one)) for name, one in named],
                f"More short, {rules.unit}", mark, None,
                f"How much more goes short in the {len(named)} worst cases; the table says the same.",
            )  # fmt: skip
        with right:
            ranked_bars(
                [(name, found.dearer(one)) for name, one in named],
                f"Freight and charges dearer by, {rules.currency}", mark, 0,
                f"How much dearer the {len(named)} worst cases are; the table says the same.",
            )  # fmt: skip
    minor = minor_places(rules.currency)
    surely = Heading(f"At least, {rules.currency}", "Proved: by so much or more the least cost rises", minor)
    headings = [
        Heading("Case"),
        Heading(f"More short, {rules.unit}", "Beside today, over all customers"),
        Heading(f"Dearer by, {rules.currency}", "Freight and charges beside today", minor),
        *([] if found.seconds is None else [surely]),
        Heading(f"Freight, {rules.currency}", "Exact, before amounts are rounded", minor),
        Heading(f"Charge for short, {rules.currency}", places=minor),
        Heading(f"Charge for unsent, {rules.currency}", places=minor),
        Heading(f"Another way, {rules.unit}", "What goes on other rate rows than today"),
        Heading("Hit", "How many customers go shorter than today"),
        Heading("Who most"),
    ]
    rows = [_row(found, one, len(headings)) for one in ranked]
    row = reasons_table(headings, rows, f"stress-table-{id(found)}", mark, most_height=420)
    for sentence in found.unchanged:
        st.caption(plain(sentence))
    open_ended = [_name(one) for one in ranked if one.may_serve_better]
    if open_ended:
        st.caption(plain(f"Perhaps less would go short, which is not proved: {', '.join(open_ended)}."))
    if sum(one.case.kind == "lane lost" for one in ranked) == MOST_LANES:
        st.caption(f"Of the lanes in use, the {MOST_LANES:,} that carry most were tried.")
    if row is None:
        st.caption("Pick a case to see who is hit and which lanes change, on the map.")
        return None
    return ranked[row]


def _row(found: Stressed, one: Outcome, width: int) -> list[Cell]:
    if one.why:
        return [_name(one), *[None] * (width - 2), one.why]
    surely: list[Cell] = [] if found.seconds is None else [found.surely_dearer(one)]
    return [
        _name(one), found.more_short(one), found.dearer(one), *surely, one.freight, one.short_charge,
        one.unsent_charge, one.moved, Decimal(len(one.hit)), _most_hit(one),
    ]  # fmt: skip


def _searched(found: Stressed, mark: str) -> str:
    """What the figures of a run with whole loads are."""
    currency, gap = found.plan.week.rules.currency, found.today.gap
    said = (
        f"With whole loads each case was searched for {found.seconds:g} s. *Dearer by* holds the best plan "
        "found against today's: it can be done. *At least* is proved: by so much or more the least cost "
        "rises, service as good. Cases are ranked by what is proved."
    )
    if gap:
        said += f" Today's plan itself is at most {plain(money(gap, currency, mark))} above the least cost."
    return said


def _worst(found: Stressed, ranked: tuple[Outcome, ...], mark: str) -> str:
    rules, worst = found.plan.week.rules, ranked[0]
    if worst.why:
        return f"**{plain(_name(worst))}** cannot be planned: {plain(worst.why)}"
    more, dearer = found.more_short(worst), found.dearer(worst)
    cost = plain(money(abs(dearer), rules.currency, mark))
    way = "dearer" if dearer >= 0 else "cheaper, since less is delivered"
    if found.seconds is not None and worst.gap:
        surely = found.surely_dearer(worst)
        way += f" (proved: at least {plain(money(surely, rules.currency, mark))})"
    short = f"{plain(quantity(more, rules.unit, mark))} more go short and " if more > 0 else ""
    return (
        f"Worst of all: **{plain(_name(worst))}**. {short.capitalize()}freight and charges are {cost} {way}."
    )


def _name(one: Outcome) -> str:
    return one.case.words[:1].upper() + one.case.words[1:]


def _most_hit(one: Outcome) -> str:
    line = sorted(one.hit, key=lambda who: -who[1])[:3]
    return ", ".join(name for name, _ in line) + (" …" if len(one.hit) > 3 else "")


def _drawn(state: Desk, found: Stressed) -> None:
    drawn, draws = found.drawn, found.draws
    totals = [one.total for one in drawn]
    spread = spreading(totals)
    if spread is None or draws is None:
        return
    rules, mark = found.plan.week.rules, state.decimal_mark
    minor = minor_places(rules.currency)
    st.markdown(f"#### {counted(len(drawn), 'drawn week')}")
    short = sum(bool(one.short) for one in drawn)
    worse = sum(found.more_short(one) > 0 for one in drawn)
    st.markdown(
        f"Half of them cost up to **{plain(money(spread.middle, rules.currency, mark))}**, nine tenths up to "
        f"**{plain(money(spread.ninetieth, rules.currency, mark))}**; today it is "
        f"{plain(money(found.today.total, rules.currency, mark))}. "
        f"Something goes short in {short:,} of {len(drawn):,}, more than today in {worse:,}."
    )
    bins = bins_of(totals)
    left, right = st.columns([3, 2], gap="medium")
    with left:
        histogram(
            bins, found.today.total, f"Freight and charges, {rules.currency}", mark,
            "How many drawn weeks cost how much; the table says the same.",
        )  # fmt: skip
        with st.expander("The chart as a table"):
            rows: list[list[Cell]] = [[one.low, one.high, Decimal(one.count)] for one in bins]
            headings = [Heading(f"From, {rules.currency}"), Heading("To"), Heading("Drawn weeks", places=0)]
            reasons_table(headings, rows, f"stress-bins-{id(found)}", mark, pick=False)
    with right:
        often = short_often(drawn)
        if often:
            st.markdown("**Who goes short**")
            rows = [[one.customer, Decimal(one.weeks), one.most] for one in often]
            headings = [
                Heading("Customer"),
                Heading("Drawn weeks", places=0),
                Heading(f"At most, {rules.unit}"),
            ]
            reasons_table(headings, rows, f"stress-often-{id(found)}", mark, pick=False, most_height=260)
    strays = "; ".join(
        f"{what} {strays_in_words(one)}"
        for what, one in (("orders", draws.orders), ("stock", draws.stock), ("rates", draws.rates))
    )
    fixed = (number(spread.least, mark, minor), number(spread.most, mark, minor))
    st.caption(
        plain(
            f"Seed {draws.seed}; {strays}. Least {fixed[0]}, most {fixed[1]} {rules.currency}. "
            "Each is a plan of its own, proved."
        )
    )
