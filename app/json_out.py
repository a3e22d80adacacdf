"""An answer as JSON, to a file or to standard output, where nothing else is ever printed."""

import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import click


def write_json(answer: Mapping[str, Any], target: str) -> None:
    """Write the answer to a file, or to standard output for "-"."""
    text = json.dumps(answer, ensure_ascii=False, indent=1)
    if target == "-":
        click.echo(text)
    else:
        Path(target).write_text(text + "\n", encoding="utf-8")
        click.echo(f"Wrote {target}", err=True)
