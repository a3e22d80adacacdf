"""A writer that is killed at random points loses nothing that it acknowledged (hundreds: `tests.crash`)."""

import subprocess
import sys
from pathlib import Path

KILLS = 15


def test_every_acknowledged_change_is_found_after_a_kill(place: str) -> None:
    command = [sys.executable, "-m", "tests.crash", "--kills", str(KILLS), "--records", place]
    ended = subprocess.run(
        command, capture_output=True, text=True, check=False, cwd=Path(__file__).parents[2]
    )
    assert ended.returncode == 0, ended.stderr[-2000:]
    assert ended.stdout.startswith(f"{KILLS} kills: ")
    assert int(ended.stdout.split()[2]) >= KILLS
