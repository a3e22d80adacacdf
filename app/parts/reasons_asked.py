"""Answers that were worked out for the plan in hand, kept until the plan is another one."""

from collections.abc import Callable
from typing import Any, TypeVar

import streamlit as st

from engine.planning.plan import Plan

KEY = "reasons-asked"

Answer = TypeVar("Answer")


def asked(plan: Plan, question: tuple[object, ...], work: Callable[[], Answer]) -> Answer:
    """The answer to a question about this plan; worked out the first time it is asked."""
    held: tuple[Plan, dict[Any, Any]] | None = st.session_state.get(KEY)
    if held is None or held[0] is not plan:
        held = (plan, {})
        st.session_state[KEY] = held
    answers = held[1]
    if question not in answers:
        answers[question] = work()
    found: Answer = answers[question]
    return found
