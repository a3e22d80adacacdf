"""The packages that Hithe stands on: their licences, written into a file, and known holes in them.

python -m tests.audit              compare LICENCES.md with what is installed
python -m tests.audit --write      write it anew
python -m tests.audit --holes      ask pip-audit (needs pip-audit and a network)
"""

import subprocess
import sys
import tomllib
from collections.abc import Iterator
from importlib.metadata import Distribution, PackageNotFoundError, distribution
from pathlib import Path

import click
from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

ROOT = Path(__file__).parents[1]
FILE = ROOT / "LICENCES.md"
RUNTIME_EXTRAS = ("cluster", "postgres", "sign-in")
"""Extras of ours that somebody runs with; the test extra is not handed to anybody."""

UNCLEAR = "not stated"
CLASSIFIER = "License :: OSI Approved :: "
SAME = {
    "3-Clause BSD License": "BSD-3-Clause",
    "MIT License": "MIT",
    "The MIT License": "MIT",
    "Apache Software License": "Apache-2.0",
    "Apache License 2.0": "Apache-2.0",
    "Apache License, Version 2.0": "Apache-2.0",
    "Apache 2.0": "Apache-2.0",
    "BSD License": "BSD",
    "ISC License (ISCL)": "ISC",
    "Mozilla Public License 2.0 (MPL 2.0)": "MPL-2.0",
    "Python Software Foundation License": "PSF-2.0",
}
HEAD = """# Licences

Hithe itself calls these packages, or they call each other; nothing of them is copied into it. Written by
`python -m tests.audit --write`; a test fails when a package is missing here.

| package | licence |
|---|---|
"""


def runtime() -> dict[str, Distribution]:
    """Every installed package that Hithe needs to run, with all of its extras, by name."""
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    wanted = list(project["dependencies"])
    for extra in RUNTIME_EXTRAS:
        wanted += project["optional-dependencies"].get(extra, [])
    found: dict[str, Distribution] = {}
    todo = [Requirement(one) for one in wanted]
    while todo:
        requirement = todo.pop()
        name = canonicalize_name(requirement.name)
        if not applies(requirement):
            continue
        if name not in found:
            try:
                found[name] = distribution(requirement.name)
            except PackageNotFoundError:  # an extra that is not installed here
                continue
        todo += list(needed_by(found[name], requirement.extras))
    return dict(sorted(found.items()))


def applies(requirement: Requirement, extra: str = "") -> bool:
    return requirement.marker is None or requirement.marker.evaluate({"extra": extra})


def needed_by(package: Distribution, extras: set[str]) -> Iterator[Requirement]:
    """What a package needs, with these extras of it."""
    for line in package.requires or ():
        requirement = Requirement(line)
        if any(applies(requirement, extra) for extra in ("", *extras)):
            requirement.marker = None
            yield requirement


def licence_of(package: Distribution) -> str:
    """The licence that a package states: its expression, else its classifiers, else its text's first line."""
    said = package.metadata
    stated = [said["License-Expression"] or ""]
    stated.append(" and ".join(one.removeprefix(CLASSIFIER) for one in classifiers(package)))
    stated.append(((said["License"] or "") if "License" in said else "").strip().split("\n")[0])
    found = next((one for one in stated if one and len(one) < 120), UNCLEAR)
    return SAME.get(found, found)


def classifiers(package: Distribution) -> list[str]:
    every = package.metadata.get_all("Classifier") or []
    return [one for one in every if one.startswith(CLASSIFIER) and one != CLASSIFIER.strip()]


def listed() -> dict[str, str]:
    """The packages in the file with their licences."""
    lines = FILE.read_text(encoding="utf-8").splitlines() if FILE.exists() else []
    rows = [line.strip("| ").split(" | ") for line in lines if line.startswith("| ") and " | " in line]
    return {row[0]: row[1] for row in rows if row[0] != "package"}


def written() -> str:
    """The file as it should be. A package listed before and not installed here keeps its line."""
    now = {name: licence_of(package) for name, package in runtime().items()}
    rows = {**listed(), **now}
    return HEAD + "".join(f"| {name} | {rows[name]} |\n" for name in sorted(rows))


@click.command()
@click.option("--write", is_flag=True, help="Write LICENCES.md anew.")
@click.option("--holes", is_flag=True, help="Ask pip-audit for known holes; fails where it cannot tell.")
def main(write: bool, holes: bool) -> None:
    """Licences and known holes of the packages that Hithe needs to run."""
    if write:
        FILE.write_text(written(), encoding="utf-8")
        click.echo(f"{len(listed())} packages")
    missing = sorted(set(runtime()) - set(listed()))
    for name in missing:
        click.echo(f"{name} is not in {FILE.name}", err=True)
    if holes:
        wanted = "".join(f"{name}=={package.version}\n" for name, package in runtime().items())
        command = [
            sys.executable,
            "-m",
            "pip_audit",
            "--strict",
            "--no-deps",
            "--disable-pip",
            "-r",
            "/dev/stdin",
        ]
        sys.exit(subprocess.run(command, input=wanted, text=True, check=False).returncode)
    sys.exit(1 if missing else 0)


if __name__ == "__main__":
    main()
