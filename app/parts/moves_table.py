"""What two plans send otherwise, rate by rate: as a table, the largest change first."""

import pandas as pd
import streamlit as st

from app.parts.words import number
from engine.planning.differences import Difference


def moves_table(by: Difference, unit: str, mark: str, key: str) -> None:
    """Depot, customer, haulier, what went and what goes."""
    right = st.column_config.TextColumn
    st.dataframe(
        pd.DataFrame(
            {
                "Depot": [row.key.depot for row in by.rows],
                "Customer": [row.key.customer for row in by.rows],
                "Haulier": [row.key.haulier or "" for row in by.rows],
                "Was": [number(row.before, mark) for row in by.rows],
                "Is": [number(row.after, mark) for row in by.rows],
            }
        ),
        hide_index=True,
        column_config={
            name: right(f"{name}, {unit}", alignment="right", width="small") for name in ("Was", "Is")
        },
        key=key,
        alt="Rates that carry another quantity",
    )
