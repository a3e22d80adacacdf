"""What stands before the pages: sign in, or be told why not; and who is signed in."""

import urllib.error
import urllib.request
from collections.abc import Mapping
from typing import Any

import streamlit as st

from app.parts.words import plain
from app.rights import claims, house, somebody
from app.sign_in import SignIn, desks_of, is_too_old, name_of, role_of

PATIENCE = 5.0
"""Seconds that the sign-in service has to answer before somebody is sent there."""


def let_in() -> bool:
    """Whether whoever is here may go on; where not, the page says what to do."""
    sign_in = house().sign_in
    if sign_in is None:
        return True
    said = claims()
    if somebody(said) is not None:
        return True
    middle = st.container(horizontal_alignment="center", key="doorway")
    with middle.container(key="door", border=True, width=520):
        st.title("Hithe", anchor=False)
        if not said:
            _sign_in("The week's plan of this freight desk. Sign in to work on it or to read it.", sign_in)
        elif role_of(sign_in, said) is not None and is_too_old(sign_in, said):
            _sign_in("Your sign-in has run out. Nothing that you made is lost: sign in again.", sign_in)
        else:
            _no_role(sign_in, said)
    return False


def who_is_here() -> None:
    """The name of whoever is signed in, and the way out; nothing where nobody signs in."""
    sign_in = house().sign_in
    if sign_in is None:
        return
    said = claims()
    role = role_of(sign_in, said)
    with st.container(
        horizontal=True, horizontal_alignment="right", vertical_alignment="center", key="signed-in"
    ):
        st.caption(f"{plain(name_of(sign_in, said))} · {role.value if role else ''}", width="content")
        if st.button("Sign out", key="sign-out", type="tertiary"):
            st.logout()


def _sign_in(words: str, sign_in: SignIn) -> None:
    st.markdown(words)
    if st.query_params.to_dict():
        st.caption("You came by a link to a week: open the link once more after you have signed in.")
    if st.button("Sign in", type="primary", key="sign-in"):
        if answers(sign_in):
            st.login()
        else:
            st.error("The sign-in service does not answer. Try again in a minute, or tell whoever runs this.")


def _no_role(sign_in: SignIn, given: Mapping[str, Any]) -> None:
    st.markdown(f"You are signed in as {plain(name_of(sign_in, given))}.")
    if role_of(sign_in, given) is None:
        st.warning("You have no role on this desk. Ask whoever runs it to add your address or group.")
    elif not desks_of(sign_in, given):
        st.warning("You have a role, but are in the list of no desk. Ask whoever runs this one to add you.")
    if st.button("Sign out", key="sign-out"):
        st.logout()


def answers(sign_in: SignIn) -> bool:
    """Whether the sign-in service is there: a browser sent to one that is not sees a bare fault."""
    try:
        with urllib.request.urlopen(sign_in.provider["server_metadata_url"], timeout=PATIENCE) as answer:
            return bool(answer.status == 200)
    except (urllib.error.URLError, OSError, ValueError):
        return False
