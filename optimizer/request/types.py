"""The request as frozen values in SI (temperatures in C, angles in deg, gains in dB)."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

WIRINGS = ("rising-unbiased", "rising-biased", "falling-unbiased", "falling-biased")
REFERENCES = ("ground", "divider")
RANKINGS = ("cost", "margin", "snr", "supply_current")
ROLES = ("opamps", "photodiodes", "resistors", "capacitors")
METHODS = ("nominal", "corners")
DISTRIBUTIONS = ("uniform", "normal")
SPREADS = (
    "gbw",
    "voltage_noise",
    "input_capacitance",
    "diode_capacitance",
    "responsivity",
    "stray",
    "dark_current",
    "bias_current",
    "open_loop_gain",
)


@dataclass(frozen=True, slots=True)
class Light:
    """Signal and background light, in W (`kind` = "power") or W/m2 (`kind` = "irradiance")."""

    wavelength: float
    kind: str
    weakest: float
    strongest: float
    background: float = 0.0
    area_from: float | None = None
    area_to: float | None = None


@dataclass(frozen=True, slots=True)
class Supply:
    """Rails in V; `tolerance` a fraction; `load` in ohm to `load_to` volts (None: to the reference)."""

    high: float
    low: float = 0.0
    tolerance: float = 0.0
    guard: float = 0.0
    load: float | None = None
    load_to: float | None = 0.0


@dataclass(frozen=True, slots=True)
class Ambient:
    """Ambient temperatures in C; `stated` is False where the request has no [ambient]."""

    coldest: float = 25.0
    hottest: float = 25.0
    stated: bool = False

    @property
    def distance(self) -> float:
        """How far the ambient goes from 25 C, at the end that goes farther."""
        return max(abs(self.coldest - 25.0), abs(self.hottest - 25.0))


@dataclass(frozen=True, slots=True)
class Targets:
    """The limits; None where the request states none. dB, deg and SI as the figures are."""

    bandwidth: float | None = None
    snr: float | None = None
    dynamic_range: float | None = None
    phase_margin: float | None = None
    peaking: float | None = None
    slew: float | None = None
    offset: float | None = None
    supply_current: float | None = None
    cost: float | None = None


@dataclass(frozen=True, slots=True)
class Divider:
    """Where divider resistors come from (series, ohms) and the bypass capacitor in F."""

    series: str = "E12"
    low: float = 10e3
    high: float = 100e3
    bypass: float = 100e-9


@dataclass(frozen=True, slots=True)
class Space:
    """What may be chosen."""

    wirings: tuple[str, ...] = WIRINGS
    references: tuple[str, ...] = REFERENCES
    divider: Divider = Divider()
    resistance: tuple[float, float] = (1e3, 100e6)
    capacitance: tuple[float, float] = (0.5e-12, 10e-9)
    no_capacitor: bool = True
    low_pass: tuple[float | None, ...] = (None,)
    stray: float = 1e-12
    dark_on_rail: bool = False
    noise_from: float = 0.1
    status: tuple[str, ...] = ("active",)
    require: tuple[str, ...] = ()
    exclude: tuple[str, ...] = ()
    makers: tuple[str, ...] = ()
    packages: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Converter:
    """What reads the output; `follows_supply`: the range is the rails' own, `high` = nominal V+."""

    bits: int
    low: float
    high: float
    follows_supply: bool = False


@dataclass(frozen=True, slots=True)
class Ranking:
    """How candidates are ordered."""

    by: str = "cost"
    show: int = 10
    comfort: float = 0.5


@dataclass(frozen=True, slots=True)
class Tolerance:
    """How real parts differ from their nominal values; `stated` is False without [tolerance].

    `method` says which values are graded: the nominal ones, or every corner of the spreads. Each
    spread is the greatest relative distance from nominal, at least 0 and below 1; those of resistors
    and capacitors stand in their catalogs. `yield_` (the key `yield`) is the least fraction of the
    random draws that should meet the request, None where the request states none.
    """

    method: str = "nominal"
    yield_: float | None = None
    distribution: str = "uniform"
    draws: int = 10_000
    seed: int = 1
    gbw: float = 0.0
    voltage_noise: float = 0.0
    input_capacitance: float = 0.0
    diode_capacitance: float = 0.0
    responsivity: float = 0.0
    stray: float = 0.0
    dark_current: float = 0.0
    bias_current: float = 0.0
    open_loop_gain: float = 0.0
    stated: bool = False

    @property
    def spreads(self) -> dict[str, float]:
        """The relative spreads by name, in the order of SPREADS."""
        return {name: getattr(self, name) for name in SPREADS}


@dataclass(frozen=True, slots=True)
class Resilience:
    """From how many makers the op-amp of a candidate must be had, the chosen one counted."""

    opamp_sources: int = 1


@dataclass(frozen=True, slots=True)
class Request:
    """One request, whole: every key with the value in force.

    `catalogs` holds the paths as written in the request, by role; they are relative to `path`'s
    folder. `assume` maps (role, column) to the SI value that fills blanks of that column.
    `currency` is "catalog currency" where the request states none.
    """

    name: str
    light: Light
    supply: Supply
    catalogs: Mapping[str, tuple[str, ...]]
    path: Path
    quantity: int = 1
    currency: str = "catalog currency"
    ambient: Ambient = Ambient()
    targets: Targets = Targets()
    space: Space = Space()
    converter: Converter | None = None
    ranking: Ranking = Ranking()
    tolerance: Tolerance = Tolerance()
    resilience: Resilience = Resilience()
    assume: Mapping[tuple[str, str], float] = field(default_factory=dict)
