"""The sample week, opened from wherever there is nothing yet."""

import sample_data
from app.session import Desk, read_files


def open_sample(state: Desk) -> None:
    """Put the sample week on the desk, or say why it could not be read."""
    reading, findings = read_files([sample_data.path(sample_data.SMALL_WEEK)])
    if reading is None:
        state.message = ("error", findings[0].message)
    else:
        state.open(reading)
