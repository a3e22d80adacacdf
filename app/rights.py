"""Who works in this session and what they may see and change: asked before every week is opened or listed."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import streamlit as st

from app.sign_in import Role, SignIn, desks_of, is_too_old, name_of, role_of
from engine.records.weeks import DESK


@dataclass(frozen=True)
class House:
    """How this desk was started: for whoever is on this machine, with sign-in, or for a network without."""

    sign_in: SignIn | None = None
    on_network: bool = False


@dataclass(frozen=True)
class Person:
    """Somebody who may work here.

    who: the name that the sign-in service vouches for, empty without one; desks: whose weeks they may open,
    None for all; may_list: without it, a week opens by its address alone.
    """

    role: Role = Role.DISPATCHER
    who: str = ""
    desks: tuple[str, ...] | None = (DESK,)
    may_list: bool = True

    @property
    def may_change(self) -> bool:
        return self.role is not Role.MANAGER

    @property
    def home(self) -> str:
        """The desk that a new week belongs to."""
        return self.desks[0] if self.desks else DESK

    def may_open(self, desk: str) -> bool:
        return self.desks is None or desk in self.desks


_started: list[House] = [House()]


def start_as(house: House) -> None:
    """Say once, before the first page, how this desk was started."""
    _started[0] = house


def house() -> House:
    return _started[0]


def somebody(claims: Mapping[str, Any]) -> Person | None:
    """The person that the sign-in service vouches for; None where the file gives them no role or no desk."""
    sign_in = house().sign_in
    if sign_in is None:
        return Person(may_list=not house().on_network)
    role = role_of(sign_in, claims)
    if role is None or is_too_old(sign_in, claims):
        return None
    desks = None if role is Role.ADMINISTRATOR else desks_of(sign_in, claims) if sign_in.desks else (DESK,)
    if desks == ():
        return None
    return Person(role, name_of(sign_in, claims), desks)


def claims() -> Mapping[str, Any]:
    """What the sign-in service said of whoever is here; nothing where nobody is signed in."""
    if house().sign_in is None:
        return {}
    said = st.user.to_dict()
    return said if said.get("is_logged_in") else {}


def person() -> Person:
    """Who works in this session.

    Raises:
        PermissionError: nobody who may.
    """
    found = somebody(claims())
    if found is None:
        raise PermissionError("Nobody with a role is signed in.")
    return found
