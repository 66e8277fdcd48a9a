"""What a severity means in words, for every attribute that a severity latent may set."""

from __future__ import annotations

from typing import Final

# attribute -> sentence part with the amount; percent where the attribute is a share
_WORDS: Final = {
    "level": "supply {percent} off",
    "volts_below": "supply {percent} low",
    "volts_above": "supply {percent} high",
    "volts_lost": "{percent} of the voltage lost",
    "volts_over": "supply {percent} high",
    "unbalance_sd": "a negative sequence of {percent}",
    "frequency_change": "frequency {percent} off",
    "line_r": "a joint of {percent} of rated impedance",
    "phase_r": "a joint of {percent} of rated impedance",
    "turns": "{percent} of a phase's turns shorted",
    "turns_shorted": "{percent} of the main winding's turns shorted",
    "path_r": "a path between phases of {number} times rated impedance",
    "earth_ohm": "a path to earth of {number} ohm",
    "bars": "{percent} of the rotor bars broken",
    "load": "load at {percent} of rated torque",
    "load_set": "load at {percent} of rated torque",
    "torque": "load at {percent} of rated torque",
    "hot": "{number} times the usual temperature rise",
    "rise": "{number} times the usual temperature rise",
    "heat": "{number} times the usual temperature rise",
    "friction": "extra friction of {percent} of rated torque",
    "bearing_k": "a bearing {number} K hotter than usual",
    "field_shorted": "{percent} of the field's turns shorted",
    "magnets_lost": "{percent} of the magnets' flux lost",
    "coil_shorted": "{percent} of the armature's turns shorted",
    "brush_ohm": "brush resistance of {percent} of rated volts over amps",
    "off_neutral": "brushes off neutral by {percent} of the armature's ampere-turns",
    "start_lost": "{percent} of the start capacitor lost",
    "run_lost": "{percent} of the run capacitor lost",
}


def say_severity(attribute: str, amount: float) -> str:
    """Return a severity in words, such as ``2 % of a phase's turns shorted``.

    Parameters
    ----------
    attribute : str
        An attribute of some kind's model.
    amount : float
        Its amount, in the attribute's own unit.

    """
    size = abs(amount)
    words = _WORDS.get(attribute, attribute.replace("_", " ") + " of {number}")
    return words.format(percent=f"{_two_digits(100.0 * size)} %", number=_two_digits(size))


def _two_digits(value: float) -> str:
    """Write a number with two digits that count, never with an exponent where it is 10 or more."""
    text = f"{value:.2g}"
    return f"{float(text):.0f}" if value >= 10.0 else text
