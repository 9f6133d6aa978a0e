"""The whole board: from channels with their requests to plans that buy parts for all of them together."""
