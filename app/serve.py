"""Starts the desk: Streamlit on this machine only, with every setting that matters said here."""

import os
import socket
import threading
import time
import urllib.error
import urllib.request
import webbrowser
from collections.abc import Sequence
from pathlib import Path

import click

from engine.records.opening import VARIABLE

ADDRESS = "127.0.0.1"
LARGEST_UPLOAD_MB = 20


def flags(port: int) -> dict[str, object]:
    """Streamlit's settings. Unset ones leak in from the working directory, so these are all said."""
    return {
        "server_port": port,
        "server_address": ADDRESS,
        "server_headless": True,
        "server_fileWatcherType": "none",
        "server_enableCORS": True,
        "server_enableXsrfProtection": True,
        "server_allowedHosts": [ADDRESS, "localhost"],
        "server_maxUploadSize": LARGEST_UPLOAD_MB,
        "browser_gatherUsageStats": False,
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
) -> None:
    """Run the desk until it is interrupted; `records` is where weeks are kept (None: the user's folder)."""
    from streamlit import config
    from streamlit.runtime.pages_manager import PagesManager
    from streamlit.web import bootstrap

    from app.preparing import begin

    _refuse_taken(port)
    script = Path(__file__).with_name("main.py")
    settings = flags(port)
    config._main_script_path = str(script)
    # A folder called pages would be taken for a menu by itself, past main.py, by whoever comes first.
    PagesManager.uses_pages_directory = False
    bootstrap.load_config_options(flag_options=settings)
    address = f"http://{ADDRESS}:{port}"
    click.echo(f"The desk opens at {address} (Ctrl-C ends it)", err=True)
    if open_browser:
        threading.Thread(target=_open_when_ready, args=(address,), daemon=True).start()
    begin()
    if records is not None:
        os.environ[VARIABLE] = records
    arguments = ["--sample"] if sample else []
    arguments += [str(file.resolve()) for file in files]
    bootstrap.run(str(script), False, arguments, settings)


def _refuse_taken(port: int) -> None:
    with socket.socket() as tried:
        tried.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            tried.bind((ADDRESS, port))
        except OSError:
            raise click.ClickException(
                f"Port {port} is taken, perhaps by a desk that is open already. Choose another with --port."
            ) from None


def _open_when_ready(address: str, patience: float = 30.0) -> None:
    end = time.monotonic() + patience
    while time.monotonic() < end:
        try:
            with urllib.request.urlopen(f"{address}/_stcore/health", timeout=1):
                break
        except (urllib.error.URLError, OSError):
            time.sleep(0.1)
    webbrowser.open(address)
