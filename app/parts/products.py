"""An upload of several products: one is chosen for the desk, the others become weeks of their own."""

from collections.abc import Sequence

import streamlit as st

from app.access import records
from app.parts.words import counted, plain
from app.rights import person
from app.session import Desk
from engine.intake.answers import Answers
from engine.intake.names import folded
from engine.intake.reading import read_weeks
from engine.records import NotSaved, create_week

File = tuple[str, bytes]


def product_choice(state: Desk, products: Sequence[str]) -> str:
    """Which of the products the week is to be of; that of the week on screen is offered first."""
    here = folded(state.week.rules.week)
    first = next((n for n, product in enumerate(products) if folded(product) in here), 0)
    names = ", ".join(plain(product) for product in products)
    st.markdown(f"**These figures are of {len(products)} products:** {names}. A week is of one product.")
    if len(products) > 6:
        return str(st.selectbox("Product", products, index=first, key=f"product-{state.uploads}"))
    chosen = st.radio(
        "Product",
        range(len(products)),
        index=first,
        horizontal=True,
        format_func=lambda number: plain(products[number]),
        key=f"product-{state.uploads}",
    )
    return products[chosen or 0]


def keep_others(state: Desk, files: Sequence[File], chosen: str, known: Answers) -> bool:
    """Put the weeks of the other products into the records; False with a message where that failed."""
    kept = []
    try:
        for product, reading in read_weeks(files, answers=known).items():
            if product != chosen:
                create_week(records(), reading, person().home)
                kept.append(reading.week.rules.week)
    except (NotSaved, ValueError) as failure:
        state.message = ("error", str(failure))
        return False
    weeks = counted(len(kept), "more week")
    state.message = ("success", f"Kept {weeks}, to be opened on Weeks: {'; '.join(kept)}.")
    return True
