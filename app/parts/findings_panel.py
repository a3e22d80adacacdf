"""Findings as a list: the gravest first, where each is, what it says and what to do."""

from collections.abc import Sequence

import pandas as pd
import streamlit as st

from app.parts.words import counted, plain
from engine.findings import Finding, Severity, by_gravity
from engine.intake.answers import Answers

SHOWN = 12
WORDS = {Severity.STOPS: "Stops", Severity.CHECK: "Check", Severity.NOTE: "Note"}
SIGNS = {Severity.STOPS: ":red[■]", Severity.CHECK: ":orange[▲]", Severity.NOTE: ":gray[●]"}
PLURALS = {Severity.STOPS: "stop the plan", Severity.CHECK: "to check", Severity.NOTE: "to note"}


def findings_panel(findings: Sequence[Finding], key: str, known: Answers | None = None) -> None:
    """The findings, or a word that there are none; those that were accepted are only counted."""
    st.header("Findings", anchor=False)
    accepted: Sequence[Finding] = ()
    if known is not None:
        findings, accepted = known.parted(list(findings))
    if accepted:
        st.caption(f"{counted(len(accepted), 'finding')} accepted earlier, in the notes of the plan.")
    if not findings:
        if not accepted:
            st.caption("Nothing to remark on these figures.")
        return
    ordered = by_gravity(findings)
    counts = [(severity, sum(f.severity is severity for f in ordered)) for severity in Severity]
    st.caption(", ".join(f"{count} {PLURALS[severity]}" for severity, count in counts if count))
    for finding in ordered[:SHOWN]:
        place = f" · {plain(finding.place)}" if finding.place else ""
        mend = f" *{plain(finding.mend)}*" if finding.mend else ""
        sign = f"{SIGNS[finding.severity]} **{WORDS[finding.severity]}**"
        st.markdown(f"{sign}{place}  \n{plain(finding.message)}{mend}")
    if len(ordered) > SHOWN:
        with st.expander(f"All {len(ordered)} findings"):
            st.dataframe(
                pd.DataFrame(
                    {
                        "Severity": [WORDS[f.severity] for f in ordered],
                        "Where": [f.place for f in ordered],
                        "What": [f.message for f in ordered],
                        "What to do": [f.mend for f in ordered],
                    }
                ),
                hide_index=True,
                key=f"findings-{key}",
            )
