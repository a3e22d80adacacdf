"""Signing in with a real service and a real browser: who gets in, and what each role sees and may change."""

import re
from pathlib import Path

from playwright.sync_api import Page, expect

from engine.records import list_weeks, open_records, open_week
from tests.browser.conftest import free_port
from tests.browser.test_two_sessions import CHARGE, Visit, edit_depot, opened_sample
from tests.safe.conftest import Start, sign_in_file
from tests.safe.provider import Provider


def signed_in(page: Page, who: str) -> None:
    page.get_by_role("button", name="Sign in", exact=True).click()
    page.get_by_role("link", name=who, exact=True).first.click()
    page.locator("h1").first.wait_for(timeout=60_000)


def links(page: Page) -> list[str]:
    menu = page.locator('[data-testid="stTopNavLink"]')
    menu.first.wait_for(timeout=30_000)
    return [text.strip() for text in menu.all_inner_texts()]


def test_each_role_sees_and_changes_what_it_may(
    provider: Provider, start: Start, visit: Visit, tmp_path: Path
) -> None:
    port = free_port()
    desk = start("--sign-in", str(sign_in_file(tmp_path, provider, port)), port=port)
    place = tmp_path / "records.sqlite"

    ann = visit(desk)
    expect(ann.get_by_role("button", name="Sign in", exact=True)).to_be_visible()
    assert ann.locator('[data-testid="stTopNavLink"], input[type="file"]').count() == 0
    signed_in(ann, "ann@hithe.test")
    ann.get_by_role("heading", name="Figures", exact=True).wait_for(timeout=60_000)
    week = opened_sample(ann)
    assert "who=" not in ann.url
    edit_depot(ann, 0, CHARGE, "3")
    ann.get_by_text("1 change since it was opened").wait_for(timeout=30_000)
    records = open_records(place)
    kept = open_week(records, week)
    assert [entry.who for entry in kept.history.entries] == ["Ann Reed, ann@hithe.test"]
    assert kept.listed.desk == "North"

    ben = visit(f"{desk}/?week={week}")  # a manager, and by the address for changing
    expect(ben.get_by_text("open the link once more")).to_be_visible()
    signed_in(ben, "ben@hithe.test")
    assert links(ben)[:5] == ["Plan", "Reasons", "Compare", "Hand over", "Weeks"]
    expect(ben.get_by_text("Ben <b>Moss</b>, ben@\u2060hithe.test · manager")).to_be_visible()
    ben.goto(f"{desk}/?week={week}")
    ben.get_by_text("for reading only").wait_for(timeout=60_000)
    ben.wait_for_url(re.compile("read="))
    assert week not in ben.url
    assert ben.get_by_role("button", name="Undo").count() == 0
    ben.goto(f"{desk}/weeks?week={week}")
    ben.get_by_role("heading", name="Weeks", exact=True).wait_for(timeout=60_000)
    expect(ben.get_by_role("button", name="Open", exact=True)).to_have_count(1, timeout=30_000)
    assert ben.get_by_role("button", name=re.compile("Archive|Copy")).count() == 0
    assert ben.get_by_text("Together").count() == 0
    ben.goto(f"{desk}/figures?week={week}")  # a page that is not his
    ben.locator('[data-testid="stTopNavLink"]').first.wait_for(timeout=60_000)
    assert ben.locator('input[type="file"]').count() == 0

    dora = visit(desk)  # another desk
    signed_in(dora, "dora@hithe.test")
    for name, value in (("week", week), ("read", kept.listed.read_id)):
        dora.goto(f"{desk}/?{name}={value}")
        dora.get_by_text("There is no such week").wait_for(timeout=60_000)
        assert dora.get_by_text("6 depots, 48 customers").count() == 0
    dora.get_by_role("link", name="Weeks", exact=True).click()
    dora.get_by_text("There is no such week here yet.").wait_for(timeout=30_000)

    cleo = visit(desk)  # the administrator of all desks
    signed_in(cleo, "cleo@hithe.test")
    cleo.get_by_role("link", name="Weeks", exact=True).click()
    cleo.get_by_text("North").wait_for(timeout=30_000)
    cleo.get_by_role("button", name="Open", exact=True).click()
    cleo.get_by_text("1 change since it was opened").wait_for(timeout=30_000)
    cleo.get_by_role("radio", name="Changes", exact=True).click()
    cleo.get_by_role("button", name="Take back only this change").wait_for(timeout=30_000)
    cleo.get_by_role("radio", name="Weeks", exact=True).click()
    cleo.get_by_role("button", name="Archive", exact=True).click(timeout=30_000)
    expect(cleo.get_by_text("There is no such week here yet.")).to_be_visible(timeout=30_000)
    assert not list_weeks(records, desk=None)

    ann.get_by_role("button", name="Sign out").click()
    ann.get_by_role("button", name="Sign in", exact=True).wait_for(timeout=60_000)
    assert "/end" in provider.seen
    records.close()
    assert not list(tmp_path.rglob("secrets.toml"))
    log = (tmp_path / "desk.log").read_text()
    assert "Ann" not in log
    assert week not in log
    assert "Traceback" not in log


def test_who_has_no_role_or_no_honest_token_stays_outside(
    provider: Provider, start: Start, visit: Visit, tmp_path: Path
) -> None:
    port = free_port()
    desk = start("--sign-in", str(sign_in_file(tmp_path, provider, port)), port=port)

    eve = visit(desk)
    signed_in(eve, "eve@hithe.test")
    eve.get_by_text("You have no role on this desk").wait_for(timeout=30_000)
    assert eve.locator('[data-testid="stTopNavLink"]').count() == 0
    forged = visit(desk)
    provider.wrong_key = True
    try:
        signed_in(forged, "ann@hithe.test")
        forged.get_by_role("button", name="Sign in", exact=True).wait_for(timeout=30_000)
    finally:
        provider.wrong_key = False
    assert forged.locator('[data-testid="stTopNavLink"]').count() == 0
    old = visit(desk)
    signed_in(old, "old@hithe.test")
    old.get_by_text("Your sign-in has run out").wait_for(timeout=30_000)
    unverified = visit(desk)
    unverified.get_by_role("button", name="Sign in", exact=True).click()
    unverified.get_by_role("link", name="ann@hithe.test").nth(1).click()
    unverified.get_by_text("You have no role on this desk").wait_for(timeout=60_000)
    context = eve.context  # a cookie that somebody changed is no sign-in
    for cookie in context.cookies():
        if cookie["name"] == "_streamlit_user":
            middle = len(cookie["value"]) // 2
            other = "A" if cookie["value"][middle] != "A" else "B"
            changed = cookie["value"][:middle] + other + cookie["value"][middle + 1 :]
            context.add_cookies([{**cookie, "value": changed}])  # type: ignore[typeddict-item]
    eve.reload()
    eve.get_by_role("button", name="Sign in", exact=True).wait_for(timeout=60_000)


def test_a_service_that_does_not_answer_is_said(start: Start, visit: Visit, tmp_path: Path) -> None:
    gone = Provider()
    port = free_port()
    file = sign_in_file(tmp_path, gone, port)
    gone.close()
    page = visit(start("--sign-in", str(file), port=port))
    page.get_by_role("button", name="Sign in", exact=True).click()
    page.get_by_text("The sign-in service does not answer").wait_for(timeout=30_000)
