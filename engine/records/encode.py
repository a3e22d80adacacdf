"""Changes as text and back: what the list of changes looks like on disk.

A change is a JSON object with its `kind` and its fields; a value that JSON does not have is an object
with one key that says what it is, so that every text can be read without knowing the field it stood in:
{"decimal": "12.5"}, {"date": "2031-02-03"}, {"rate_key": [...]}, {"depot": {...}}, {"list": [...]}.
"""

import json
from collections.abc import Mapping
from dataclasses import MISSING, fields
from datetime import date
from decimal import Decimal, InvalidOperation
from typing import Any, cast

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together
from engine.exact import canonical
from engine.figures import Customer, Depot, Gone, Haulier, Order, RateKey, RateRow

KINDS: Mapping[str, type] = {
    "add": Add,
    "remove": Remove,
    "alter": Alter,
    "hold": SetHold,
    "lift": Lift,
    "together": Together,
}
"""The kinds of change by the name they carry on disk; a name is never given to another kind."""

RECORDS: Mapping[str, type] = {
    "depot": Depot,
    "customer": Customer,
    "order": Order,
    "rate_row": RateRow,
    "gone": Gone,
    "haulier": Haulier,
}
"""The values with fields of their own that a change may carry."""

_NAMES = {kind: name for name, kind in KINDS.items()} | {kind: name for name, kind in RECORDS.items()}


class NotUnderstood(ValueError):
    """A change that cannot be written down, or a text that is no change; the message says why."""


def kind_of(change: Change) -> str:
    """The name that a change's kind carries on disk.

    Raises:
        NotUnderstood: it is no kind of change that can be stored.
    """
    name = _NAMES.get(type(change))
    if name is None or name not in KINDS:
        raise NotUnderstood(
            f"A {type(change).__name__} is no kind of change that can be stored: "
            f"the kinds are {', '.join(KINDS)}."
        )
    return name


def change_as_text(change: Change) -> str:
    """The change as one line of JSON.

    Raises:
        NotUnderstood: the change, or a value in it, cannot be stored.
    """
    return json.dumps(_change(change), separators=(",", ":"))


def change_from_text(text: str) -> Change:
    """The change that a text of `change_as_text` stands for.

    Raises:
        NotUnderstood: the text is no change, or of a kind that this version does not know.
    """
    try:
        read = json.loads(text)
    except ValueError as error:
        raise NotUnderstood(f"A stored change is damaged: {text[:60]!r} is not JSON ({error}).") from None
    return _change_from(read)


def _change(change: Change) -> dict[str, Any]:
    return {"kind": kind_of(change), **_fields_of(change)}


def _fields_of(value: Any) -> dict[str, Any]:
    """The fields of a frozen value that are not at their default."""
    return {
        f.name: _encoded(getattr(value, f.name))
        for f in fields(value)
        if f.default is MISSING or getattr(value, f.name) != f.default
    }


def _encoded(value: Any) -> Any:
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, Decimal):
        try:
            return {"decimal": canonical(value)}
        except ValueError as error:
            raise NotUnderstood(str(error)) from None
    if isinstance(value, date):
        return {"date": value.isoformat()}
    if isinstance(value, RateKey):
        return {"rate_key": list(value)}
    if isinstance(value, tuple):
        return {"list": [_encoded(one) for one in value]}
    name = _NAMES.get(type(value))
    if name in RECORDS:
        return {name: _fields_of(value)}
    if name in KINDS:
        return {"change": _change(value)}
    raise NotUnderstood(f"A {type(value).__name__} cannot be stored as part of a change.")


def _change_from(read: Any) -> Change:
    if not isinstance(read, dict) or not isinstance(read.get("kind"), str):
        raise NotUnderstood(f"A stored change is damaged: {_shown(read)} has no kind.")
    name = read["kind"]
    if name not in KINDS:
        raise NotUnderstood(
            f"A stored change is of the kind '{name}', which this version of Hithe does not know: "
            f"it was made by a newer one. Open the week with that one."
        )
    given = {field: value for field, value in read.items() if field != "kind"}
    return cast(Change, _built(KINDS[name], name, given))


def _built(kind: type, name: str, given: Any) -> Any:
    """A value of a kind from its stored fields, all of which it must have."""
    if not isinstance(given, dict):
        raise NotUnderstood(f"A stored change is damaged: {_shown(given)} is no {name}.")
    known = {f.name: f for f in fields(kind)}
    strange = sorted(set(given) - set(known))
    missing = sorted(f for f, about in known.items() if about.default is MISSING and f not in given)
    if strange or missing:
        what = f"'{strange[0]}', which a {name} does not have" if strange else f"no '{missing[0]}'"
        raise NotUnderstood(f"A stored change is damaged, or made by a newer Hithe: a {name} with {what}.")
    return kind(**{field: _decoded(value) for field, value in given.items()})


def _decoded(value: Any) -> Any:
    if value is None or isinstance(value, bool | int | str):
        return value
    if not isinstance(value, dict) or len(value) != 1:
        raise NotUnderstood(f"A stored change is damaged: {_shown(value)} is no value.")
    ((what, content),) = value.items()
    try:
        if what == "decimal":
            return Decimal(_text(content))
        if what == "date":
            return date.fromisoformat(_text(content))
        if what == "rate_key":
            return RateKey(*content)
    except (ValueError, TypeError, InvalidOperation):
        raise NotUnderstood(f"A stored change is damaged: {_shown(content)} is no {what}.") from None
    if what == "list" and isinstance(content, list):
        return tuple(_decoded(one) for one in content)
    if what == "change":
        return _change_from(content)
    if what in RECORDS:
        return _built(RECORDS[what], what, content)
    raise NotUnderstood(
        f"A stored change holds a '{what}', which this version of Hithe does not know: "
        f"it was made by a newer one. Open the week with that one."
    )


def _text(content: Any) -> str:
    if not isinstance(content, str):
        raise TypeError(content)
    return content


def _shown(value: Any) -> str:
    return repr(value)[:60]
