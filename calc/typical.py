"""Speed and poles, and what is usual for a three-phase cage motor of its size where the plate is silent."""

from __future__ import annotations

import math
from bisect import bisect_right
from typing import Final

from calc.errors import RangeError
from calc.lookup import curve, rows

MOST_POLES: Final = 60


def synchronous_speed_rpm(*, frequency_hz: float, poles: int) -> float:
    r"""Return the speed of the stator's rotating field.

    Parameters
    ----------
    frequency_hz : float
        Supply frequency at the terminals. [Hz]
    poles : int
        Poles, not pole pairs. [1]

    Returns
    -------
    float
        Synchronous speed. [r/min]

    Raises
    ------
    RangeError
        If ``frequency_hz`` is not above zero, or ``poles`` is not 2, 4, 6, …

    Notes
    -----
    .. math:: n_s = 120\,f / p

    References
    ----------
    .. [1] A. E. Fitzgerald, C. Kingsley Jr. and S. D. Umans, "Electric
       Machinery", 6th ed. New York, NY, USA: McGraw-Hill, 2003, ch. 4.

    Examples
    --------
    >>> synchronous_speed_rpm(frequency_hz=60.0, poles=4)
    1800.0

    """
    if not frequency_hz > 0.0:  # also refuses nan
        raise RangeError("frequency_hz", frequency_hz, "above zero")
    if poles < 2 or poles % 2:
        raise RangeError("poles", poles, "2, 4, 6, … (a pole pair counts as two)")
    return 120.0 * frequency_hz / poles


def poles_from_speed(*, speed_rpm: float, frequency_hz: float) -> int:
    """Return the poles of an induction motor from its rated speed.

    Parameters
    ----------
    speed_rpm : float
        Rated speed. [r/min]
    frequency_hz : float
        Rated frequency. [Hz]

    Returns
    -------
    int
        The number of poles whose slip at that speed is nearest to the usual one; a speed
        up to 2 % above synchronous (a rounded or wrong plate) still counts to its own. [1]

    Raises
    ------
    RangeError
        If one of them is not above zero.

    Examples
    --------
    >>> poles_from_speed(speed_rpm=1455.0, frequency_hz=50.0)
    4

    """
    if not speed_rpm > 0.0:
        raise RangeError("speed_rpm", speed_rpm, "above zero")
    usual_slip = 0.03
    slips = {
        poles: 1.0 - speed_rpm / synchronous_speed_rpm(frequency_hz=frequency_hz, poles=poles)
        for poles in range(2, MOST_POLES + 2, 2)
    }
    possible = {poles: slip for poles, slip in slips.items() if slip > -0.02} or {2: slips[2]}
    return min(possible, key=lambda poles: abs(possible[poles] - usual_slip))


def class_efficiency(*, efficiency_class: str, power_w: float, poles: int) -> float:
    r"""Return the nominal efficiency of an efficiency class at 50 Hz.

    Parameters
    ----------
    efficiency_class : str
        IE1, IE2, IE3 or IE4.
    power_w : float
        Rated output; held to 120 W … 200 kW, where the formula is valid. [W]
    poles : int
        2, 4 or 6; more count as 6. [1]

    Returns
    -------
    float
        Nominal efficiency, as a fraction. [1]

    Raises
    ------
    RangeError
        If there is no such class, or ``power_w`` is not above zero.

    Notes
    -----
    .. math:: \eta = A x^3 + B x^2 + C x + D, \quad x = \log_{10}(P/\mathrm{kW})

    References
    ----------
    .. [1] IEC 60034-30-1, interpolation coefficients (``tables/efficiency_classes.csv``).

    """
    if not power_w > 0.0:
        raise RangeError("power_w", power_w, "above zero")
    column = str(min((2, 4, 6), key=lambda known: abs(known - poles)))
    for row in rows("efficiency_classes"):
        if row["class"] == efficiency_class and row["poles"] == column:
            x = math.log10(min(max(power_w / 1000.0, 0.12), 200.0))
            a, b, c, d = (float(row[name]) for name in "abcd")
            return (((a * x + b) * x + c) * x + d) / 100.0
    raise RangeError("efficiency_class", efficiency_class, "IE1, IE2, IE3 or IE4")


def typical_efficiency(*, power_w: float, poles: int, frequency_hz: float) -> float:
    """Return the efficiency to expect at rated load where the plate does not say.

    Parameters
    ----------
    power_w : float
        Rated output. [W]
    poles : int
        Number of poles. [1]
    frequency_hz : float
        Rated frequency. [Hz]

    Returns
    -------
    float
        Efficiency, as a fraction. [1]

    Notes
    -----
    IE2 less 1.2 points stands in the middle of what runs in plants, old and new; eight
    poles and more lose about two points against six, and 60 Hz gains half a point: judgement.
    Above 200 kW, where the classes end, the share of losses goes on falling with the fourth
    root of the output, to the 2.3 to 4.5 % that large motors lose [1]_.

    References
    ----------
    .. [1] IEEE 3001.5, Table 1, losses above 1500 hp.

    """
    efficiency = class_efficiency(efficiency_class="IE2", power_w=power_w, poles=poles)
    efficiency += -0.012 - (0.02 if poles >= 8 else 0.0) + (0.005 if frequency_hz > 55.0 else 0.0)
    fewer = math.pow(max(power_w / 200_000.0, 1.0), -0.25)
    return 1.0 - (1.0 - efficiency) * fewer


def typical_power_factor(*, power_w: float, poles: int) -> float:
    """Return the power factor to expect at rated load where the plate does not say.

    Parameters
    ----------
    power_w : float
        Rated output. [W]
    poles : int
        Number of poles. [1]

    Returns
    -------
    float
        Power factor. [1]

    References
    ----------
    .. [1] Common practice, from memory (``tables/typical_power_factor.csv``).

    """
    return _by_size("typical_power_factor", power_w, poles)


def typical_locked_rotor_ratio(*, power_w: float, poles: int) -> float:
    """Return the locked-rotor current over rated current to expect where the plate does not say.

    Parameters
    ----------
    power_w : float
        Rated output. [W]
    poles : int
        Number of poles. [1]

    Returns
    -------
    float
        Ratio of locked-rotor to rated current, direct on line. [1]

    References
    ----------
    .. [1] Common practice, from memory (``tables/typical_locked_rotor_ratio.csv``).

    """
    return _by_size("typical_locked_rotor_ratio", power_w, poles)


def _by_size(name: str, power_w: float, poles: int) -> float:
    """Interpolate a table in the logarithm of the output, flat beyond its ends."""
    if not power_w > 0.0:
        raise RangeError("power_w", power_w, "above zero")
    powers, values = curve(name, poles)
    place = bisect_right(powers, power_w)
    if place in {0, len(powers)}:
        return values[min(place, len(powers) - 1)]
    low, high = powers[place - 1], powers[place]
    share = math.log(power_w / low) / math.log(high / low)
    return values[place - 1] + share * (values[place] - values[place - 1])


def typical_slip(*, power_w: float) -> float:
    """Return the slip to expect at rated load where the plate does not say.

    Parameters
    ----------
    power_w : float
        Rated output. [W]

    Returns
    -------
    float
        Slip, as a fraction of synchronous speed. [1]

    Notes
    -----
    4.5 % at 1 kW, falling with the power of -0.28: a line through catalogue values
    (common practice, from memory).

    """
    if not power_w > 0.0:
        raise RangeError("power_w", power_w, "above zero")
    return float(0.045 * max(power_w / 1000.0, 0.1) ** -0.28)
