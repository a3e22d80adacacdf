"""The sign-in file: one TOML file with the sign-in service's settings and who has which role."""

import os
import stat
import time
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import Enum
from pathlib import Path
from typing import Any
from urllib.parse import urlsplit

HOURS = 12
"""How long a sign-in holds unless the file says otherwise."""

SHORTEST_SECRET = 32
CALLBACK = "/oauth2callback"
HERE = ("localhost", "127.0.0.1", "::1")
_LONGEST_NAME = 120
_PROVIDER = {"client_id", "client_secret", "server_metadata_url", "redirect_uri"}
_OPTIONAL = {"cookie_secret", "address_claim", "group_claim", "hours", "depot_links", "scope"}


class NoSignIn(ValueError):
    """The sign-in file cannot be used; the message says why and what to do."""


class Role(Enum):
    """What somebody may do: read; read and change; and besides see the weeks of every desk."""

    MANAGER = "manager"
    DISPATCHER = "dispatcher"
    ADMINISTRATOR = "administrator"


@dataclass(frozen=True)
class SignIn:
    """What the file says. `roles` and `desks` map to addresses and groups ('group:NAME'), in small letters.

    desks: empty where everybody shares one; depot_links: a depot's link opens without signing in.
    """

    provider: Mapping[str, str] = field(repr=False)
    roles: Mapping[Role, frozenset[str]]
    desks: Mapping[str, frozenset[str]]
    cookie_secret: str = field(default="", repr=False)
    address_claim: str = "email"
    group_claim: str = "groups"
    hours: float = HOURS
    scope: str = "openid email profile"
    depot_links: bool = False

    @property
    def redirect_uri(self) -> str:
        return self.provider["redirect_uri"]

    @property
    def host(self) -> str:
        """The name that browsers know the desk by."""
        return urlsplit(self.redirect_uri).hostname or ""


def read_sign_in(file: Path) -> SignIn:
    """What a sign-in file says.

    Raises:
        NoSignIn: it cannot be read, others can read it too, or it does not say what is needed.
    """
    try:
        _check_private(file)
        said = tomllib.loads(file.read_text(encoding="utf-8"))
    except tomllib.TOMLDecodeError as error:
        raise NoSignIn(f"{file} is not a TOML file: {error}.") from None
    except (OSError, UnicodeDecodeError) as error:
        raise NoSignIn(f"{file} cannot be read: {getattr(error, 'strerror', None) or error}.") from None
    unknown = set(said) - {"provider", "roles", "desks"}
    if unknown:
        raise NoSignIn(f"{file}: [{min(unknown)}] is not known. There are [provider], [roles] and [desks].")
    provider = _provider(file, _table(file, said, "provider"))
    return SignIn(
        provider={name: provider[name] for name in sorted(_PROVIDER)},
        roles=_roles(file, _table(file, said, "roles")),
        desks={desk: _members(file, "desks", desk, who) for desk, who in said.get("desks", {}).items()},
        **{name: value for name, value in provider.items() if name in _OPTIONAL},
    )


def _check_private(file: Path) -> None:
    found = file.stat()
    if os.name != "posix":  # other systems keep rights elsewhere than in the mode
        return
    if stat.S_IMODE(found.st_mode) & 0o077:
        raise NoSignIn(f"{file} holds a secret and others can read or change it: run `chmod 600 {file}`.")
    if found.st_uid not in (os.getuid(), 0):
        raise NoSignIn(f"{file} belongs to another account: it must be yours, so that nobody can change it.")


def _table(file: Path, said: Mapping[str, Any], name: str) -> Mapping[str, Any]:
    table = said.get(name)
    if not isinstance(table, dict) or not table:
        raise NoSignIn(f"{file}: the table [{name}] is missing. The README shows a whole file.")
    return table


def _provider(file: Path, said: Mapping[str, Any]) -> Mapping[str, Any]:
    unknown = set(said) - _PROVIDER - _OPTIONAL
    if unknown:
        raise NoSignIn(f"{file}: '{min(unknown)}' in [provider] is not known.")
    for name in sorted(_PROVIDER):
        if not isinstance(said.get(name), str) or not said[name].strip():
            raise NoSignIn(f'{file}: [provider] needs {name} = "…".')
    for name in ("server_metadata_url", "redirect_uri"):
        parts = urlsplit(said[name])
        if parts.scheme not in ("http", "https") or not parts.hostname:
            raise NoSignIn(f"{file}: {name} must be a whole address that begins with https://.")
        if parts.scheme == "http" and parts.hostname not in HERE:
            raise NoSignIn(
                f"{file}: {name} must begin with https://: over http anybody on the way could sign in as "
                f"somebody else. Put a web server that speaks https before the desk."
            )
    if urlsplit(said["redirect_uri"]).path != CALLBACK:
        raise NoSignIn(f"{file}: redirect_uri must end with {CALLBACK}, right after the desk's name.")
    kinds = {
        "cookie_secret": str,
        "scope": str,
        "address_claim": str,
        "group_claim": str,
        "depot_links": bool,
    }
    for name, kind in kinds.items():
        if name in said and not isinstance(said[name], kind):
            raise NoSignIn(f"{file}: {name} must be {'true or false' if kind is bool else 'text'}.")
    if len(said.get("cookie_secret", "") or "x" * SHORTEST_SECRET) < SHORTEST_SECRET:
        raise NoSignIn(f"{file}: cookie_secret needs {SHORTEST_SECRET} characters or more, or none at all.")
    hours = said.get("hours", HOURS)
    if isinstance(hours, bool) or not isinstance(hours, (int, float)) or not 0 < hours <= 24 * 30:
        raise NoSignIn(f"{file}: hours must be a number above 0 and at most {24 * 30}.")
    return said


def _roles(file: Path, said: Mapping[str, Any]) -> Mapping[Role, frozenset[str]]:
    names = [role.value for role in Role]
    unknown = set(said) - set(names)
    if unknown:
        raise NoSignIn(f"{file}: the role '{min(unknown)}' is not known. There are {', '.join(names)}.")
    return {role: _members(file, "roles", role.value, said.get(role.value, [])) for role in Role}


def _members(file: Path, table: str, name: str, said: Any) -> frozenset[str]:
    if not isinstance(said, list) or not all(isinstance(one, str) and one.strip() for one in said):
        raise NoSignIn(f'{file}: {name} in [{table}] must be a list like ["ann@example.org", "group:desk"].')
    return frozenset(one.strip().casefold() for one in said)


def known_as(sign_in: SignIn, claims: Mapping[str, Any]) -> frozenset[str]:
    """The address and the groups that the sign-in service vouches for, as the file writes them."""
    found = set()
    address = claims.get(sign_in.address_claim)
    verified = claims.get("email_verified", True)
    if isinstance(address, str) and verified in (True, "true"):
        found.add(address.strip().casefold().removeprefix("group:"))
    groups = claims.get(sign_in.group_claim) or ()
    for group in [groups] if isinstance(groups, str) else groups if isinstance(groups, (list, tuple)) else ():
        found.add(f"group:{group}".strip().casefold())
    return frozenset(found)


def role_of(sign_in: SignIn, claims: Mapping[str, Any]) -> Role | None:
    """The highest role of somebody who is signed in, None for none."""
    known = known_as(sign_in, claims)
    for role in (Role.ADMINISTRATOR, Role.DISPATCHER, Role.MANAGER):
        if not known.isdisjoint(sign_in.roles[role]):
            return role
    return None


def desks_of(sign_in: SignIn, claims: Mapping[str, Any]) -> tuple[str, ...]:
    """The desks in whose list somebody is, in the file's order."""
    known = known_as(sign_in, claims)
    return tuple(desk for desk, members in sign_in.desks.items() if not known.isdisjoint(members))


def is_too_old(sign_in: SignIn, claims: Mapping[str, Any], now: float | None = None) -> bool:
    """Whether the sign-in was longer ago than the file allows, or nobody can tell when it was."""
    when = claims.get("iat")
    if isinstance(when, bool) or not isinstance(when, (int, float)):
        return True
    return (time.time() if now is None else now) - when > sign_in.hours * 3600


def name_of(sign_in: SignIn, claims: Mapping[str, Any]) -> str:
    """The name that changes are made under: the person's, and the address that tells namesakes apart."""
    address = str(claims.get(sign_in.address_claim) or claims.get("sub") or "").strip()
    name = str(claims.get("name") or "").strip()
    both = f"{name}, {address}" if name and name != address else address
    return "".join(letter for letter in " ".join(both.split()) if letter.isprintable())[:_LONGEST_NAME]
