"""The exact search: the declared space, proved bounds, the shortlist."""
