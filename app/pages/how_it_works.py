"""How it works: what the desk does with a week, on an example small enough to check by hand."""

from pathlib import Path

import pandas as pd
import streamlit as st

from app.parts.small_example import BY_HAND, ORDERS, RATES, STOCK, small_example
from app.parts.words import number
from app.preparing import prepared
from app.rights import person
from app.session import desk

PAGES = Path(__file__).parent

state = desk()
mark = state.decimal_mark
st.title("How it works")
st.caption("Five minutes. The example is planned by the same engine as your week.")
with prepared():
    example = small_example()
plan = example.plan


def lanes(quantities: dict[tuple[str, str], int]) -> pd.DataFrame:
    """Depots down, customers across, as a rate grid has it."""
    return pd.DataFrame(
        {customer: [quantities.get((depot, customer)) for depot in STOCK] for customer in ORDERS},
        index=pd.Index(list(STOCK), name="Depot"),
        dtype="Int64",
    )


left, right = st.columns(2, gap="large")
with left:
    st.header("1. The figures", anchor=False)
    st.markdown(
        "Two depots, three customers. **Weir** has 70 t to send, **Lock** 50 t. **Ash** ordered 40 t, "
        "**Elm** 30 t, **Oak** 45 t. A haulier charges for each lane, in EUR per t:"
    )
    st.table(lanes(RATES))
    st.markdown(
        "That is all a week needs. Everything else (several hauliers on a lane, limits, loads, charges, "
        "priorities) is a column that you fill in or leave out. A blank cell is never taken for a zero."
    )

    st.header("2. Why not the cheapest lane first?", anchor=False)
    st.markdown(
        "By hand one takes the cheapest lane, fills it, and goes on with the next: Lock to Elm, Weir to Ash, "
        f"Weir to Oak. Then Weir is empty, and the last 15 t for Oak come from Lock at 14. In all "
        f"**{number(example.by_hand, mark)} EUR**."
    )
    st.table(lanes({(depot, customer): sent for depot, customer, sent in BY_HAND}))
    st.markdown(
        f"The plan of the desk costs **{number(plan.total_cost, mark)} EUR**: Weir keeps its stock for Oak, "
        "where Lock is dear, and leaves part of Ash to Lock, where Lock is only 1 EUR dearer."
    )
    sent = {(one.key.depot, one.key.customer): int(one.quantity) for one in plan.shipments}
    st.table(lanes(sent))

    st.header("3. How one can be sure", anchor=False)
    st.markdown(
        "Every plan is checked twice before you see it. One check adds everything up again from your "
        "figures. The other needs no trust in how the plan was found: it puts a price on a tonne at each "
        "depot and each customer, such that no lane costs less than the two prices it joins. Whoever "
        "ships these orders from these depots must then pay at least what the prices come to, "
        f"**{number(plan.proof.lower_bound, mark)} EUR** here. The plan costs exactly that, so none is "
        "cheaper. All of it is done in whole numbers, and the workbook's *Proof* sheet lets "
        "your own spreadsheet do it again."
    )
with right:
    st.header("4. What one more tonne costs", anchor=False)
    st.markdown(
        f"Oak's rate from Weir is 10, and yet one more tonne for Oak costs "
        f"**{number(example.one_more_for_oak, mark)} EUR**: Weir has nothing left, so it gives up a tonne "
        "at Ash (8 saved), which Lock takes over (9). One more tonne at Weir would save "
        f"**{number(-example.one_more_at_weir, mark)} EUR**. *Reasons* answers such questions for every "
        "figure and every rate of your week, with the chain of moves behind each answer, and says how low a "
        "quote must be before a lane pays."
    )

    st.header("5. Which aim comes first", anchor=False)
    st.markdown(
        "1. What has gone, what you hold and what limits say.\n"
        "2. The most delivered: priority A before B before C.\n"
        "3. What must move this week.\n"
        "4. The least cost.\n\n"
        "One is never traded for another: no saving leaves a customer short who could be served. Charges "
        "for short goods decide *who* goes short, not whether goods are delivered; a customer marked "
        "*May decline* is served only where that is cheaper than its charge."
    )

    st.header("6. Living with the week", anchor=False)
    st.markdown(
        "- **Type a quantity** on *Plan* to hold it. The price of the hold is shown before it is made, "
        "and whom it moves; *Holds* shows what each one costs today.\n"
        "- **Goods that have left** go on *Gone*. No later plan moves or reprices them.\n"
        "- **Issue** the plan on *Hand over*. Later plans stay as near to it as the least cost allows, and "
        "list whom to ring about what changed.\n"
        "- **Undo** works on every page. Every change is on disk before the screen says so, with who, "
        "when and why on *Weeks*."
    )

    st.header("7. What it does not do", anchor=False)
    st.markdown(
        "The plan allocates quantities. It does not check axle or gross weights, drivers' hours, dangerous "
        "goods, temperature, site access or customs. Local codes and licensed practice decide those."
    )
    with st.container(horizontal=True):
        if person().may_change and (state.kept is None or state.kept.may_change):
            st.page_link(PAGES / "figures.py", label="Open your figures")
        st.page_link(PAGES / "plan.py", label="Go to the plan")
