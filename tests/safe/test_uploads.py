"""What an upload may cost is bounded: each file, how many, all together, and what unpacks to far more."""

import io
import zipfile

import pytest

import engine
from app import serve
from engine.intake.refusal import MEGABYTE, Limits

CSV = b"Depot,Available\nQuarry,5\n"


def refusal(files: list[tuple[str, bytes]], limits: Limits | None = None) -> str:
    with pytest.raises(engine.Unreadable) as refused:
        engine.read_week(files, limits=limits)
    return refused.value.finding.message


def test_how_many_and_how_large() -> None:
    assert serve.flags(1)["server_maxUploadSize"] == Limits().size // MEGABYTE
    assert "at most 40 are read at once" in refusal([(f"{n}.csv", CSV) for n in range(41)])
    small = Limits(size=2 * MEGABYTE, all_files=3 * MEGABYTE)
    large = CSV + b" " * MEGABYTE
    assert "together are larger than 3 MB" in refusal([(f"{n}.csv", large) for n in range(4)], small)
    assert "larger than 2 MB" in refusal([("a.csv", large + large)], small)


def test_a_workbook_that_unpacks_to_far_more_is_not_unpacked() -> None:
    held = io.BytesIO()
    with zipfile.ZipFile(held, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("[Content_Types].xml", b" " * (40 * MEGABYTE))
    assert len(held.getvalue()) < MEGABYTE
    assert "unpacks to 200 times its size or more" in refusal([("week.xlsx", held.getvalue())])
