"""Why a plan is as it is: what a unit is worth, exactly, and what it would displace."""
