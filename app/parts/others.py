"""Others on the same week: what they changed, and what of ours touches it."""

import streamlit as st

from app.keeping import WATCH_SECONDS, is_behind
from app.parts.change_words import words_of
from app.parts.words import counted, plain
from app.session import Desk
from engine.history import Entry
from engine.records import Clash, Missing, NotSaved

SHOWN = 5


@st.fragment(run_every=WATCH_SECONDS)
def watch(state: Desk) -> None:
    """Looks every few seconds whether somebody else changed the week.

    A reader's screen follows at once; somebody who may be typing is told, and looks when it suits.
    """
    if state.kept is None:
        return
    try:
        behind = is_behind(state, state.kept)
    except (NotSaved, Missing) as failure:
        st.error(plain(str(failure)))
        return
    if not behind:
        return
    if not state.kept.may_change:
        st.rerun()
    with st.container(horizontal=True, vertical_alignment="center", key="behind"):
        st.info("Somebody else has changed this week. Nothing of yours is lost.")
        if st.button("Show it", key="catch-up"):
            st.rerun()


def news(state: Desk) -> None:
    """What others changed since we looked, said once; and what could not be saved."""
    if state.unsaved:
        st.error(plain(state.unsaved))
    if not state.news:
        return
    lines = [f"- {said_of(entry)}" for entry in state.news[-SHOWN:]]
    if len(state.news) > SHOWN:
        lines.append(f"- and {len(state.news) - SHOWN} before that")
    st.info(f"**{counted(len(state.news), 'change')} by others**\n" + "\n".join(lines))
    state.news = ()


def clashes(state: Desk) -> None:
    """Our changes that touch theirs, side by side; nothing of ours was made, and we are asked."""
    if not state.clashes:
        return
    with st.container(border=True, key="clashes"):
        st.markdown(
            "**Changed by others at the same time.** Theirs stand; yours was not made. Which is right?"
        )
        for number, clash in enumerate(state.clashes):
            ours, theirs = st.columns(2)
            with ours:
                st.markdown(f"Yours: {plain(words_of(clash.mine.change))}")
                st.caption(clash.why)
                if st.button("Make mine", key=f"mine-{number}"):
                    _answer(state, clash, make=True)
            with theirs:
                for entry in clash.theirs:
                    st.markdown(f"Theirs: {said_of(entry)}")
                if st.button("Leave theirs", key=f"theirs-{number}"):
                    _answer(state, clash, make=False)


def _answer(state: Desk, clash: Clash, make: bool) -> None:
    rest = tuple(one for one in state.clashes if one is not clash)
    state.clashes = ()
    if make:
        state.commit(clash.mine.change, clash.mine.why)
    state.clashes += rest
    state.start_afresh()
    st.rerun()


def said_of(entry: Entry) -> str:
    """A change with who made it, safe inside Markdown."""
    who = plain(entry.who) or "Somebody"
    undone = "took back or restored: " if entry.undoes is not None else ""
    return f"{who}: {undone}{plain(words_of(entry.change))}"
