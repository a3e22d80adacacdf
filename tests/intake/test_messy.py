"""Every messy file: what was understood, which findings stand at which cells, and that no row is lost."""

import pytest

from engine.intake.reading import read_week
from tests.intake.expected import EXPECTED
from tests.intake.messy import CASES
from tests.intake.sheets import said


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_a_messy_file(case):
    reading = read_week(case.sources)
    assert reading.summary.startswith(case.understood)
    assert said(reading) == case.findings
    assert reading.rows_read == reading.rows_used + reading.rows_named
    assert reading.rows_named == sum(finding.rows for finding in reading.findings)
    files = {name for name, _ in case.sources} | {""}
    assert all(f.file in files and f.message.endswith((".", "?")) for f in reading.findings)


def test_every_case_has_its_expectation():
    assert sorted(EXPECTED) == sorted(case.name for case in CASES)
