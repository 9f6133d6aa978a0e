"""Engineering quantities: SI prefixes, units, IEC 60062 letter codes, prices; read and shown."""

from optimizer.quantities.kinds import KINDS
from optimizer.quantities.read import read_price, read_quantity
from optimizer.quantities.show import show
from optimizer.quantities.units import Kind, QuantityError

__all__ = ["KINDS", "Kind", "QuantityError", "read_price", "read_quantity", "show"]
