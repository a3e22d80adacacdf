"""Starts the desk: Streamlit, on this machine only unless told otherwise, with every setting that matters."""

import errno
import os
import socket
import threading
import time
import urllib.error
import urllib.request
import webbrowser
from collections.abc import Sequence
from ipaddress import ip_address
from pathlib import Path
from secrets import token_urlsafe

import click

from app.plain_log import keep_log_plain
from app.sign_in import CALLBACK, SignIn
from engine.records.opening import VARIABLE

ADDRESS = "127.0.0.1"
ANY = ("0.0.0.0", "::")
LARGEST_UPLOAD_MB = 20


def flags(port: int, host: str = ADDRESS, names: Sequence[str] = ()) -> dict[str, object]:
    """Streamlit's settings. Unset ones leak in from the working directory, so these are all said.

    host: the address to listen on; names: by which browsers may reach it besides this machine's own
    """
    return {
        "server_port": port,
        "server_address": host,
        "browser_serverAddress": names[0] if names else ADDRESS,
        "browser_serverPort": port,
        "logger_hideWelcomeMessage": True,
        "secrets_files": [],
        "server_headless": True,
        "server_fileWatcherType": "none",
        "server_enableCORS": True,
        "server_enableXsrfProtection": True,
        "server_allowedHosts": [ADDRESS, "localhost", *names],
        "server_corsAllowedOrigins": [f"{way}://{name}" for name in names for way in ("http", "https")],
        "server_maxUploadSize": LARGEST_UPLOAD_MB,
        "browser_gatherUsageStats": False,
        "logger_enableRich": False,
        "server_enableAgentApi": False,
        "server_trustedUserHeaders": "{}",
        "server_unsafeMetricsUserAttributes": [],
        "server_enableStaticServing": False,
        # Python collects garbage by itself; after every run of every page it took most of a full desk's time
        "runner_postScriptGC": False,
        "client_toolbarMode": "minimal",
        "client_showErrorDetails": "none",
        "client_showErrorLinks": "false",
    }


def serve(
    port: int,
    open_browser: bool,
    files: Sequence[Path] = (),
    sample: bool = False,
    records: str | None = None,
    host: str = ADDRESS,
    names: Sequence[str] = (),
    sign_in: SignIn | None = None,
) -> None:
    """Run the desk until it is interrupted; `records` is where weeks are kept (None: the user's folder).

    host: the address to listen on; names: by which browsers reach it; sign_in: who may come in, None for
    whoever can reach it
    """
    from streamlit import config
    from streamlit.runtime.pages_manager import PagesManager
    from streamlit.web import bootstrap

    from app.preparing import begin
    from app.rights import House, start_as

    _refuse_taken(port, host)
    script = Path(__file__).with_name("main.py")
    settings = flags(port, host, [*names, *([sign_in.host] if sign_in else [])])
    config._main_script_path = str(script)
    # A folder called pages would be taken for a menu by itself, past main.py, by whoever comes first.
    PagesManager.uses_pages_directory = False
    bootstrap.load_config_options(flag_options=settings)
    keep_inside()
    start_as(House(sign_in, on_network=sign_in is None and not is_this_machine(host)))
    if sign_in is not None:
        tell_streamlit(sign_in)
    address = f"http://{ADDRESS if is_this_machine(host) or host in ANY else host}:{port}"
    click.echo(f"The desk opens at {address} (Ctrl-C ends it)", err=True)
    if open_browser:
        shown = sign_in.redirect_uri.removesuffix(CALLBACK) if sign_in else address
        threading.Thread(target=_open_when_ready, args=(address, shown), daemon=True).start()
    begin()
    if records is not None:
        os.environ[VARIABLE] = records
    arguments = ["--sample"] if sample else []
    arguments += [str(file.resolve()) for file in files]
    bootstrap.run(str(script), False, arguments, settings)


def is_this_machine(host: str) -> bool:
    """Whether nobody but this machine reaches what listens there."""
    try:
        return ip_address(host).is_loopback
    except ValueError:
        return host == "localhost"


def keep_inside() -> None:
    """Nothing that Streamlit does by itself leaves this machine, and no log says what a week holds."""
    from streamlit import net_util

    # Streamlit asks a host outside for its own address when a browser comes from an unknown origin.
    # For its inner one it turns to an outside address, though it sends nothing there.
    net_util.get_external_ip = lambda: None
    net_util.get_internal_ip = lambda: None
    keep_log_plain()


def tell_streamlit(sign_in: SignIn) -> None:
    """Hand the sign-in settings to Streamlit in memory: nothing secret is written anywhere."""
    from streamlit.runtime.secrets import secrets_singleton

    secrets_singleton.merge_programmatic_secrets(
        {
            "auth": {
                **sign_in.provider,
                "cookie_secret": sign_in.cookie_secret or token_urlsafe(48),
                "client_kwargs": {"scope": sign_in.scope},
            }
        }
    )


def _refuse_taken(port: int, host: str) -> None:
    with socket.socket(socket.AF_INET6 if ":" in host else socket.AF_INET) as tried:
        tried.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            tried.bind((host, port))
        except socket.gaierror:
            raise click.ClickException(f"{host} is no address of this machine: give --host one.") from None
        except OSError as failure:
            if failure.errno != errno.EADDRINUSE:
                raise click.ClickException(f"The desk cannot listen on {host}: {failure.strerror}.") from None
            raise click.ClickException(
                f"Port {port} is taken, perhaps by a desk that is open already. Choose another with --port."
            ) from None


def _open_when_ready(address: str, shown: str, patience: float = 30.0) -> None:
    end = time.monotonic() + patience
    while time.monotonic() < end:
        try:
            with urllib.request.urlopen(f"{address}/_stcore/health", timeout=1):
                break
        except (urllib.error.URLError, OSError):
            time.sleep(0.1)
    webbrowser.open(shown)
