"""A saved record taken up again, beside its request and catalogs as they are now."""
