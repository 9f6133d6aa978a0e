"""Catalog files: CSV or spreadsheet in, checked columns in SI out."""

from optimizer.catalog.inspect import Inspection, inspect_file
from optimizer.catalog.parts import Catalogs, LeftOut, Parts, Points, Source
from optimizer.catalog.prices import unit_price
from optimizer.catalog.reader import ReadOptions, read_catalogs

__all__ = [
    "Catalogs",
    "Inspection",
    "LeftOut",
    "Parts",
    "Points",
    "ReadOptions",
    "Source",
    "inspect_file",
    "read_catalogs",
    "unit_price",
]
