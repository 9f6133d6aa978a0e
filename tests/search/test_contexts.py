"""Wirings and references: which can exist, in what order, and how many combinations are declared."""

from __future__ import annotations

from itertools import product
from typing import Any

import numpy as np
import pytest

from optimizer import search
from optimizer.request.types import WIRINGS, Divider
from optimizer.search import contexts, values
from optimizer.search import space as spaces
from tests.search.made import capacitor, catalogs, diode, listed, opamp, request, resistor

DIVIDER = Divider(series="E3", low=10e3, high=22e3)  # 22k:10k, equal, 10k:22k


def built(**changes: Any) -> contexts.Contexts:
    asked = request(**({"space": {"divider": DIVIDER}} | changes))
    made = catalogs()
    return contexts.build(asked, values.divider_levels(asked, made.resistors, made.capacitors))


def listing(x: contexts.Contexts) -> list[tuple[str, float, float]]:
    """(wiring, Vref, Vr) of each context."""
    return [(WIRINGS[w], float(v), float(b)) for w, v, b in zip(x.wiring, x.vref, x.bias, strict=True)]


def third(part: float) -> object:
    return pytest.approx(5.0 * part)


def test_a_single_supply_has_no_bias_between_ground_and_its_lower_rail() -> None:
    shares = (10 / 32, 0.5, 22 / 32)
    assert listing(built()) == [
        ("rising-unbiased", 0.0, 0.0),
        *(("rising-unbiased", third(s), 0.0) for s in shares),
        *(("rising-biased", third(s), third(s)) for s in shares),
        ("falling-unbiased", 0.0, 0.0),
        *(("falling-unbiased", third(s), 0.0) for s in shares),
        ("falling-biased", 0.0, 5.0),
        *(("falling-biased", third(s), third(1.0 - s)) for s in shares),
    ]


def test_split_rails_bias_from_ground_both_ways() -> None:
    found = listing(built(supply={"high": 3.0, "low": -2.0}))
    assert ("rising-biased", 0.0, 2.0) in found
    assert ("falling-biased", 0.0, 3.0) in found
    assert len(found) == 16
    # ground comes before every divider, also before one whose Vref is below it
    assert [v for w, v, _ in found if w == "rising-unbiased"] == pytest.approx([0.0, -0.4375, 0.5, 1.4375])


def test_a_ground_above_both_rails_or_on_one_biases_nothing() -> None:
    below = {"high": 0.0, "low": -5.0}
    assert ("falling-biased", 0.0, 0.0) not in listing(built(supply=below))
    assert ("rising-biased", 0.0, 5.0) in listing(built(supply=below))
    above = listing(built(supply={"high": 9.0, "low": 2.0}))
    assert not [row for row in above if row[0] == "rising-biased" and row[1] == 0.0]
    assert ("falling-biased", 0.0, 9.0) in above


def test_every_bias_is_above_zero_at_both_ends_of_any_tolerance() -> None:
    for low, high in [(0.0, 5.0), (-5.0, 5.0), (-1.0, 12.0)]:
        x = built(supply={"high": high, "low": low, "tolerance": 0.3})
        for end in (0.7, 1.3):
            rising = (x.vref - low) * end
            falling = (high - x.vref) * end
            assert (np.where(x.sign > 0, rising, falling)[x.biased] > 0.0).all()
        assert (x.bias[~x.biased] == 0.0).all()


def test_only_unbiased_dividers_are_buffered() -> None:
    x = built(supply={"high": 5.0, "low": -5.0})
    assert (x.buffered == (x.divided & ~x.biased)).all()
    assert (x.source[~x.divided] == 0.0).all()
    assert (x.current[~x.divided] == 0.0).all()
    np.testing.assert_allclose(x.current[x.divided], 10.0 / (x.top + x.bottom)[x.divided], rtol=1e-15)


def test_a_divider_that_cannot_be_bought_is_declared_and_not_tried() -> None:
    asked = request(space={"divider": DIVIDER})
    made = catalogs(resistors=[resistor(to=10e3)])
    levels = values.divider_levels(asked, made.resistors, made.capacitors)
    x = contexts.build(asked, levels)
    assert not x.divided.any()
    assert contexts.declared(asked, levels) == 4 * (1 + 3)


def test_wirings_asked_for_twice_or_in_another_order_are_the_same() -> None:
    mixed = ("falling-biased", "rising-unbiased", "falling-biased")
    x = built(space={"divider": DIVIDER, "wirings": mixed})
    y = built(space={"divider": DIVIDER, "wirings": ("rising-unbiased", "falling-biased")})
    assert listing(x) == listing(y)


def test_groups_are_runs_of_one_wiring_and_kind_with_rising_vref() -> None:
    x = built(supply={"high": 5.0, "low": -5.0})
    kinds = list(zip(x.wiring.tolist(), x.divided.tolist(), strict=True))
    assert x.group.tolist() == [sorted(set(kinds)).index(kind) for kind in kinds]
    for group in np.unique(x.group):
        assert (np.diff(x.vref[x.group == group]) > 0).all()


@pytest.mark.parametrize("references", [("ground",), ("divider",), ("ground", "divider")])
@pytest.mark.parametrize("none", [True, False])
def test_combinations_are_counted_as_declared(references: tuple[str, ...], none: bool) -> None:
    """By hand: 2 x 3 parts, 2 wirings, ground and 3 levels, 4 + 2 Rf, 4 + 1 Cf and none, 2 low-passes."""
    rows = catalogs(
        [opamp(), opamp(part="YZA-2", status="obsolete")],
        [diode(), diode(part="YZD-2", price=[]), diode(part="YZD-3", responsivity=[(1e-7, 1.0)])],
        [resistor(), resistor(family="YZR-2", **listed(150e3, 330e3, 150e3, 5e6))],
        [capacitor(), capacitor(family="YZC-2", **listed(3e-12))],
    )
    space = {
        "divider": DIVIDER,
        "references": references,
        "wirings": ("rising-biased", "falling-biased", "rising-biased"),
        "no_capacitor": none,
        "low_pass": (None, 1e6, None),
    }
    levels = ("ground" in references) + 3 * ("divider" in references)
    found = spaces.build(request(space=space), rows).combinations
    assert type(found) is int
    assert found == 6 * 2 * levels * (4 + 2) * (4 + 1 + none) * 2


def test_combinations_outgrow_64_bits_unharmed() -> None:
    size = 4000
    made = catalogs(
        [opamp(part=f"YZA-{k}", status="obsolete") for k in range(size)],
        [diode(part=f"YZD-{k}", status="obsolete") for k in range(size)],
        [resistor(family=f"YZR-{k}", series="E192", **{"from": 1.0, "to": 1e9}) for k in range(40)],
        [capacitor(family=f"YZC-{k}", series="E192") for k in range(40)],
    )
    wide = {
        "resistance": (1.0, 1e9),
        "capacitance": (1e-12, 1e-6),
        "low_pass": tuple(float(f) for f in range(1, 301)),
        "divider": Divider(series="E24", low=1e3, high=1e6),
    }
    space = spaces.build(request(space=wide), made)
    assert type(space.combinations) is int
    assert space.combinations > 2**63
    assert space.combinations % (size * size) == 0
    assert space.combinations // (size * size) == (
        contexts.declared(
            space.request, values.divider_levels(space.request, made.resistors, made.capacitors)
        )
        * (40 * (192 * 9 + 1))
        * (40 * (192 * 6 + 1) + 1)
        * 300
    )


def test_an_outcome_counts_them_too() -> None:
    outcome = search.shortlist(request(), catalogs())
    ratios = {bottom / top for top, bottom in product((10, 22, 47), repeat=2)}
    assert outcome.combinations == 4 * (1 + len(ratios)) * 4 * 5
    assert type(outcome.combinations) is int
    assert outcome.pairs == 1
