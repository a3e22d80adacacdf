"""The findings of an upload: looked at in their surroundings, mended, answered, accepted and remembered."""

from pathlib import Path

import engine
import sample_data
from app.parts.uploaded import KEY as UPLOADED
from app.parts.uploaded import Uploaded
from app.session import KEY, Desk
from tests.app.test_pages import page


def messy() -> tuple[Desk, Uploaded]:
    file = Path(sample_data.path(sample_data.MESSY_WEEK))
    files = [(file.name, file.read_bytes())]
    reading = engine.read_week(files)
    state = Desk()
    state.open(reading)
    return state, Uploaded(files, reading.week, reading.findings)


def test_a_cell_is_mended_in_the_file_and_in_the_week() -> None:
    state, kept = messy()
    test = page("pages/figures.py", state)
    test.session_state[UPLOADED] = kept
    test.run()
    assert not test.exception
    looked_at = next(box for box in test.selectbox if box.label == "Finding")
    number = next(n for n, label in enumerate(looked_at.options) if "Stock B5" in label)
    looked_at.select_index(number).run()
    assert not test.exception
    test.text_input(key="mend-text").input("700").run()
    test.button(key="mend-go").click().run()
    assert not test.exception
    state = test.session_state[KEY]
    assert state.week.depots["Quarry"].available == 700
    assert not any(finding.read == "about 700" for finding in state.all_findings())
    again = engine.read_week(test.session_state[UPLOADED].files)
    assert again.week.depots["Quarry"].available == 700


def test_an_accepted_finding_is_not_brought_up_again() -> None:
    state, kept = messy()
    test = page("pages/figures.py", state)
    test.session_state[UPLOADED] = kept
    test.run()
    looked_at = next(box for box in test.selectbox if box.label == "Finding")
    number = next(n for n, label in enumerate(looked_at.options) if "Ironworks" in label)
    looked_at.select_index(number).run()
    test.button(key="accept-finding").click().run()
    assert not test.exception
    findings = test.session_state[UPLOADED].findings
    assert not any("Ironworks" in finding.message for finding in findings)
