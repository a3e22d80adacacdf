"""What a manager asks of a plan: against the usual way, last week, a variant, something lost or dearer."""
