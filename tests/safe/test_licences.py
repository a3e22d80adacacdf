"""No package that Hithe needs to run lacks a line in the list of licences, nor forbids what we do with it."""

import re

from tests.audit import UNCLEAR, listed, runtime

OPEN = re.compile(
    r"MIT|BSD|Apache|ISC|PSF|Python|MPL|LGPL|Zlib|0BSD|Unlicense|CC0|HPND|MIT-CMU|Public Domain",
    re.IGNORECASE,
)


def test_every_package_has_its_licence() -> None:
    needed, known = runtime(), listed()
    assert {"streamlit", "sqlalchemy", "numba", "numpy", "altair"} <= set(needed)
    assert len(needed) > 30
    assert not sorted(set(needed) - set(known))


def test_no_licence_is_unclear_or_closed() -> None:
    for name, licence in listed().items():
        assert licence != UNCLEAR, name
        assert OPEN.search(licence), (name, licence)
        assert not re.search(r"(?<!L)GPL(?!.*(or|OR) )|AGPL|SSPL|BUSL|Proprietary", licence), (name, licence)
