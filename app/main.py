"""The desk in the browser: its pages, and what stands beside all of them."""

import sys
from pathlib import Path

import streamlit as st

import sample_data
from app.keeping import catch_up, keep_rest, keep_up, made_at_start, named_in_address
from app.parts.depot_page import depot_page
from app.parts.door import let_in, who_is_here
from app.parts.others import clashes, news, watch
from app.parts.words import counted, plain
from app.rights import person
from app.search_time import seconds_of_desk
from app.session import Desk, desk, read_files

HERE = Path(__file__).parent
TO_CHANGE = ("Figures", "Weeks")  # pages that somebody who only reads does not get


def opened_at_start(state: Desk) -> tuple[str, ...]:
    """The week that the address names, or that was named when the desk was started, once a session.

    Returns the files that a week was read from.
    """
    if state.started:
        return ()
    state.started = True
    state.searching.seconds = seconds_of_desk()
    named = tuple(sys.argv[1:])
    if named_in_address(state) or not named or made_at_start(state, named):
        return ()
    files = [Path(argument) for argument in named if argument != "--sample"]
    if "--sample" in named:
        files = [sample_data.path("small_week.xlsx")]
    reading, findings = read_files(files)
    if reading is None:
        state.message = ("error", findings[0].message)
        return ()
    state.open(reading)
    return named


def toolbar(state: Desk) -> None:
    """The week, undo and redo: the same above every page."""
    if state.week.is_empty:
        return
    made = len(state.history.entries)
    with st.container(horizontal=True, vertical_alignment="center", gap="small", key="toolbar"):
        st.markdown(f"**{plain(state.week.rules.week)}**", width="content")
        st.caption(
            f"{counted(len(state.week.depots), 'depot')}, {counted(len(state.week.customers), 'customer')}, "
            f"{counted(len(state.week.rates), 'rate')} · "
            + (f"{counted(made, 'change')} since it was opened" if made else "as it was opened")
            + ("" if state.kept is None else " · kept" if state.kept.may_change else " · for reading only")
        )
        if state.kept is not None and not state.kept.may_change:
            return
        nothing_done = state.history.undoable(state.who) is None
        nothing_undone = state.history.redoable(state.who) is None
        if st.button("↶ Undo", disabled=nothing_done, key="undo", help="Take your last change back"):
            state.undo()
            st.rerun()
        if st.button("↷ Redo", disabled=nothing_undone, key="redo", help="Make it again"):
            state.redo()
            st.rerun()


def main() -> None:
    st.set_page_config(page_title="Hithe", page_icon="⚓", layout="wide", initial_sidebar_state="collapsed")
    st.html(HERE / "desk.css")
    if depot_page() or not let_in():
        return
    me, state = person(), desk()
    files = opened_at_start(state)
    keep_up(state, files)
    only_reads = not me.may_change or (state.kept is not None and not state.kept.may_change)
    if only_reads:  # nothing is being typed that could be lost
        catch_up(state)
    pages = [
        st.Page(HERE / "pages" / "figures.py", title="Figures", default=not only_reads),
        st.Page(HERE / "pages" / "plan.py", title="Plan"),
        st.Page(HERE / "pages" / "reasons.py", title="Reasons"),
        st.Page(HERE / "pages" / "compare.py", title="Compare", default=only_reads),
        st.Page(HERE / "pages" / "handover.py", title="Hand over"),
        st.Page(HERE / "pages" / "weeks.py", title="Weeks"),
        st.Page(HERE / "pages" / "how_it_works.py", title="How it works"),
    ]
    if only_reads:
        left_out = TO_CHANGE if me.may_change else TO_CHANGE[:1]  # a manager finds weeks to read in the list
        pages = [page for page in pages if page.title not in left_out]
    page = st.navigation(pages, position="top")
    who_is_here()
    toolbar(state)
    watch(state)
    news(state)
    clashes(state)
    page.run()
    keep_rest(state)
    if catch_up(state):
        st.rerun()


if (
    __name__ == "__main__"
):  # as Streamlit runs it; a process spawned from the desk loads it under another name
    main()
