"""The temperatures of a fixed record, and what else files put into their columns."""

from __future__ import annotations

import re
from typing import Final

from heatwright.reading.compositions import count, molar_mass_u
from heatwright.reading.entry_file import USUAL_COMMON_K
from heatwright.reading.record_elements import read_fifth_element
from heatwright.reading.record_line import SHIFT_IT, Head

MASS_TOLERANCE_U: Final = 0.1

_TEMPERATURE = re.compile(r"\d+\.?\d*|\.\d+")
_LETTER_AND_MASS = re.compile(r" {0,3}([A-Za-z]) +(\d+\.\d*) *")


def read_temperatures(head: Head) -> None:
    """Columns 46-79: three temperatures, and what else old files put among them."""
    low = _temperature(head, 45, 55, "lowest temperature", 0)
    high = _temperature(head, 55, 65, "highest temperature", 2)
    common = _common(head, low, high)
    if low is not None and high is not None and common is not None:
        head.temperatures_K = (low, common, high)


def _temperature(head: Head, first: int, end: int, what: str, default: int) -> float | None:
    text = head.line[first:end]
    if _TEMPERATURE.fullmatch(text.strip()):
        return float(text)
    if not text.strip() and head.defaults_K is not None:
        value = head.defaults_K[default]
        words = f"the {what} is blank; the section's default, {value:g} K, was taken"
        head.say("warn", "temperature-default", words, first + 1, end - first, action="Write it into the record.")
        return value
    found = f"the field of the {what} holds {text!r}" if text.strip() else f"the {what} is blank"
    expected = f"a temperature in columns {first + 1} to {end}"
    head.say("refuse", "record-columns", found, first + 1, end - first, expected=expected, action=SHIFT_IT)
    return None


def _common(head: Head, low: float | None, high: float | None) -> float | None:
    """The common temperature in columns 66-73, and what else old files put there and behind it."""
    tail = head.line[65:79]
    with_letter = _LETTER_AND_MASS.fullmatch(tail)
    if with_letter is not None:
        return _mass_instead(head, float(with_letter[2]), f"quality letter {with_letter[1]} and ")
    text, fifth = tail[:8], tail[8:13]
    if fifth[:1].isdigit() and text.strip() and count(fifth) != 0:
        text, fifth = tail[:10], tail[10:13]  # a number that fills columns 66-75
    if not text.strip():
        read_fifth_element(head, fifth)
        return _default_common(head, "blank")
    if not _TEMPERATURE.fullmatch(text.strip()):
        head.say(
            "refuse",
            "record-columns",
            f"the field of the common temperature holds {text!r}",
            66,
            8,
            expected="a temperature, or blanks, in columns 66 to 73",
            action=SHIFT_IT,
        )
        return None
    value = float(text)
    outside = low is not None and high is not None and not low < value < high
    if outside and head.composition and abs(value - molar_mass_u(head.composition)) < MASS_TOLERANCE_U:
        return _mass_instead(head, value, "")
    read_fifth_element(head, fifth)
    return value


def _mass_instead(head: Head, mass: float, letter: str) -> float:
    head.say(
        "warn",
        "molar-mass-field",
        f"{letter}the molar mass {mass:g} {'stand' if letter else 'stands'} where the common temperature belongs",
        66,
        13,
        expected="the common temperature in columns 66 to 73",
        action="Readers without this variant take the mass for a temperature; write the common temperature there.",
    )
    computed = molar_mass_u(head.composition)
    if head.composition and abs(mass - computed) > MASS_TOLERANCE_U:
        words = f"the molar mass in the record is {mass:g}, that of its composition {computed:.4f}"
        head.say("warn", "composition-mismatch", words, 66, 13, action="One of the two is wrong.")
    return _default_common(head, "not given")


def _default_common(head: Head, what: str) -> float:
    value = USUAL_COMMON_K if head.defaults_K is None else head.defaults_K[1]
    usual = value == USUAL_COMMON_K
    source = "usual one" if head.defaults_K is None else "section's default"
    head.say(
        "note" if usual else "warn",
        "common-temperature-blank",
        f"the common temperature is {what}; the {source}, {value:g} K, was taken",
        66,
        8,
        action="Write it into the record: in another file the default may be another one.",
    )
    return value
