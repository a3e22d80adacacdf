"""Writes down whom a process wants to speak to: Python reads this first where it is on the path."""

import os
import sys


def _heard(event: str, arguments: tuple[object, ...]) -> None:
    if event not in ("socket.connect", "socket.getaddrinfo", "socket.gethostbyname"):
        return
    said = arguments[1] if event == "socket.connect" else arguments[0]
    host = said[0] if isinstance(said, tuple) else said
    with open(os.environ["OVERHEARD"], "a", encoding="utf-8") as file:
        file.write(f"{event} {host!r}\n")


if "OVERHEARD" in os.environ:
    sys.addaudithook(_heard)
