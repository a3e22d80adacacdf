"""The sign-in file, the roles in it, and the desk's refusal to open to a network without it."""

import re
from pathlib import Path

import pytest
from click.testing import CliRunner

from app import command, serve
from app.rights import House, somebody, start_as
from app.sign_in import NoSignIn, Role, is_too_old, name_of, read_sign_in, role_of

FILE = """
[provider]
server_metadata_url = "https://id.example.org/.well-known/openid-configuration"
client_id = "hithe"
client_secret = "not to be told"
redirect_uri = "https://desk.example.org/oauth2callback"

[roles]
administrator = ["cleo@example.org"]
dispatcher = ["Ann@Example.org", "group:planning"]
manager = ["group:office"]
"""


def written(folder: Path, text: str = FILE, mode: int = 0o600) -> Path:
    file = folder / "sign_in.toml"
    file.write_text(text, encoding="utf-8")
    file.chmod(mode)
    return file


def test_roles_by_address_and_by_group(tmp_path: Path) -> None:
    found = read_sign_in(written(tmp_path))
    assert role_of(found, {"email": "ann@example.ORG"}) is Role.DISPATCHER
    assert role_of(found, {"email": "x@example.org", "groups": ["Office"]}) is Role.MANAGER
    assert role_of(found, {"email": "x@example.org", "groups": ["office", "planning"]}) is Role.DISPATCHER
    assert role_of(found, {"email": "cleo@example.org", "groups": "office"}) is Role.ADMINISTRATOR
    for claims in (
        {},
        {"email": "x@example.org"},
        {"email": "ann@example.org", "email_verified": False},
        {"name": "ann@example.org", "sub": "ann@example.org"},
        {"email": ["ann@example.org"], "groups": {"planning": 1}},
    ):
        assert role_of(found, claims) is None
    assert found.host == "desk.example.org"
    assert "not to be told" not in repr(found)


def test_an_address_never_passes_for_a_group(tmp_path: Path) -> None:
    assert role_of(read_sign_in(written(tmp_path)), {"email": "group:planning"}) is None


def test_a_sign_in_runs_out(tmp_path: Path) -> None:
    found = read_sign_in(written(tmp_path, FILE.replace("[roles]", "hours = 2\n[roles]")))
    assert not is_too_old(found, {"iat": 1000}, now=1000 + 7200)
    assert is_too_old(found, {"iat": 1000}, now=1000 + 7201)
    assert is_too_old(found, {}, now=0)


def test_the_name_beside_changes_tells_namesakes_apart_and_is_one_line(tmp_path: Path) -> None:
    found = read_sign_in(written(tmp_path))
    said = {"name": "Ann\u202e\n Reed\x00", "email": "ann@example.org"}
    assert name_of(found, said) == "Ann Reed, ann@example.org"
    assert len(name_of(found, {"name": "x" * 9999, "email": "ann@example.org"})) <= 120


@pytest.mark.parametrize(
    ("was", "put", "said"),
    [
        ("client_id", "client", "'client' in [provider] is not known"),
        ('client_secret = "not to be told"\n', "", "needs client_secret"),
        ("https://desk", "http://desk", "must begin with https://"),
        ("https://id", "http://id", "must begin with https://"),
        ("/oauth2callback", "/callback", "must end with /oauth2callback"),
        ("manager =", "boss =", "the role 'boss' is not known"),
        ('["group:office"]', '"group:office"', "must be a list"),
        ("[roles]", 'cookie_secret = "short"\n[roles]', "32 characters"),
        ("[roles]", "hours = 0\n[roles]", "hours must be a number above 0"),
        ("[roles]", 'depot_links = "yes"\n[roles]', "must be true or false"),
        ("[roles]", "[rules]", "[rules] is not known"),
        ("[provider]", "[provider", "is not a TOML file"),
    ],
)
def test_a_file_that_will_not_do_says_why_and_tells_no_secret(
    tmp_path: Path, was: str, put: str, said: str
) -> None:
    with pytest.raises(NoSignIn, match=re.escape(said)) as failure:
        read_sign_in(written(tmp_path, FILE.replace(was, put, 1)))
    assert "not to be told" not in str(failure.value)


@pytest.mark.parametrize("mode", [0o640, 0o604, 0o622])
def test_a_file_that_others_can_read_or_write_is_refused(tmp_path: Path, mode: int) -> None:
    with pytest.raises(NoSignIn, match="chmod 600"):
        read_sign_in(written(tmp_path, mode=mode))


@pytest.fixture
def served(monkeypatch: pytest.MonkeyPatch) -> list[tuple[object, ...]]:
    """What the desk would have been started with."""
    begun: list[tuple[object, ...]] = []
    monkeypatch.setattr(serve, "serve", lambda *given: begun.append(given))
    return begun


@pytest.mark.parametrize("host", ["0.0.0.0", "::", "10.1.2.3", "desk.example.org"])
def test_a_network_needs_sign_in_or_the_words(
    host: str, tmp_path: Path, served: list[tuple[object, ...]]
) -> None:
    run = CliRunner()
    refused = run.invoke(command.main, ["desk", "--host", host], env={"HITHE_SIGN_IN": ""})
    assert refused.exit_code == 2
    assert "--sign-in FILE" in " ".join(refused.output.split())
    assert not served
    assert run.invoke(command.main, ["desk", "--host", host, "--no-sign-in"]).exit_code == 0
    file = str(written(tmp_path))
    assert run.invoke(command.main, ["desk", "--host", host, "--sign-in", file]).exit_code == 0
    assert [given[7] is not None for given in served] == [False, True]
    both = run.invoke(command.main, ["desk", "--host", host, "--sign-in", file, "--no-sign-in"])
    assert both.exit_code == 2
    week = run.invoke(command.main, ["desk", file, "--host", host, "--no-sign-in"])
    assert week.exit_code == 2
    assert "opens no files of yours" in " ".join(week.output.split())


@pytest.mark.parametrize("host", ["127.0.0.1", "localhost", "127.8.8.8", "::1"])
def test_this_machine_needs_none(host: str, served: list[tuple[object, ...]]) -> None:
    assert CliRunner().invoke(command.main, ["desk", "--host", host]).exit_code == 0
    assert len(served) == 1
    assert serve.flags(1)["server_address"] == "127.0.0.1"


def test_the_secret_stays_in_memory_and_never_in_the_environment(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    import os

    from streamlit.runtime.secrets import secrets_singleton

    monkeypatch.chdir(tmp_path)
    sign_in = read_sign_in(written(tmp_path))
    before = set(tmp_path.iterdir())
    serve.tell_streamlit(sign_in)
    try:
        assert secrets_singleton["auth"]["client_secret"] == "not to be told"
        assert len(secrets_singleton["auth"]["cookie_secret"]) >= 43  # 256 bits and more
        assert "not to be told" not in "".join(os.environ.values())
        assert set(tmp_path.iterdir()) == before
    finally:
        secrets_singleton._programmatic_secrets = None
        secrets_singleton._secrets = None


def test_a_desk_of_several_lets_nobody_in_who_is_on_none(tmp_path: Path) -> None:
    file = written(tmp_path, FILE + '\n[desks]\nNorth = ["group:planning"]\n')
    start_as(House(read_sign_in(file)))
    try:
        import time

        now = {"iat": time.time()}
        assert somebody({"email": "ann@example.org", **now}) is None
        north = somebody({"email": "x@example.org", "groups": ["planning"], **now})
        assert north is not None
        assert (north.desks, north.may_open("North"), north.may_open("South")) == (("North",), True, False)
        every = somebody({"email": "cleo@example.org", **now})
        assert every is not None
        assert every.may_open("South")
    finally:
        start_as(House())
