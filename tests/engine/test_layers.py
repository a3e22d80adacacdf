"""Imports run downwards only, so that a reader can trust the order of the rooms."""

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]

ROOMS = [
    "app",
    "engine.report",
    "engine.reasons",
    "engine.compare",
    "engine.records",
    "engine.planning",
    "engine.intake",
    "engine.history",
    "engine.altered",
    "engine.load_sizes",
    "engine.week",
    "engine.touch",
    "engine.changes",
    "engine.rates",
    "engine.columns",
    "engine.figures",
    "engine.money",
    "engine.findings",
    "engine.loads",
    "engine.network",
    "engine.exact",
]
"""From the top of the house to the bottom; `engine` itself and `sample_data` are doors to it."""

MODULES = sorted([*ROOT.glob("app/**/*.py"), *ROOT.glob("engine/**/*.py")])


def room_of(module: str) -> int | None:
    """The lowest-numbered room that a module stands in, None for doors and what is not ours."""
    for number, room in enumerate(ROOMS):
        if module == room or module.startswith(room + "."):
            return number
    return None


def imported(path: Path) -> set[str]:
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            found |= {node.module} | {f"{node.module}.{alias.name}" for alias in node.names}
    return found


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(path.relative_to(ROOT)))
def test_imports_run_downwards(path: Path) -> None:
    module = ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__")
    room = room_of(module)
    for name in imported(path):
        other = room_of(name)
        if name == "engine" or name.startswith("engine."):
            assert not (module.startswith("engine.") and name == "engine"), f"{module} uses the public face"
        if room is not None and other is not None:
            assert other >= room, f"{module} imports {name}, which stands above it"


@pytest.mark.parametrize("path", [p for p in MODULES if "engine" in p.parts], ids=str)
def test_the_engine_knows_no_browser(path: Path) -> None:
    assert not any(
        name.split(".")[0] in {"streamlit", "app", "pydeck", "altair", "click"} for name in imported(path)
    )


def test_every_room_is_there_to_be_checked() -> None:
    assert len(MODULES) > 20
    assert {room_of(".".join(p.relative_to(ROOT).with_suffix("").parts)) for p in MODULES} >= {0, 5, 6}


def test_one_room_and_one_module_reach_the_integer_solver() -> None:
    reach = {path.relative_to(ROOT).with_suffix("") for path in MODULES if "highspy" in imported(path)}
    elsewhere = {str(module) for module in reach if module.parent != Path("engine/loads")}
    assert elsewhere <= {"engine/planning/steady_search"}
