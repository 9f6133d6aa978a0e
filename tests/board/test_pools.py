"""Options that go because another serves as well, and those that must stay."""

from __future__ import annotations

from optimizer.board.pools import undominated
from optimizer.board.problem import Board, BoardPart, Channel, Family, Option, SharedReference

DIODE, R1, R2, SINGLE = range(4)
BARE, BUFFERED = range(2)


def kept(*options: Option) -> tuple[int, ...]:
    """The places of the options that stay."""
    price = ((1.0, 1.0),)
    parts = (
        BoardPart("D", price, active=True),
        BoardPart("R1", price),
        BoardPart("R2", price),
        BoardPart("O", price, amplifiers=1),
    )
    board = Board(
        boards=10,
        parts=parts,
        families=(Family("O", (SINGLE,)),),
        references=(SharedReference("bare", ((R2, 2),)), SharedReference("buffered", ((R2, 2),), buffer=0)),
        channels=(Channel("c", 1, options),),
    )
    return undominated(board, options)


def test_fewer_passives_serve_as_well() -> None:
    assert kept(Option((DIODE, R1, R2), 0), Option((DIODE, R1), 0)) == (1,)
    assert kept(Option((DIODE, R1, R1), 0), Option((DIODE, R1), 0)) == (1,)


def test_other_passives_do_not() -> None:
    assert kept(Option((DIODE, R1), 0), Option((DIODE, R2), 0)) == (0, 1)


def test_of_equal_ones_the_first_stays_and_of_currents_the_least() -> None:
    assert kept(Option((DIODE, R1), 0), Option((R1, DIODE), 0)) == (0,)
    assert kept(Option((DIODE, R1), 0, current=2e-3), Option((DIODE, R1), 0, current=1e-3)) == (1,)
    assert kept(Option((DIODE, R1, R2), 0, current=1e-3), Option((DIODE, R1), 0, current=2e-3)) == (0, 1)


def test_an_amplifier_more_is_no_rival_however_few_the_passives() -> None:
    assert kept(Option((DIODE, R1, R2), 0), Option((DIODE, R1), 0, amplifiers=2)) == (0, 1)
    assert kept(Option((DIODE, R1, R2), 0, amplifiers=2), Option((DIODE, R1), 0)) == (0, 1)


def test_a_bare_reference_is_only_passives_but_a_buffer_is_an_op_amp() -> None:
    plain = Option((DIODE, R1), 0)
    assert kept(Option((DIODE, R1), 0, reference=BARE), plain) == (1,)
    assert kept(Option((DIODE, R1), 0, reference=BUFFERED), plain) == (0, 1)
