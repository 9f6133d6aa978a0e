"""What changes on a board: positions, kinds of change, and what can stand in for a part."""
