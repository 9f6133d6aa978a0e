"""The words of the page for what the figures and the noise are called."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.report.changes import ARROW
from optimizer.report.words import figure
from optimizer.vocabulary import TARGETS, VOCABULARY

CONTRIBUTIONS: Mapping[str, str] = {
    "feedback_resistor": "Rf thermal",
    "shunt": "diode shunt thermal",
    "signal_shot": "weakest-light shot",
    "background_shot": "background-light shot",
    "dark_shot": "dark-current shot",
    "amplifier_current": "op-amp current",
    "amplifier_voltage": "op-amp white voltage",
    "amplifier_flicker": "op-amp flicker voltage",
    "reference_divider": "reference divider",
    "reference_buffer": "reference buffer",
    "converter": "converter steps",
}


def term(name: str) -> str:
    """What a target or figure is called in a sentence: 'phase margin', 'SNR'."""
    return VOCABULARY[name].heading if name in VOCABULARY else clean(name).replace("_", " ")


_NAMES = "|".join(name for name in TARGETS if "_" in name or name == "snr")  # no words of every day
_KEYS = re.compile(rf"(?<![\w/-])({_NAMES})(?![\w/-])")


def in_terms(text: str) -> str:
    """`text` with targets called as in a sentence, where it has them by their keys: 'phase_margin', 'snr'."""
    return _KEYS.sub(lambda key: term(key[0]), text)


def arrows(text: str) -> str:
    """`text` with 'old -> new' written by a sign that no line end parts."""
    return text.replace(ARROW, " \u2192 ")


def merged(parts: Sequence[tuple[str, str]]) -> Iterator[tuple[str, str]]:
    """A parts list with words that go on joined to the line before."""
    label, text = parts[0]
    for following, words in parts[1:]:
        if following:
            yield label, text
            label, text = following, words
        else:
            text = "; ".join(said for said in (text, words) if said)
    yield label, text


def contribution(name: str) -> str:
    """What a contribution to the noise is called."""
    return CONTRIBUTIONS.get(name, clean(name).replace("_", " "))


def counted(number: int) -> str:
    """Small counts as a sentence writes them: 'one', 'twelve', '13'."""
    words = ("no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven")
    return words[number] if 0 <= number < len(words) else f"{number:,}"


def joined(texts: Sequence[str]) -> str:
    """Texts in a sentence: 'a', 'a and b', 'a, b and c'."""
    if len(texts) < 2:
        return "".join(texts)
    return f"{', '.join(texts[:-1])} and {texts[-1]}"


def money(value: float | None, data: Mapping[str, Any]) -> str:
    """A cost with the record's currency, '-' where there is none."""
    text = figure("cost", value, data["request"])
    currency = data.get("currency")
    return f"{text} {clean(currency)}" if currency and value is not None else text
