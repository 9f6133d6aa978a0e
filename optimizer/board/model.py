"""The board as a mixed-integer model in PuLP: choices, pieces of the price schedules, named rows.

For channel i, option j, part p, package a of a family, reference r, piece s of a price schedule:

  x_i_j  how many of channel i are built as option j        z_p  whether part p is bought at all
  v_r    whether reference r is on the board                w_p_s, q_p_s  the piece, units beyond its first

A part that a channel uses opens the part (one row for each channel and part: far tighter than one for
each part); packages are counted, not assigned to channels, so that no symmetry arises.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from optimizer.board.pools import Chosen
from optimizer.board.prices import Piece, pieces
from optimizer.board.problem import Board, Channel
from optimizer.board.supplies import most_of, used_references

SCALE = 1000.0
"""What a budget in SI is scaled to in its row, so that the solvers' tolerance is a billionth of it."""

FINE = {"current": 1e9, "area": 1e12}
"""By what SI is multiplied in an objective, so that a solver's gap of 0.99 is 1 nA or 1 um2."""


@dataclass(frozen=True, slots=True)
class Model:
    """The PuLP problem, its variables by index, and the use of each budget as an expression.

    `number` and `cost` are expressions too: how many of each part there are on a board, and what they cost.
    """

    board: Board
    problem: Any
    x: Mapping[tuple[int, int], Any]
    z: Mapping[int, Any]
    v: Mapping[int, Any]
    number: Mapping[int, Any]
    cost: Mapping[int, Any]
    pieces: Mapping[int, list[tuple[Piece, Any, Any]]]
    use: Mapping[str, Any]


def build(board: Board, goal: str = "cost") -> Model:
    """The model of `board` that minimises the use of the budget `goal`, all stated budgets kept."""
    return _Maker(board, goal).model()


class _Maker:
    """Makes the variables and rows of one model, in the order in which they are named."""

    def __init__(self, board: Board, goal: str) -> None:
        from pulp import LpMinimize, LpProblem

        self.board, self.goal = board, goal
        self.problem = LpProblem("board", LpMinimize)
        self.most = _most_parts(board)
        self.x = {
            (i, j): self._choice(f"x_{i}_{j}", channel.count)
            for i, channel in enumerate(board.channels)
            for j in range(len(channel.options))
        }
        self.z = {part: self._choice(f"z_{part}", 1) for part in sorted(self.most)}
        self.v = {r: self._choice(f"v_{r}", 1) for r in used_references(board)}
        self.number: dict[int, Any] = {}
        self.cost: dict[int, Any] = {}
        self.pieces: dict[int, list[tuple[Piece, Any, Any]]] = defaultdict(list)

    def _choice(self, name: str, most: int) -> Any:
        return self.problem.add_variable(name, 0, most, "Binary" if most == 1 else "Integer")

    def _row(self, row: Any, name: str) -> None:
        self.problem.addConstraint(row, name)

    def model(self) -> Model:
        """All rows, and the objective."""
        for part in self.z:
            self._buy(part)
        for i, channel in enumerate(self.board.channels):
            taken = _sum(self.x[i, j] for j in range(len(channel.options)))
            self._row(taken == channel.count, f"build_{i}")
            self._links(i, channel)
        self._balance()
        self._amplifiers()
        use = self._use()
        self._budgets(use)
        self.problem.setObjective(FINE.get(self.goal, 1.0) * use[self.goal])
        return Model(
            self.board, self.problem, self.x, self.z, self.v, self.number, self.cost, self.pieces, use
        )

    def _buy(self, part: int) -> None:
        """The price schedule of `part`: one piece at most, the number bought, and all that it costs."""
        entry, chosen, bought, paid = self.board.parts[part], [], [], []
        for s, piece in enumerate(pieces(entry.breaks, self.board.boards, self.most[part], entry.stock)):
            w = self._choice(f"w_{part}_{s}", 1)
            chosen.append(w)
            bought.append(piece.first * w)
            paid.append(piece.cost * w)
            beyond, q = piece.last - piece.first, None
            if beyond:
                q = self.problem.add_variable(f"q_{part}_{s}", 0, beyond, "Integer")
                self._row(q <= beyond * w, f"piece_{part}_{s}")
                bought.append(q)
                paid.append(piece.slope * q)
            self.pieces[part].append((piece, w, q))
        self._row(_sum(chosen) == self.z[part], f"bought_{part}")
        self.number[part] = _sum(bought)
        opened, placed = self.board.line_item * self.z[part], self.board.placement * self.number[part]
        self.cost[part] = _sum(paid) + opened + placed

    def _links(self, i: int, channel: Channel) -> None:
        """What a channel uses must be on the board."""
        parts, families, references = defaultdict(list), defaultdict(list), defaultdict(list)
        for j, option in enumerate(channel.options):
            for part in set(option.parts):
                parts[part].append(self.x[i, j])
            families[option.family].append(self.x[i, j])
            if option.reference is not None:
                references[option.reference].append(self.x[i, j])
        packages = {f: _sum(self.z[a] for a in self.board.families[f].packages) for f in families}
        self._opens(f"part_{i}", channel.count, parts, self.z)
        self._opens(f"reference_{i}", channel.count, references, self.v)
        self._opens(f"family_{i}", channel.count, families, packages)

    def _opens(self, name: str, count: int, used: Mapping[int, list[Any]], open_: Mapping[int, Any]) -> None:
        for key, users in used.items():
            self._row(_sum(users) <= count * open_[key], f"{name}_{key}")

    def _balance(self) -> None:
        """The number bought of every part that is no op-amp is the number used."""
        used: dict[int, list[Any]] = defaultdict(list)
        for i, channel in enumerate(self.board.channels):
            for j, option in enumerate(channel.options):
                for part in option.parts:
                    used[part].append(self.x[i, j])
        for r, v in self.v.items():
            for part, count in self.board.references[r].parts:
                used[part].append(count * v)
            for part in {part for part, _ in self.board.references[r].parts}:
                self._row(v <= self.z[part], f"reference_part_{r}_{part}")
        for part, users in used.items():
            self._row(self.number[part] == _sum(users), f"count_{part}")

    def _amplifiers(self) -> None:
        """Packages hold the amplifiers that channels and buffers of a family need."""
        need: dict[int, list[Any]] = defaultdict(list)
        for i, channel in enumerate(self.board.channels):
            for j, option in enumerate(channel.options):
                need[option.family].append(option.amplifiers * self.x[i, j])
        for r, v in self.v.items():
            buffer = self.board.references[r].buffer
            if buffer is not None:
                need[buffer].append(v)
                packages = self.board.families[buffer].packages
                self._row(v <= _sum(self.z[a] for a in packages), f"reference_buffer_{r}")
        for family, users in need.items():
            packages = self.board.families[family].packages
            held = _sum(self.board.parts[a].amplifiers * self.number[a] for a in packages)
            self._row(_sum(users) <= held, f"amplifiers_{family}")
            for a in packages:
                self._needed(family, a, held - _sum(users))

    def _needed(self, family: int, package: int, spare: Any) -> None:
        """No package is bought that could be left out: fewer amplifiers are spare than it holds."""
        size = self.board.parts[package].amplifiers
        most = max(self.board.parts[a].amplifiers for a in self.board.families[family].packages)
        self._row(spare <= size - 1 + (most - size) * (1 - self.z[package]), f"needed_{package}")

    def _use(self) -> dict[str, Any]:
        """How much of each budget is used."""
        parts = self.board.parts
        drawn = [self.board.references[r].current * v for r, v in self.v.items()]
        drawn += [parts[p].current * n for p, n in self.number.items() if parts[p].amplifiers]
        for (i, j), x in self.x.items():
            own = self.board.channels[i].options[j].current
            if own:
                drawn.append(own * x)
        return {
            "cost": _sum(self.cost.values()),
            "current": _sum(drawn),
            "area": _sum((parts[p].area or 0.0) * n for p, n in self.number.items()),
            "line_items": _sum(self.z.values()),
            "opamp_parts": _sum(z for p, z in self.z.items() if parts[p].amplifiers),
        }

    def _budgets(self, use: Mapping[str, Any]) -> None:
        for name, limit in self.board.budgets.stated().items():
            scale = SCALE / limit if limit and name in {"current", "area"} else 1.0
            self._row(scale * use[name] <= scale * limit, f"budget_{name}")


def forbid(model: Model, active: Iterable[int], name: str) -> None:
    """Leave out every plan with just the active parts `active`."""
    on = set(active)
    others = [z for p, z in model.z.items() if model.board.is_active(p) and p not in on]
    away = _sum(1 - model.z[p] for p in on if p in model.z) + _sum(others)
    model.problem.addConstraint(away >= 1, name)


def use_references(model: Model) -> None:
    """Put no reference on the board that no channel uses (a cheapest plan never does; others might)."""
    users: dict[int, list[Any]] = defaultdict(list)
    for (i, j), x in model.x.items():
        reference = model.board.channels[i].options[j].reference
        if reference is not None:
            users[reference].append(x)
    for r, taken in users.items():
        model.problem.addConstraint(model.v[r] <= _sum(taken), f"idle_{r}")


def _most_parts(board: Board) -> dict[int, int]:
    """The most pieces of each part that any plan needs on a board."""
    most: dict[int, int] = {}
    for supply, count in most_of(board).items():
        if supply < len(board.parts):
            most[supply] = count
            continue
        for part in board.families[supply - len(board.parts)].packages:
            most[part] = -(-count // board.parts[part].amplifiers)
    return most


def values_of(model: Model, chosen: Chosen, pieces_bought: Mapping[int, int]) -> dict[str, float]:
    """What every variable is in a plan: a start for the solver."""
    found = {x.name: 0.0 for x in model.x.values()}
    for i, options in enumerate(chosen):
        for j in options:
            found[model.x[i, j].name] += 1.0
    shared = {model.board.channels[i].options[j].reference for i, js in enumerate(chosen) for j in js}
    found |= {z.name: float(p in pieces_bought) for p, z in model.z.items()}
    found |= {v.name: float(r in shared) for r, v in model.v.items()}
    for part, runs in model.pieces.items():
        n = pieces_bought.get(part, 0)
        for piece, w, q in runs:
            here = piece.first <= n <= piece.last
            found[w.name] = float(here)
            if q is not None:
                found[q.name] = float(n - piece.first) if here else 0.0
    return found


def _sum(terms: Iterable[Any]) -> Any:
    from pulp import lpSum

    return lpSum(list(terms))
