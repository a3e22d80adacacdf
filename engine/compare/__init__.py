"""What a manager asks of a plan: what if something is lost, dearer or more, and what less emission costs."""
