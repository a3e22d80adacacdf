"""Names of depots, customers and hauliers: what counts as the same name, and what nearly does."""

import unicodedata
from collections.abc import Iterable
from difflib import SequenceMatcher
from functools import lru_cache


@lru_cache(maxsize=1 << 17)
def folded(name: str) -> str:
    """What two spellings of one name have in common: letters regardless of case, Unicode form and spaces."""
    if not name.isascii():
        name = unicodedata.normalize("NFKC", unicodedata.normalize("NFKC", name).casefold())
    return " ".join(name.casefold().split())


def nearest(name: str, known: Iterable[str]) -> str | None:
    """The known name that `name` is probably a slip of, None where nothing is near.

    Near is: the same but for spaces, accents and punctuation; or one letter off in short names, two in
    longer ones, where digits agree (Depot 1 is no slip of Depot 2).
    """
    bare = _bare(name)
    digits, letters = _digits(name), _letters(bare)
    best: tuple[float, str] | None = None
    for candidate in known:
        other = _bare(candidate)
        if bare == other and bare:
            return candidate
        if abs(len(bare) - len(other)) > 2 or digits != _digits(candidate) or min(len(bare), len(other)) < 4:
            continue
        if len(letters ^ _letters(other)) > 4:  # two slips change four letters at most
            continue
        matcher = SequenceMatcher(None, bare, other, autojunk=False)
        slips = max(len(bare), len(other)) - sum(block.size for block in matcher.get_matching_blocks())
        if slips <= (1 if len(bare) <= 5 else 2):
            likeness = matcher.ratio()
            if best is None or likeness > best[0]:
                best = likeness, candidate
    return None if best is None else best[1]


def nearly_alike(names: Iterable[str]) -> list[tuple[str, str]]:
    """Pairs of names that differ in spaces, accents or punctuation only."""
    seen: dict[str, str] = {}
    pairs = []
    for name in names:
        bare = _bare(name)
        if not bare:
            continue
        if bare in seen:
            pairs.append((seen[bare], name))
        else:
            seen[bare] = name
    return pairs


_NOT_LETTERS = {code: None for code in range(128) if not chr(code).isalnum()}


@lru_cache(maxsize=1 << 16)
def _letters(bare: str) -> frozenset[str]:
    return frozenset(bare)


@lru_cache(maxsize=1 << 17)
def _bare(name: str) -> str:
    if name.isascii():
        return name.casefold().translate(_NOT_LETTERS)
    decomposed = unicodedata.normalize("NFKD", name.casefold())
    return "".join(c for c in decomposed if c.isalnum())


@lru_cache(maxsize=1 << 17)
def _digits(name: str) -> str:
    return "".join(c for c in name if c.isdigit())
