"""What the synthetic benchmark catalogs are drawn from: technologies, materials, passives, requests.

All constants are typed from memory of what such parts are like (common practice, no source).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Technology:
    """What op-amps of one input technology and speed class have in common."""

    share: float
    current: tuple[float, float]  # A an amplifier, range
    hertz_per_amp: float
    noise_at_1ma: float  # V/rtHz
    corner: tuple[float, float]  # Hz, (0, 0) = none
    bias: tuple[float, float]  # A; bipolar: A of bias per A of supply
    doubling: str
    supply: tuple[float, float]
    input_low: tuple[float, ...]
    input_high: tuple[float, ...]
    output: tuple[float, float]  # V from a rail, range
    common: tuple[float, float]  # pF
    offset: tuple[float, float]  # V
    gain: tuple[int, int]  # dB
    slew_per_hertz: float  # (V/us)/Hz
    price: float


RAIL, GROUND = (-0.1, -0.2), (-0.3, -0.1, 0.0)
TECHNOLOGIES = (
    Technology(0.22, (3e-6, 4e-3), 1.4e10, 7e-9, (300, 4e3), (2e-13, 5e-12), "10 C", (1.8, 5.5), RAIL, RAIL,
               (0.008, 0.06), (2.5, 8), (8e-5, 3e-3), (100, 125), 6e-7, 0.6),  # general CMOS
    Technology(0.10, (3e-3, 2e-2), 6e10, 10e-9, (2e4, 1.5e5), (1e-12, 5e-12), "10 C", (3.0, 5.5), GROUND,
               (1.0, 1.3, 1.5), (0.06, 0.4), (0.8, 2.5), (9e-4, 4e-3), (80, 98), 8e-7, 1.8),  # fast CMOS
    Technology(0.10, (8e-5, 2.5e-3), 1e10, 9e-9, (80, 400), (1e-12, 6e-12), "10 C", (4.5, 36), GROUND,
               (1.5, 1.8, 2.0), (0.08, 0.2), (3, 7), (8e-5, 1.5e-3), (112, 134), 9e-7, 1.1),  # 36 V CMOS
    Technology(0.05, (8e-6, 1.5e-3), 8e9, 9.5e-9, (0, 0), (6e-11, 3e-10), "10 C", (1.8, 5.5), RAIL, RAIL,
               (0.005, 0.03), (3, 7), (3e-6, 1.5e-5), (126, 140), 5e-7, 1.4),  # zero-drift
    Technology(0.14, (7e-5, 6e-3), 4e9, 12e-9, (25, 120), (3e-13, 6e-11), "10 C", (7, 36), (-0.1, 2.0, 3.0),
               (0.5, 1.0, 3.0), (0.1, 1.6), (3, 9), (1.5e-4, 3e-3), (104, 124), 3e-6, 1.5),  # JFET
    Technology(0.08, (5e-3, 2e-2), 2.4e10, 20e-9, (1e3, 3e3), (2e-12, 6e-12), "10 C", (7, 12.6),
               (0.5, 0.7, 1.0), (2.2, 2.6, 3.0), (1.0, 1.3), (1.8, 3), (4e-4, 1e-3), (86, 100), 1e-6,
               3.4),  # fast FET
    Technology(0.12, (1e-5, 8e-3), 3e9, 5e-9, (3, 60), (1e-5, 1e-4), "none", (3, 36), (-0.1, 0.0, 1.5),
               (1.2, 1.5), (0.02, 1.4), (3, 11), (4e-5, 3e-3), (100, 132), 3e-7, 1.0),  # bipolar
    Technology(0.10, (1.5e-3, 2e-2), 4.5e10, 6.5e-9, (300, 3e3), (3e-4, 1e-3), "none", (2.7, 12.6),
               (-0.2, 0.0, 1.2), (0.9, 1.2), (0.06, 1.1), (1.2, 2), (5e-4, 1e-3), (88, 102), 6e-7,
               1.7),  # fast bipolar
    Technology(0.06, (1e-4, 2e-3), 9e9, 6e-9, (8, 30), (8e-5, 2e-4), "none", (2.5, 12.6), RAIL, RAIL,
               (0.03, 0.1), (2.5, 4), (3e-4, 1e-3), (104, 116), 4e-7, 0.9),  # rail-to-rail bipolar
    Technology(0.03, (2e-4, 1.5e-3), 5e9, 9.5e-9, (0, 0), (1e-10, 3e-10), "10 C", (4.5, 36), GROUND,
               (1.5, 2.0), (0.08, 0.15), (4, 7), (8e-6, 2e-5), (130, 140), 6e-7, 2.4),  # 36 V zero-drift
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Material:
    """What photodiodes of one kind have in common; per mm2 where an area divides out."""

    share: float
    efficiency: Mapping[int, float]  # wavelength in nm -> external quantum efficiency
    capacitance: float  # F/mm2 at 0 V
    edge: float  # F
    floor: float  # of the 0 V capacitance, when fully depleted
    dark: float  # A/mm2
    shunt: float  # ohm mm2
    reverse: tuple[int, ...]
    rise: float  # s at 1 mm2
    area: tuple[float, float]  # mm2
    price: tuple[float, float]  # base, and for 1 mm2


SILICON = {400: 0.5, 500: 0.72, 600: 0.8, 700: 0.83, 860: 0.84, 950: 0.74, 1000: 0.5, 1100: 0.05}
FILTERED = {760: 0.04, 800: 0.4, 830: 0.72, 880: 0.81, 950: 0.76, 1050: 0.2}
BLUE = {350: 0.48, 430: 0.8, 550: 0.87, 700: 0.85, 860: 0.76, 950: 0.58, 1050: 0.14}
UV = {190: 0.62, 254: 0.55, 310: 0.5, 400: 0.6, 600: 0.76, 860: 0.73, 960: 0.62, 1050: 0.17}
UV_ONLY = {200: 0.48, 254: 0.5, 310: 0.5, 400: 0.62, 500: 0.67, 600: 0.55, 660: 0.36, 700: 0.22}
CARBIDE = {210: 0.12, 254: 0.55, 280: 0.6, 300: 0.42, 330: 0.16, 360: 0.03}
NITRIDE = {240: 0.35, 280: 0.55, 310: 0.62, 340: 0.66, 360: 0.52, 370: 0.15}
INGAAS = {900: 0.2, 1000: 0.68, 1200: 0.82, 1310: 0.85, 1550: 0.84, 1650: 0.7, 1700: 0.26}
INGAAS_WIDE = {800: 0.28, 905: 0.48, 1000: 0.72, 1200: 0.82, 1310: 0.85, 1550: 0.83, 1700: 0.24}
MATERIALS = (
    Material(0.18, SILICON, 38e-12, 3e-12, 0.1, 4e-11, 6e9, (10, 20, 30), 6e-8, (0.5, 100), (1.2, 0.34)),
    Material(0.24, SILICON, 9.5e-12, 1e-12, 0.2, 1.2e-10, 2.5e9, (20, 60), 2.5e-9, (0.05, 30), (0.4, 0.08)),
    Material(0.12, FILTERED, 9.5e-12, 1e-12, 0.2, 1.5e-10, 2e9, (30, 60), 5e-9, (0.2, 15), (0.36, 0.05)),
    Material(0.12, BLUE, 5.5e-11, 3e-12, 0.14, 2.5e-11, 8e9, (10, 20), 9e-8, (0.5, 100), (1.6, 0.42)),
    Material(0.1, UV, 7.5e-11, 4e-12, 0.22, 1.2e-11, 1.5e10, (5, 10), 1.5e-7, (0.2, 100), (14, 1.35)),
    Material(0.04, UV_ONLY, 8.5e-11, 4e-12, 0.25, 9e-12, 2e10, (5, 10), 2e-7, (1, 36), (11, 1.1)),
    Material(0.03, CARBIDE, 1.1e-10, 3e-12, 0.3, 2.5e-13, 3e11, (10, 20), 2e-7, (0.05, 1), (18, 22)),
    Material(0.03, NITRIDE, 2.2e-10, 5e-12, 0.4, 2e-11, 4e10, (5,), 3e-7, (0.05, 1), (12, 14)),
    Material(0.09, INGAAS, 1.25e-10, 1e-12, 0.28, 7e-10, 7.5e7, (5, 10, 20), 4e-9, (0.05, 3.2), (16, 17)),
    Material(0.05, INGAAS_WIDE, 1.4e-10, 1e-12, 0.28, 9e-10, 6e7, (5, 10), 5e-9, (0.05, 3.2), (19, 18)),
)

# The passives do not grow with a benchmark's size: a buyer has few families of them.
RESISTORS = """\
family,maker,package,series,from,to,values,tolerance,tempco,parasitic_capacitance,price
ZQR1,Quvammor Parts,0402,E96,10 ohm,221 kohm,,0.1 %,25 ppm/C,0.03 pF,1:0.19; 100:0.11; 1000:0.062; 5000:0.044
ZQR2,Quvammor Parts,0603,E96,10 ohm,1 Mohm,,0.1 %,25 ppm/C,0.05 pF,1:0.17; 100:0.092; 1000:0.051; 5000:0.036
ZQR3,Quvammor Parts,0805,E192,20 ohm,2.21 Mohm,,0.05 %,10 ppm/C,0.06 pF,1:0.62; 100:0.41; 1000:0.28
ZQR4,Zhelissel Parts,0402,E96,1 ohm,10 Mohm,,1 %,100 ppm/C,0.03 pF,1:0.011; 100:0.0062; 1000:0.0034; 10000:0.0018
ZQR5,Zhelissel Parts,0603,E96,1 ohm,10 Mohm,,1 %,100 ppm/C,0.05 pF,1:0.012; 100:0.0068; 1000:0.0038; 5000:0.0022
ZQR6,Zhelissel Parts,0603,E24,1 ohm,22 Mohm,,5 %,200 ppm/C,0.05 pF,1:0.009; 100:0.005; 1000:0.0028; 5000:0.0016
ZQR7,Zhelissel Parts,0805,E24,10 Mohm,100 Mohm,,5 %,300 ppm/C,0.06 pF,1:0.34; 100:0.21; 1000:0.14
ZQR8,Braxundra Parts,1206,E24,4.7 Mohm,1 Gohm,,5 %,200 ppm/C,0.08 pF,1:0.78; 100:0.52; 1000:0.38
ZQR9,Braxundra Parts,2512,E6,100 Mohm,10 Gohm,,10 %,500 ppm/C,0.1 pF,1:2.90; 25:2.40; 100:1.95
ZQR10,Braxundra Parts,1206,list,,,100 Mohm; 200 Mohm; 500 Mohm; 1 Gohm; 2 Gohm; 5 Gohm,2 %,100 ppm/C,0.07 pF,1:3.60; 10:3.10; 100:2.45
"""  # noqa: E501 - a catalog's row is one line
CAPACITORS = """\
family,maker,package,series,from,to,values,tolerance,dielectric,price
ZQC1,Quvammor Parts,0402,E24,1 pF,100 pF,,5 %,C0G,1:0.032; 100:0.014; 1000:0.0075; 10000:0.0041
ZQC2,Braxundra Parts,0402,list,,,0.2 pF; 0.3 pF; 0.4 pF; 0.5 pF; 0.6 pF; 0.7 pF; 0.8 pF; 0.9 pF; 1 pF; 1.2 pF; 1.5 pF; 1.8 pF; 2.2 pF; 2.7 pF; 3.3 pF,10 %,C0G,1:0.12; 100:0.068; 1000:0.039
ZQC3,Quvammor Parts,0603,E12,10 pF,1 nF,,5 %,C0G,1:0.036; 100:0.016; 1000:0.0082; 5000:0.0056
ZQC4,Zhelissel Parts,0805,E12,1 nF,10 nF,,5 %,C0G,1:0.11; 100:0.061; 1000:0.037
ZQC5,Zhelissel Parts,1206,E6,10 nF,47 nF,,5 %,C0G,1:0.31; 100:0.19; 1000:0.13
ZQC6,Braxundra Parts,1206,E12,100 pF,22 nF,,2 %,PPS film,1:0.48; 100:0.32; 1000:0.23
ZQC7,Braxundra Parts,radial 5mm,E12,100 pF,100 nF,,1 %,PP film,1:0.39; 100:0.26; 1000:0.17
ZQC8,Zhelissel Parts,0603,E6,22 nF,1 uF,,10 %,X7R,1:0.028; 100:0.012; 1000:0.0061; 5000:0.0043
"""  # noqa: E501 - a catalog's row is one line

_COMMON = """
quantity = 200
currency = "EUR"

[ambient]
coldest = "-20 C"
hottest = "60 C"
"""
_SINGLE = '[supply]\nhigh = "5 V"\ntolerance = "4 %"\nguard = "50 mV"\n'
_EASY = """
[light]
wavelength = "860 nm"
weakest = "20 nW"
strongest = "3 uW"
background = "5 nW"
[targets]
bandwidth = "20 kHz"
snr = "46 dB"
dynamic_range = "80 dB"
phase_margin = "55 deg"
peaking = "1 dB"
offset = "30 mV"
supply_current = "3 mA"
cost = 6.0
"""
_FAST = """
[light]
wavelength = "905 nm"
weakest = "1 uW"
strongest = "60 uW"
[targets]
bandwidth = "20 MHz"
snr = "22 dB"
phase_margin = "50 deg"
peaking = "1.5 dB"
slew = 1.5
offset = "100 mV"
supply_current = "30 mA"
[space]
resistance = { from = "1 kohm", to = "1 Mohm" }
"""
_DUAL = """
[supply]
high = "5 V"
low = "-5 V"
tolerance = "5 %"
guard = "100 mV"
[light]
wavelength = "650 nm"
weakest = "5 nW"
strongest = "2 uW"
[targets]
bandwidth = "5 kHz"
snr = "46 dB"
dynamic_range = "90 dB"
phase_margin = "60 deg"
offset = "20 mV"
[space]
low_pass = ["none", "10 kHz", "30 kHz"]
"""
_NOTHING = """
[light]
wavelength = "860 nm"
weakest = "40 nW"
strongest = "4 uW"
[targets]
bandwidth = "2 MHz"
snr = "40 dB"
phase_margin = "50 deg"
peaking = "2 dB"
"""
_CORNERS = """[tolerance]
method = "corners"
gbw = "30 %"
voltage_noise = "20 %"
input_capacitance = "20 %"
diode_capacitance = "20 %"
responsivity = "10 %"
"""

REQUESTS = {
    "easy-by-cost": _COMMON + _SINGLE + _EASY,
    "easy-by-margin": _COMMON + _SINGLE + _EASY + '[ranking]\nby = "margin"\n',
    "dual-by-cost": _COMMON + _DUAL,
    "dual-by-snr": _COMMON + _DUAL + '[ranking]\nby = "snr"\n',
    "fast-by-cost": _COMMON + _SINGLE + _FAST,
    "fast-by-margin": _COMMON + _SINGLE + _FAST + '[ranking]\nby = "margin"\n',
    "nothing": _COMMON + _SINGLE + _NOTHING,
    "easy-by-cost-corners": _COMMON + _SINGLE + _EASY + _CORNERS,
}
