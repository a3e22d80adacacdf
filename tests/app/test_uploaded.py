"""The findings of an upload: looked at in their surroundings, mended, answered, accepted and remembered."""

from pathlib import Path

import engine
import sample_data
from app.parts.uploaded import KEY as UPLOADED
from app.parts.uploaded import Uploaded
from app.session import KEY, Desk
from tests.app.test_pages import page
from tests.intake.sheets import workbook


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
    box = next(box for box in test.text_input if box.label == "B5 should say")
    assert box.value == "about 700"
    box.input("700")
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


def test_one_product_of_several_is_chosen_and_the_others_are_kept(tmp_path: Path) -> None:
    from app.keeping import records
    from engine.records import list_weeks, open_week
    from tests.intake.test_answers import PRODUCTS

    name, data = workbook(PRODUCTS)
    test = page("pages/figures.py", Desk())
    test.run()
    test.file_uploader[0].upload(name, data, "application/octet-stream").run()
    assert not test.exception
    assert any("2 products" in said.value for said in test.markdown)
    test.radio[0].set_value(1).run()
    assert any("8 t ordered" in said.value for said in test.markdown)
    next(button for button in test.button if "keep the others" in button.label).click().run()
    assert not test.exception
    week = test.session_state[KEY].week
    assert (week.rules.week, week.depots["Northgate"].available) == ("Week, Ash", 20)
    (kept,) = [one for one in list_weeks(records()) if one.name == "Week, Lime"]
    assert open_week(records(), kept.id).history.week.depots["Northgate"].available == 10
