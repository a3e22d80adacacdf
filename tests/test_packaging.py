"""The wheel carries everything that the desk needs: theme, style, sample weeks, migrations."""

import subprocess
import sys
import zipfile
from pathlib import Path

ROOT = Path(__file__).parents[1]


def test_the_wheel_holds_every_file_of_the_packages(tmp_path: Path) -> None:
    source = tmp_path / "source"
    names = subprocess.run(
        ["git", "ls-files", "app", "engine", "sample_data", "pyproject.toml", "README.md"],
        cwd=ROOT, check=True, capture_output=True, text=True,
    ).stdout.split("\n")  # fmt: skip
    for name in filter(None, names):
        target = source / name
        target.parent.mkdir(parents=True, exist_ok=True)
        target.write_bytes((ROOT / name).read_bytes())
    command = [sys.executable, "-m", "pip", "wheel", "-q", "--no-deps", "-w", str(tmp_path), str(source)]
    subprocess.run(command, check=True)
    (wheel,) = tmp_path.glob("hithe-*.whl")
    held = set(zipfile.ZipFile(wheel).namelist())
    ours = [name for name in names if name.startswith(("app/", "engine/", "sample_data/"))]
    missing = [name for name in ours if name not in held and not name.endswith(".gitattributes")]
    assert not missing
    assert "app/.streamlit/config.toml" in held
