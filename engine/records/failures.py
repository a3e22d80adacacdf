"""What can go wrong with records, each with a sentence that says what is and what is not saved."""

from collections.abc import Iterator
from contextlib import contextmanager

from sqlalchemy.exc import DBAPIError, SQLAlchemyError


class NotSaved(Exception):
    """Something could not be written, or the records could not be reached; the message is for a person."""


class Missing(LookupError):
    """There is no such week or plan in the records."""


@contextmanager
def saving(what: str, where: str) -> Iterator[None]:
    """Turns what the database says into a sentence about what is and is not saved.

    what: what is being saved, for the sentence; where: the records' name for a person

    Raises:
        NotSaved: with that sentence.
    """
    try:
        yield
    except (SQLAlchemyError, OSError, UnicodeEncodeError) as error:
        raise NotSaved(
            f"Not saved: {what}. {reason_of(error)} The records are {where}. "
            f"What was saved before is still there and unchanged."
        ) from error


@contextmanager
def reading(what: str, where: str) -> Iterator[None]:
    """Turns what the database says while reading into a sentence.

    Raises:
        NotSaved: with that sentence.
    """
    try:
        yield
    except (SQLAlchemyError, OSError) as error:
        raise NotSaved(f"Could not read {what}. {reason_of(error)} The records are {where}.") from error


_REASONS = (
    (("disk is full", "no space left", "file too large"), "The disk is full: free some space and try again."),
    (
        ("readonly", "read-only", "permission denied"),
        "The records may not be written to: allow writing to that file and its folder.",
    ),
    (
        ("database is locked", "lock timeout"),
        "Another program keeps the records busy: try again in a moment.",
    ),
    (("disk i/o error",), "The disk refused to write (it may be full or failing): check it and try again."),
    (
        ("unable to open database file", "not a directory"),
        "The file cannot be opened: see that the folder is there and may be written to.",
    ),
    (("not a database", "malformed"), "The file is damaged or is no records file: restore it from a copy."),
    (
        ("connection", "server closed", "terminating", "could not translate"),
        "The database cannot be reached: see that it runs and that the network is up.",
    ),
    (
        ("surrogates not allowed", "nul (0x00)"),
        "A text in it has a character that cannot be stored: type it anew.",
    ),
)


def reason_of(error: Exception) -> str:
    """Why it failed and what to do, in a sentence or two."""
    said = str(error.orig if isinstance(error, DBAPIError) and error.orig is not None else error)
    low = said.lower()
    for signs, sentence in _REASONS:
        if any(sign in low for sign in signs):
            return sentence
    first = said.strip().splitlines()[0] if said.strip() else type(error).__name__
    return f"The database says: {first}."
