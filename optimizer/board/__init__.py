"""The whole board: which receivers, packages and passives to buy together, as a mixed-integer plan."""
