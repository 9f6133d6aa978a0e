"""The formulas of the receiver: pure functions on arrays in SI that know no request, catalog or file."""
