"""One depot's link: leads to that depot's loading list and to nothing else, and cannot be guessed.

A link is worked out from the week's id, which only those who may change the week know, by HMAC-SHA256
(RFC 2104). So nothing of it is kept, and neither the id nor another depot's link follows from it.
"""

import hashlib
import hmac
from base64 import urlsafe_b64encode

from sqlalchemy import select

from engine.records.failures import Missing, reading
from engine.records.opening import Records
from engine.records.schema import weeks

_LENGTH = 22
"""Letters of each half of a link: 132 bits."""


def depot_link(week_id: str, depot: str) -> str:
    """What a depot's address says."""
    return _mark(week_id, "week") + _mark(week_id, f"depot {depot}")


def week_of_link(records: Records, link: str) -> str:
    """The id of the week that a depot's link belongs to.

    Raises:
        Missing: it belongs to none, or the week is archived.
        NotSaved: the records cannot be read.
    """
    with reading("the week", records.where), records.read() as connection:
        ids = connection.execute(select(weeks.c.id).where(weeks.c.archived.is_(None))).scalars().all()
    half = link[:_LENGTH]
    for week_id in ids:
        if hmac.compare_digest(_mark(week_id, "week").encode(), half.encode()):
            return str(week_id)
    raise Missing("This link leads to no loading list any more. Ask the desk for a new one.")


def is_for(link: str, week_id: str, depot: str) -> bool:
    """Whether a link is this depot's."""
    return hmac.compare_digest(depot_link(week_id, depot).encode(), link.encode())


def _mark(week_id: str, what: str) -> str:
    digest = hmac.digest(week_id.encode(), what.encode(), hashlib.sha256)
    return urlsafe_b64encode(digest).decode()[:_LENGTH]
