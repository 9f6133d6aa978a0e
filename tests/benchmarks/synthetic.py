"""Seeded catalogs and requests for benchmarks; every part, maker and number is invented.

The correlations are those of the shipped catalogs: within a technology a larger quiescent current
buys bandwidth and lower voltage noise; bias current, flicker corner and input range follow the
technology; a photodiode's capacitance, dark current, shunt conductance, transit time and price grow
with its area. (Common practice, no source: the constants are typed from memory of real parts.)
"""

from __future__ import annotations

import csv
from collections.abc import Sequence
from pathlib import Path

import numpy as np

from tests.benchmarks.synthetic_data import (
    CAPACITORS,
    MATERIALS,
    REQUESTS,
    RESISTORS,
    TECHNOLOGIES,
    Material,
    Technology,
)

Row = dict[str, str]
CHARGE = 1.602176634e-19  # C; exact, SI 2019
EV_NM = 1239.84  # nm eV, hc/q
UNKNOWN = ("", "-", "N/A", "n/a")
STATUS = ("active", "not-for-new-designs", "last-time-buy", "obsolete")
BREAKS = ((1, 10, 100, 1000), (1, 100, 1000), (1, 10, 100, 500, 1000), (1, 25, 100, 3000), (1,))
PREFIXES = ((1e12, "T"), (1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"),
            (1e-9, "n"), (1e-12, "p"), (1e-15, "f"))  # fmt: skip


PACKAGES = {
    1: (("SOT23-5", "single-5a", 8.4), ("SC70-5", "single-5c", 4.4), ("SOIC-8", "single-8", 29.4)),
    2: (("SOIC-8", "dual-8", 29.4), ("MSOP-8", "dual-8", 14.7), ("VSSOP-8", "dual-8", 6.4)),
    4: (("TSSOP-14", "quad-14", 32.0), ("SOIC-14", "quad-14", 52.0), ("QFN-16", "quad-16", 9.0)),
}
MEMBERS = ((1,), (1,), (1, 2), (1, 2), (1, 2, 4), (2, 4), (2,))


def write_catalogs(folder: Path, *, opamps: int, photodiodes: int, seed: int) -> dict[str, Path]:
    """Write the four catalogs and a source.toml into `folder`; the same arguments, the same bytes."""
    rng = np.random.default_rng(seed)
    folder.mkdir(parents=True, exist_ok=True)
    makers = _makers(int(np.clip(opamps // 40, 10, 40)))
    _write(folder / "opamps.csv", _opamps(rng, makers, opamps))
    _write(folder / "photodiodes.csv", _photodiodes(rng, makers, photodiodes))
    (folder / "resistors.csv").write_text(RESISTORS, encoding="utf-8")
    (folder / "capacitors.csv").write_text(CAPACITORS, encoding="utf-8")
    (folder / "source.toml").write_text('currency = "EUR"\n', encoding="utf-8")
    roles = ("opamps", "photodiodes", "resistors", "capacitors")
    return {role: folder / f"{role}.csv" for role in roles}


def write_request(folder: Path, kind: str) -> Path:
    """Write `<kind>.toml`, a request on the catalogs beside it; the kinds are the keys of REQUESTS."""
    path = folder / f"{kind}.toml"
    files = "".join(
        f'{role} = ["{role}.csv"]\n' for role in ("opamps", "photodiodes", "resistors", "capacitors")
    )
    path.write_text(f'name = "{kind}"\n{REQUESTS[kind]}\n[catalogs]\n{files}', encoding="utf-8")
    return path


def _makers(count: int) -> list[tuple[str, str]]:
    first = ("Quvam", "Zhel", "Brax", "Vorn", "Ildreth", "Oxtel", "Pryth", "Kwend")
    last = ("mor", "issel", "undra", "olvet", "ethik")
    names = [f"{start}{end} Devices" for end in last for start in first]
    return [(name, f"ZQ{chr(65 + k % 8)}{chr(75 + k // 8)}") for k, name in enumerate(names[:count])]


def _write(path: Path, rows: Sequence[Row]) -> None:
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, rows[0].keys(), lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)


def _text(value: float, unit: str, digits: int = 2) -> str:
    """Engineering text rounded as a datasheet rounds, such as '4.7 pF'."""
    size = abs(float(f"{value:.{digits}g}"))
    scale, prefix = next(((s, p) for s, p in PREFIXES if size >= s), (1e-15, "f"))
    return "0 " + unit if size == 0 else f"{float(f'{value / scale:.{digits}g}'):g} {prefix}{unit}"


def _log(rng: np.random.Generator, ends: tuple[float, float]) -> float:
    return float(np.exp(rng.uniform(np.log(ends[0]), np.log(ends[1]))))


def _spread(rng: np.random.Generator, sigma: float) -> float:
    return float(np.exp(rng.normal(0.0, sigma)))


def _blank(rng: np.random.Generator, text: str, chance: float) -> str:
    return UNKNOWN[rng.integers(len(UNKNOWN))] if rng.random() < chance else text


def _price(rng: np.random.Generator, single: float) -> str:
    steps = BREAKS[rng.integers(len(BREAKS))]
    return "; ".join(f"{count}:{single * (0.97 - 0.145 * np.log10(count)) + 0.005:.3f}" for count in steps)


def _trade(rng: np.random.Generator, price: float) -> Row:
    status = STATUS[rng.choice(4, p=(0.88, 0.07, 0.03, 0.02))]
    stock = f"{_log(rng, (50, 50_000 / max(price, 1))):.0f}"
    return {
        "status": status,
        "stock": "0" if status == "obsolete" else _blank(rng, stock, 0.05),
        "lead_weeks": _blank(rng, f"{rng.integers(4, 40)}", 0.08),
        "price": _blank(rng, _price(rng, price), 0.01),
    }


def _opamps(rng: np.random.Generator, makers: Sequence[tuple[str, str]], count: int) -> list[Row]:
    rows: list[Row] = []
    shares = np.array([technology.share for technology in TECHNOLOGIES])
    for serial in range(count):
        technology = TECHNOLOGIES[rng.choice(len(shares), p=shares)]
        shared, price = _opamp_family(rng, technology)
        maker = makers[rng.integers(len(makers))]
        for channels in MEMBERS[rng.integers(len(MEMBERS))]:
            if len(rows) == count:
                return rows
            rows.append(_opamp(rng, (*maker, serial), channels, price) | shared)
    return rows


def _opamp(rng: np.random.Generator, name: tuple[str, str, int], channels: int, price: float) -> Row:
    maker, prefix, serial = name
    package, pinout, area = PACKAGES[channels][rng.integers(3)]
    identity = {
        "part": f"{prefix}{serial:04d}-{channels}", "maker": maker, "family": f"{prefix}{serial:04d}",
        "package": package, "pinout": pinout, "board_area": f"{area:g} mm2", "channels": f"{channels}",
    }  # fmt: skip
    return identity | _trade(rng, price * channels**0.65)


def _opamp_family(rng: np.random.Generator, kind: Technology) -> tuple[Row, float]:
    current = _log(rng, kind.current)
    fast = kind.common[1] <= 3
    min_gain = int(rng.choice((5, 7, 10))) if fast and rng.random() < (0.3 if fast else 0.05) else 1
    follower = kind.hertz_per_amp * current * _spread(rng, 0.3)
    gbw = min(follower * min_gain, 1e10)
    pole = (
        _text(follower * rng.uniform(1.2, 2.4), "Hz")
        if fast or rng.random() < 0.4
        else _blank(rng, "none", 0.6)
    )
    price = kind.price * (0.6 + 0.5 * (gbw / 1e7) ** 0.25) * _spread(rng, 0.25)
    speed = {
        "supply_min": f"{kind.supply[0]:g} V", "supply_max": f"{kind.supply[1]:g} V",
        "quiescent_current": _text(current, "A"), "gbw": _text(gbw, "Hz"),
        "open_loop_gain": _blank(rng, f"{rng.integers(*kind.gain)} dB", 0.1), "second_pole": pole,
        "min_gain": f"{min_gain}",
        "slew_rate": _blank(rng, f"{kind.slew_per_hertz * follower * _spread(rng, 0.4):.2g} V/us", 0.04),
    }  # fmt: skip
    return speed | _opamp_noise(rng, kind, current) | _opamp_levels(rng, kind), price


def _opamp_noise(rng: np.random.Generator, kind: Technology, current: float) -> Row:
    bipolar = kind.doubling == "none"
    bias = _log(rng, kind.bias) * (current if bipolar else 1.0)
    noise = kind.noise_at_1ma * (1e-3 / current) ** 0.5 * _spread(rng, 0.15)
    corner = _text(_log(rng, kind.corner), "Hz") if kind.corner[1] else "none"
    shot = (2 * CHARGE * bias) ** 0.5 * rng.uniform(1.0, 1.5)
    return {
        "voltage_noise": f"{noise * 1e9:.2g} nV/rtHz",
        "noise_corner": _blank(rng, corner, 0.03),
        "current_noise": _blank(rng, _text(shot, "A/rtHz"), 0.1 if bipolar else 0.6),
        "bias_current": _text(bias, "A"),
        "bias_doubling": _blank(rng, kind.doubling, 0.05),
    }


def _opamp_levels(rng: np.random.Generator, kind: Technology) -> Row:
    offset = _log(rng, kind.offset)
    common = rng.uniform(*kind.common)
    hottest = int(rng.choice((70, 85, 105, 125, 125)))
    return {
        "offset_voltage": _text(offset, "V"),
        "offset_drift": _blank(rng, f"{offset * 2e3 * _spread(rng, 0.3):.2g} uV/C", 0.05),
        "input_low": _text(float(rng.choice(kind.input_low)), "V"),
        "input_high": _text(float(rng.choice(kind.input_high)), "V"),
        "output_low": _blank(rng, _text(rng.uniform(*kind.output), "V"), 0.02),
        "output_high": _text(rng.uniform(*kind.output), "V"),
        "input_capacitance_common": _blank(rng, f"{common:.2g} pF", 0.02),
        "input_capacitance_differential": _blank(rng, f"{common * rng.uniform(0.3, 0.8):.2g} pF", 0.03),
        "output_current": _blank(rng, f"{rng.integers(6, 100)} mA", 0.07),
        "temp_min": ("-40 C", "-40 C", "-25 C", "0 C")[rng.integers(4)],
        "temp_max": f"{hottest} C",
    }


def _photodiodes(rng: np.random.Generator, makers: Sequence[tuple[str, str]], count: int) -> list[Row]:
    shares = np.array([material.share for material in MATERIALS])
    kinds = rng.choice(len(shares), size=count, p=shares)
    rows = []
    for serial, kind in enumerate(kinds):
        maker, prefix = makers[rng.integers(len(makers))]
        rows.append(_photodiode(rng, MATERIALS[kind], f"{prefix}P{serial:04d}", maker))
    return rows


def _photodiode(rng: np.random.Generator, kind: Material, part: str, maker: str) -> Row:
    area = float(f"{_log(rng, kind.area):.2g}")
    price = (kind.price[0] + kind.price[1] * area**0.9) * _spread(rng, 0.2)
    quality = rng.uniform(0.9, 1.0)
    reverse = int(rng.choice(kind.reverse))
    dark = kind.dark * area * _spread(rng, 0.4)
    return {
        "part": part,
        "maker": maker,
        "package": str(rng.choice(("TO-46", "TO-18", "TO-5", "SMD 3.2x1.6", "SMD 5.4x4.3", "ceramic 10x9"))),
        "pinout": "2-lead",
        "board_area": f"{area * 1.6 + 4:.2g} mm2",
        **_trade(rng, price),
        "responsivity": "; ".join(
            f"{nm} nm:{q * quality * nm / EV_NM:.3f}" for nm, q in kind.efficiency.items()
        ),
        "capacitance": _capacitance(rng, kind, area, reverse),
        "dark_current": _blank(rng, _text(dark, "A"), 0.04),
        "dark_doubling": ("10 C", "8 C", "9 C", "")[rng.integers(4)],
        "shunt_resistance": _blank(rng, _text(kind.shunt / area * _spread(rng, 0.3), "ohm"), 0.04),
        "reverse_max": _blank(rng, f"{reverse} V", 0.02),
        "rise_time": _blank(rng, _text(kind.rise * area**0.6 * _spread(rng, 0.3), "s"), 0.06),
        "active_area": _blank(rng, f"{area:g} mm2", 0.03),
        "temp_min": ("-20 C", "-40 C")[rng.integers(2)],
        "temp_max": ("70 C", "85 C", "100 C")[rng.integers(3)],
    }


def _capacitance(rng: np.random.Generator, kind: Material, area: float, reverse: int) -> str:
    at_zero = (kind.capacitance * area + kind.edge) * _spread(rng, 0.1)
    if rng.random() < 0.2:
        return _text(at_zero, "F")
    biases = [bias for bias in (0, 1, 3, 5, 10, 20) if bias <= reverse]
    values = [at_zero * max((1 + bias / 0.6) ** -0.5, kind.floor) for bias in biases]
    return "; ".join(f"{bias} V:{_text(value, 'F', 3)}" for bias, value in zip(biases, values, strict=True))
