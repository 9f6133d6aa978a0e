"""Preferred numbers of IEC 60063, from the standard's own lists.

The lists are typed, not computed: rounding the geometric formula gives 8 other members in E24 and one
in E192. Source: IEC 60063 (as printed in public copies that agree in every member; see the
published tests).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from functools import lru_cache
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

_E24 = (10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91)
# fmt: off
_E192 = (
    100, 101, 102, 104, 105, 106, 107, 109, 110, 111, 113, 114, 115, 117, 118, 120,
    121, 123, 124, 126, 127, 129, 130, 132, 133, 135, 137, 138, 140, 142, 143, 145,
    147, 149, 150, 152, 154, 156, 158, 160, 162, 164, 165, 167, 169, 172, 174, 176,
    178, 180, 182, 184, 187, 189, 191, 193, 196, 198, 200, 203, 205, 208, 210, 213,
    215, 218, 221, 223, 226, 229, 232, 234, 237, 240, 243, 246, 249, 252, 255, 258,
    261, 264, 267, 271, 274, 277, 280, 284, 287, 291, 294, 298, 301, 305, 309, 312,
    316, 320, 324, 328, 332, 336, 340, 344, 348, 352, 357, 361, 365, 370, 374, 379,
    383, 388, 392, 397, 402, 407, 412, 417, 422, 427, 432, 437, 442, 448, 453, 459,
    464, 470, 475, 481, 487, 493, 499, 505, 511, 517, 523, 530, 536, 542, 549, 556,
    562, 569, 576, 583, 590, 597, 604, 612, 619, 626, 634, 642, 649, 657, 665, 673,
    681, 690, 698, 706, 715, 723, 732, 741, 750, 759, 768, 777, 787, 796, 806, 816,
    825, 835, 845, 856, 866, 876, 887, 898, 909, 920, 931, 942, 953, 965, 976, 988,
)
# fmt: on

# Name -> members of one decade as whole numbers: 10 to 91 up to E24, 100 to 988 from E48 on.
# The standard makes each coarser series by leaving members out of the finer one.
SERIES: Mapping[str, tuple[int, ...]] = MappingProxyType(
    {
        "E3": _E24[::8],
        "E6": _E24[::4],
        "E12": _E24[::2],
        "E24": _E24,
        "E48": _E192[::4],
        "E96": _E192[::2],
        "E192": _E192,
    }
)


@lru_cache(maxsize=512)
def values(name: str, low: float, high: float) -> NDArray[np.float64]:
    """Every member of a series from `low` to `high`, both included.

    Args:
        name: a key of `SERIES`.
        low: lower end, above 0, finite [any unit].
        high: upper end, finite [the same unit].

    Returns:
        Rising values [the same unit], shape (n,), read-only; each the float nearest to its decimal
        writing, so that a value read from text compares equal. Empty where low > high.

    Raises:
        KeyError: no such series.
        ValueError: low not above 0, or an end not finite.

    >>> values("E6", 1e3, 4.7e3).tolist()
    [1000.0, 1500.0, 2200.0, 3300.0, 4700.0]
    """
    members = SERIES[name]
    if not 0 < low < math.inf or not math.isfinite(high):
        raise ValueError(f"a series needs a range of finite positive values, not {low} to {high}")
    decades = range(math.floor(math.log10(low)) - 3, math.floor(math.log10(max(low, high))) + 1)
    every = (float(f"{member}e{decade}") for decade in decades for member in members)
    found = np.array([value for value in every if low <= value <= high], dtype=np.float64)
    found.flags.writeable = False
    return found
