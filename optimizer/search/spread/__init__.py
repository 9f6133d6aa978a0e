"""Real parts instead of nominal ones: spreads, their corners, and random draws."""
