"""Requests to be read and to be spoilt, and nested tables written as TOML."""

from __future__ import annotations

import json
from collections.abc import Callable
from typing import Any

from optimizer.errors import Problem
from optimizer.request.types import Request

Reads = Callable[[str | bytes], Request]
Fails = Callable[[str | bytes], tuple[Problem, ...]]

MINIMAL = """\
[light]
wavelength = "850 nm"
weakest = "30 nW"
strongest = "3 uW"
[supply]
high = "5 V"
"""

FULL = """\
name = "bench, receive channel"
quantity = 200
currency = "EUR"

[light]
wavelength = "850 nm"
weakest = "30 nW"
strongest = "3 uW"
background = "5 nW"
active_area = { from = "1 mm2", to = "10 mm2" }

[supply]
high = "5 V"
low = "-1 V"
tolerance = "5 %"
guard = "50 mV"
load = "10 kohm"
load_to = "reference"

[ambient]
coldest = "-20 C"
hottest = "60 C"

[targets]
bandwidth = "20 kHz"
snr = "46 dB"
dynamic_range = "80 dB"
phase_margin = "55 deg"
peaking = "1 dB"
offset = "30 mV"
slew = 1.5
supply_current = "3 mA"
cost = 4.50

[space]
wirings = ["rising-biased", "falling-biased"]
references = ["divider"]
divider = { series = "E24", from = "4k7", to = "47 kohm", bypass = "1 uF" }
resistance = { from = "10 kohm", to = "1 Mohm" }
capacitance = { from = "1 pF", to = "1 nF", none = false }
low_pass = ["none", "100 kHz"]
stray = "2 pF"
dark_on_rail = true
noise_from = "1 Hz"
status = ["active", "last-time-buy"]
require = ["MA 100"]
exclude = ["MA 200", "Maker B/MA 300"]
makers = ["Maker A"]
packages = ["flat-8"]

[converter]
bits = 12
low = "0.5 V"
high = "4.5 V"

[catalogs]
opamps = ["a.csv", "b.csv"]
photodiodes = ["c.csv"]

[ranking]
by = "margin"
show = 3
comfort = "40 %"

[tolerance]
method = "corners"
yield = "99 %"
distribution = "normal"
draws = 5000
seed = 0
gbw = "30 %"
voltage_noise = 0.2
input_capacitance = "15 %"
diode_capacitance = "10 %"
responsivity = "8 %"
stray = "50 %"
dark_current = "90 %"
bias_current = "80 %"
open_loop_gain = "1000 ppm"

[resilience]
opamp_sources = 2

[assume.opamps]
output_low = "50 mV"
second_pole = "none"
open_loop_gain = "100 dB"
temp_max = "85 C"

[assume.photodiodes]
rise_time = "2 us"
capacitance = "50 pF"
price = 1.25
"""


def as_toml(tables: dict[str, Any]) -> str:
    """Write nested tables as TOML, sub-tables inline, keys always quoted."""
    lines = [_pair(key, value) for key, value in tables.items() if not isinstance(value, dict)]
    for name, table in tables.items():
        if isinstance(table, dict):
            lines += [f"[{_text(name)}]", *(_pair(key, value) for key, value in table.items())]
    return "\n".join(lines) + "\n"


def _pair(key: str, value: Any) -> str:
    return f"{_text(key)} = {_value(value)}"


def _text(value: str) -> str:
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")


def _value(value: Any) -> str:
    if isinstance(value, dict):
        return "{" + ", ".join(_pair(key, item) for key, item in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ", ".join(map(_value, value)) + "]"
    if isinstance(value, str):
        return _text(value)
    return str(value).lower()  # true, false, nan, inf and numbers alike
